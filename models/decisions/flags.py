"""What can be said of one row of a decision: what is missing, contradicts, or cannot be told."""

from models.flagging import Flag
from models.registry import Registry

DECISION_FLAGS: Registry[Flag] = Registry(
    "flag",
    Flag(key="no-water-content", condition="A sensor that counts for the root zone has no water "
         "content.", text="The water of the root zone is not known.",
         reason="A mean that leaves out a layer is that of another soil.", keeps_number=False),
    Flag(key="frozen-root-zone", condition="A sensor that counts was at or below 0 Cel.",
         text="Part of the root zone is frozen: only unfrozen water was read.",
         reason="Ice is water of the root zone that a dielectric reading does not show, so there "
         "is neither storage nor depletion.", keeps_number=False),
    Flag(key="root-zone-above-pores", condition="porosity is given, and a water content that "
         "counts is above it by more than its own interval.",
         text="More water than pores: there is neither storage nor depletion.",
         reason="A probe in a gap filled with water, an equation outside its range, or a wrong "
         "porosity.", keeps_number=False),
    Flag(key="no-pore-water-conductivity", condition="A sensor that counts has no conductivity of "
         "its pore water, while others do.", text="The salt of the root zone is not known.",
         reason="A sum that leaves out a layer is that of another soil.", keeps_number=True),
    Flag(key="sensors-end-above-root-depth", condition="The deepest sensor is above root_depth and "
         "assume.below_sensors was not said.",
         text="The profile ends above the bottom of the root zone: storage is told down to there, "
         "and no depletion.",
         reason="What lies below the deepest sensor was not measured. assume.below_sensors takes "
         "it to be as the deepest sensor.", keeps_number=True),
    Flag(key="extended-below-sensors", condition="The deepest sensor is above root_depth and "
         "assume.below_sensors was said.",
         text="The deepest sensor stands for everything below it.",
         reason="The caller said so; the band does not hold what the soil does there.",
         keeps_number=True),
    Flag(key="texture-default-limits", condition="Field capacity or wilting point came from the "
         "texture class.",
         text="Available water, depletion and refill rest on defaults of a texture class.",
         reason="The ranges of a class are wide: a refill by them is a guess with a band.",
         keeps_number=True),
    Flag(key="above-field-capacity", condition="The water content is above field capacity.",
         text="Above field capacity: water drains, the depletion is 0.",
         reason="Nothing is missing to field capacity.", keeps_number=True),
    Flag(key="below-wilting-point", condition="The water content is below the wilting point.",
         text="Below the wilting point: the depletion is the total available water.",
         reason="Plants cannot take up the rest. A wrong limit or reading does that as well.",
         keeps_number=True),
    Flag(key="efficiency-missing", condition="Neither efficiency nor irrigation was given.",
         text="There is no gross refill depth.",
         reason="It is the net one over the efficiency of the system.", keeps_number=True),
    Flag(key="above-application-limit", condition="The gross refill is above application_limit.",
         text="The system gives less at once than is missing.",
         reason="application is cut at the stated limit.", keeps_number=True),
    Flag(key="water-too-saline", condition="Five times the target conductivity (method "
         "high-frequency: twice) or less is that of the water, or the share would be 1 or more.",
         text="The water is too saline for this target: no share of it would keep the extract "
         "there.", reason="A requirement of 1 or more is no requirement.", keeps_number=False),
    Flag(key="water-perhaps-too-saline", condition="Within the interval the water is too saline "
         "for the target.", text="Nothing rules out that no share of this water would do: there is "
         "no upper end.", reason="The errors of water and target reach beyond what can be leached.",
         keeps_number=True),
    Flag(key="more-than-the-volume", condition="Solids of 2.65 g/cm3 (mineral soil, common "
         "practice) and the water would take more than all of the volume.",
         text="So dense a soil would have no room for this water.",
         reason="Coefficients of another soil, a wrong total density of the mould, or a wrong "
         "reading.", keeps_number=True),
    Flag(key="frozen-place", condition="The temperature of the place is at or below 0 Cel.",
         text="Only unfrozen water was read: neither water content nor density is that of the "
         "place.", reason="Ice is water that a dielectric reading does not show.",
         keeps_number=True),
    Flag(key="water-exceeds-pores", condition="Water content is above porosity.",
         text="More water than pores: water content, bulk density or particle density is wrong.",
         reason="Nothing was cut: a saturation above 1 shows by how much they contradict.",
         keeps_number=True),
    Flag(key="saturation-not-told-apart", condition="The interval of the air content holds 0.",
         text="The soil cannot be told from a saturated one.",
         reason="Once saturated, water content says nothing of pressure.", keeps_number=True),
    Flag(key="denser-than-solids", condition="Bulk density is not below particle density.",
         text="The soil would be denser than its solids: there are no pores.",
         reason="Bulk density or particle density is wrong.", keeps_number=False),
    Flag(key="ill-conditioned", condition="a d - b c is within two standard uncertainties of 0.",
         text="Both equations are nearly the same: they do not tell water from density.",
         reason="Any pair of water content and density on a line would do.", keeps_number=False),
    Flag(key="no-physical-answer", condition="The equations have no answer with a density above 0 "
         "and a water content of at least 0.",
         text="No soil with these coefficients has these readings.",
         reason="Coefficients of another soil, another unit, or a wrong reading.",
         keeps_number=False),
    Flag(key="outside-temperature-adjustment", condition="A temperature is outside 4 to 40 Cel.",
         text="The temperature adjustment does not reach that far.",
         reason="It was established from 4 to 40 Cel.", keeps_number=False),
)  # fmt: skip
