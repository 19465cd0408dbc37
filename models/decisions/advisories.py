"""What is said with decisions: cautions that stand beside every number; no switch removes one."""

from models.advisories import Advice, Advisory
from models.registry import Registry

DECISION_ADVISORIES: Registry[Advisory] = Registry(
    "advisory",
    Advisory(key="refill-limits", condition="An answer about a root zone.",
             text="Depth to refill the stated root zone under the stated field-capacity, "
             "wilting-point and efficiency values. Check crop stage, forecast, water rights and "
             "drainage. More water than the soil can hold drains below the roots and may carry "
             "salts and nitrate."),
    Advisory(key="limits-by-texture", condition="Field capacity or wilting point came from the "
             "texture class.",
             text="Field capacity or wilting point of {count} root zones came from the texture "
             "class: the middle of a wide range, never a field value. Depletion and refill depth "
             "rest on it; the band holds the width of the range. Give field_capacity and "
             "wilting_point, measured or from the field's own wet and dry ends."),
    Advisory(key="crop-defaults", condition="Numbers of a crop came from the tables.",
             text="{names} came from the table of crops: guides that climate, variety, stage and "
             "management change."),
    Advisory(key="crop-root-depth", condition="The root depth is that of a crop.",
             text="The root depth of {count} root zones is the smaller of the two that the table "
             "has for the crop, and counts as a chosen depth, without uncertainty."),
    Advisory(key="shared-by-default", condition="A profile states water_content_u without "
             "water_content_u_shared.",
             text="The whole uncertainty of the water contents of {count} profiles was taken as "
             "shared by all of their sensors, as that of one calibration or model is: it adds up "
             "in full. State water_content_u_shared where part of it differs from sensor to "
             "sensor."),
    Advisory(key="salt-by-conductivity", condition="The answer holds stored salt.",
             text="Salt was reckoned as 640 mg/L for each dS/m of pore water, which the mix of "
             "ions moves by 20 % either way; the band holds that. Salt that is not dissolved does "
             "not show. Water content and conductivity of one sensor count as independent."),
    Advisory(key="yield-guides", condition="An answer about leaching.",
             text="Threshold-slope values are guides; climate, variety, stage and management "
             "change them. EC does not show sodium, boron, chloride or pH: obtain a laboratory "
             "analysis before leaching, amending or changing crop."),
    Advisory(key="low-salinity", condition="The water is below 0.7 dS/m, or the extract below the "
             "first edge of its scheme.",
             text="Low salinity does not rule out a sodium or infiltration problem."),
    Advisory(key="leaching-drainage", condition="An answer about leaching.",
             text="Needs adequate drainage and a place for the drainage water; local rules may "
             "apply."),
    Advisory(key="submerged-rice", condition="The crop is rice.",
             text="For rice while submerged the conductivity of threshold and slope is that of the "
             "soil water, not of the saturation extract."),
    Advisory(key="earthworks", condition="An answer about soil state or density in place.",
             text="Water content is one observation. It does not give pore pressure, strength, "
             "seepage rate or a factor of safety. Limits and responses come from the owner's "
             "monitoring plan and the responsible engineer. Absence of an alarm is not evidence of "
             "safety. If you see seepage, cracking or movement, follow the site's emergency plan."),
    Advisory(key="compaction-acceptance", condition="An answer about soil state or density in "
             "place.",
             text="For information; acceptance follows the project specification and its reference "
             "tests."),
    Advisory(key="particle-density-assumed", condition="No particle density was given.",
             text="Particle density of {count} soils was taken as that of mineral soil, 2.65 g/cm3 "
             "to 0.05 (k = 1); organic soils and iron-rich ones lie elsewhere."),
    Advisory(key="in-place-scope", condition="An answer about density in place.",
             text="Established for soils with at most 30 % by mass retained on a sieve of 19 mm; "
             "organic and highly plastic soils may not follow the equations. a, b, c and d belong "
             "to one soil: another borrow or layer needs its own."),
    Advisory(key="conductivity-standard", condition="Density in place by one step.",
             text="standard_conductivity must be adjusted to the pore water for which c and d "
             "hold; with the bulk conductivity as read, water content and density are wrong by "
             "more than the band. c and d were taken to hold for conductivity in {unit}."),
    Advisory(key="not-brought-to-20-degrees", condition="A temperature or soil_kind is missing "
             "from an answer about density in place.",
             text="Permittivities were used as read in {count} places: bringing them to 20 Cel "
             "takes soil_kind and the temperatures of place and mould. From 15 to 25 Cel it "
             "matters little."),
    Advisory(key="twenty-degrees-from-memory", condition="Permittivities were brought to 20 Cel.",
             text="The factors that bring permittivity to 20 Cel are known from memory only, and "
             "have no uncertainty of their own in the band."),
)  # fmt: skip


def say(code: str, **places: object) -> Advice:
    """One advisory of decisions with its places filled in."""
    return Advice(code, DECISION_ADVISORIES[code].text.format(**places))
