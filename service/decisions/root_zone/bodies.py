"""What POST /v1/root-zone takes, and how OpenAPI describes it."""

from typing import Annotated, Any, Literal

from pydantic import Field, TypeAdapter, WithJsonSchema

from models.decisions.root_zone import EFFICIENCIES
from models.series.rules import STORAGE_RULES
from service.decisions.description import NUMBER, answer_schema, described, row_schema
from service.decisions.fields import (
    MOST_SENSORS,
    CropKey,
    DecisionSettings,
    TextureKey,
    Width,
    exact,
    item_of,
    items,
    optional,
    word,
)
from service.schemas.words import Body, Number, body_of

NOUN = "root_zones"
MOST_IN_ALL = 20_000
"""Sensors of one request."""
RuleKey = Annotated[str, WithJsonSchema({"type": "string", "enum": list(STORAGE_RULES)})]
IrrigationKey = Annotated[str, WithJsonSchema({"type": "string", "enum": list(EFFICIENCIES)})]
OUTCOMES = ("storage", "total_available_water", "readily_available_water", "depletion",
            "gross_refill", "application", "stress_coefficient", "days_left")  # fmt: skip
"""Numbers of ``models.decisions.Depletion`` by the name they have in an answer."""
SALT = ("salt_storage", "pore_water_conductivity")

SensorBody = body_of(
    "Sensor",
    "A sensor of a profile; water_content may be null where it has none.",
    {
        "depth": (Number, Field(description=word("depth"))),
        **optional(("water_content", "pore_water_conductivity")),
        "water_content_u_shared": (
            Width | None,
            Field(None, description="the part of water_content_u that all sensors of the profile "
                  "share; all of it where this is not given [m3/m3]"),
        ),
        **exact(("temperature",)),
    },
)  # fmt: skip

RootZoneBody = item_of(
    "RootZone",
    "A root zone: its water as a profile of sensors or as a mean, and its limits.",
    {
        "profile": (
            Annotated[list[SensorBody], Field(min_length=1, max_length=MOST_SENSORS)] | None,  # type: ignore[valid-type]
            Field(None, description="sensors at their depths, all different, in any order"),
        ),
        **optional(("water_content",)),
        **exact(("temperature", "porosity")),
        "texture": (
            TextureKey | None,
            Field(None, description="class whose defaults stand in for field_capacity and "
                  "wilting_point that are not given; a flag and an advisory say so"),
        ),
        **optional(("field_capacity", "wilting_point")),
        "crop": (
            CropKey | None,
            Field(None, description="whose root depth (the smaller of two) and depletion fraction "
                  "stand in for those not given; see /v1/crops"),
        ),
        **optional(("root_depth", "depletion_fraction")),
        **exact(("crop_evapotranspiration",)),
        "irrigation": (
            IrrigationKey | None,
            Field(None, description="kind of system, for an indicative efficiency"),
        ),
        **exact(("efficiency", "leaching_requirement", "application_limit")),
    },
)  # fmt: skip


class AssumeBelow(Body):
    """What may be assumed where there is no sensor."""

    below_sensors: Literal["as-deepest"] | None = Field(
        None,
        description="the deepest sensor stands for everything below it, down to root_depth; left "
        "out, a root zone that goes deeper has no depletion",
    )


class RootZonesBody(DecisionSettings):
    """Root zones, one or a list of them."""

    root_zones: items(RootZoneBody) = Field(  # type: ignore[valid-type]
        description="one root zone or a list of them"
    )
    rule: RuleKey = Field("layer", description="by which sensors become a profile")
    assume: AssumeBelow = AssumeBelow()


ROOT_ZONES: TypeAdapter[RootZonesBody] = TypeAdapter(RootZonesBody)
_MORE: dict[str, Any] = {
    "exceedance_probability": {
        **NUMBER,
        "description": "probability that the depletion is above the readily available water",
    },
    "distinguishable": {
        "type": ["boolean", "null"],
        "description": "whether that is at most 0.05 or at least 0.95",
    },
    "compared": {
        "type": ["string", "null"],
        "enum": ["below", "above", "cannot be told apart", None],
        "description": "the depletion, with the readily available water",
    },
    "profile": {
        "type": "object",
        "description": "what sensors stand for, from the top down, how far they reach, and the "
        "share of the root depth that they cover",
    },
}
DESCRIPTION = described(
    ROOT_ZONES,
    "The water of a root zone, as a profile of sensors or as a mean, with field capacity and "
    "wilting point as given, or as a texture class has them (wide). A crop gives root depth and "
    "depletion fraction, the latter moved by crop_evapotranspiration (0.04 for each mm/d below "
    "5 mm/d). The uncertainty of a profile is shared by its sensors unless "
    "water_content_u_shared says otherwise. Errors of field capacity and water content count as "
    "independent. At most 20 000 sensors in all.",
    answer_schema(
        NOUN,
        row_schema(("water_content", *OUTCOMES, *SALT), _MORE),
        {"rule": {"type": "object", "description": "by which sensors became a profile"}},
    ),
    "Numbers, with bands, and how depletion compares with the readily available water: below, "
    "above, or not to be told apart. No number where sensors were frozen or have none.",
)
