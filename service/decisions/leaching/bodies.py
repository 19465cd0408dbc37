"""What POST /v1/leaching takes, and how OpenAPI describes it."""

from typing import Annotated, Any

from pydantic import Field, TypeAdapter, WithJsonSchema

from models.decisions.leaching import CONVENTIONAL, METHODS
from models.decisions.salinity_class import SOIL_SCHEMES
from service.decisions.description import answer_schema, described, row_schema
from service.decisions.fields import CropKey, DecisionSettings, exact, item_of, items, optional

NOUN = "fields"
MethodKey = Annotated[str, WithJsonSchema({"type": "string", "enum": list(METHODS)})]
SchemeKey = Annotated[str, WithJsonSchema({"type": "string", "enum": list(SOIL_SCHEMES)})]
OUTCOMES = ("leaching_requirement", "applied_water", "mean_extract_conductivity",
            "concentration_factor", "relative_yield", "curved_yield")  # fmt: skip

FieldBody = item_of(
    "LeachingField",
    "A field: the water it is given, the crop or target it has, and the salt that was found.",
    {
        **optional(("water_conductivity",)),
        "crop": (
            CropKey | None,
            Field(None, description="whose salt_threshold and salt_slope stand in for those not "
                  "given; see /v1/crops"),
        ),
        **optional(("salt_threshold", "salt_slope", "target_extract_conductivity")),
        **exact(("target_yield",)),
        **optional(("evapotranspiration", "leaching_fraction", "saturation_extract_conductivity")),
    },
)  # fmt: skip


class LeachingBody(DecisionSettings):
    """Fields, one or a list of them."""

    fields: items(FieldBody) = Field(description="one field or a list of them")  # type: ignore[valid-type]
    method: MethodKey = Field(
        CONVENTIONAL,
        description="conventional: ECw / (5 ECe - ECw), ECe that of the target; high-frequency, "
        "for drip and daily sprinkling: ECw / (2 ECe), ECe that at which nothing is left",
    )
    salinity_scheme: SchemeKey = Field(
        "handbook-60", description="by which the extract is put into a class"
    )


LEACHING: TypeAdapter[LeachingBody] = TypeAdapter(LeachingBody)
_CLASS = {
    "type": "object",
    "description": "class by the named scheme, with the probability of each of its classes",
}
_MORE: dict[str, Any] = {
    "root_zone_profile": {
        "type": "object",
        "description": "conductivity of the soil water at the top of each quarter of the root zone "
        "and at its bottom, where roots take up 40, 30, 20 and 10 % of the water",
    },
    "water_class": _CLASS,
    "salinity_class": _CLASS,
}
DESCRIPTION = described(
    LEACHING,
    "With water_conductivity and a target: the leaching requirement; with evapotranspiration the "
    "water to apply; with either a target or a leaching_fraction what the root zone comes to after "
    "long use. With saturation_extract_conductivity: its class, and with a crop or a threshold and "
    "slope the relative yield, by the line and by the smooth curve. The target is the extract of "
    "90 % of the yield, of all of it where the water is above 1.5 dS/m, unless target_yield or "
    "target_extract_conductivity says otherwise.",
    answer_schema(
        NOUN,
        row_schema(OUTCOMES, _MORE),
        {"method": {"type": "object", "description": "name and equation"}},
    ),
    "Numbers with bands; no requirement, and a flag, where the water is too saline for the target.",
)
