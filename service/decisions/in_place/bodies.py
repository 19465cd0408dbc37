"""What POST /v1/in-place-density takes, and how OpenAPI describes it."""

from typing import Annotated, Any, Literal

from pydantic import Field, TypeAdapter, WithJsonSchema

from models.decisions.in_place_density import KINDS
from service.decisions.description import NUMBER, answer_schema, described, row_schema
from service.decisions.fields import (
    DecisionSettings,
    Width,
    exact,
    item_of,
    items,
    needed,
    optional,
    word,
)
from service.schemas.words import Body, Number, body_of

NOUN = "places"
KindKey = Annotated[str, WithJsonSchema({"type": "string", "enum": list(KINDS)})]
OUTCOMES = ("gravimetric_water_content", "bulk_density", "water_content", "total_density",
            "compaction")  # fmt: skip

PlaceBody = item_of(
    "InPlaceReading",
    "A place: what a probe in the compacted soil reads.",
    {
        **needed("apparent_permittivity"),
        **exact(("temperature",)),
        **optional(("standard_conductivity",)),
    },
)
MouldBody = body_of(
    "Mould",
    "The same soil, compacted in a mould of known volume and weighed.",
    {
        **needed("apparent_permittivity"),
        **needed("total_density"),
        **exact(("temperature",)),
    },
)


class CoefficientsBody(Body):
    """Of the soil: sqrt(Ka) / rho_d = a + b w, sqrt(conductivity) / rho_d = c + d w.

    Dry density in g/cm3; conductivity in the unit it has in the request. None has a default.
    """

    a: Annotated[Number, Field(gt=-100, lt=100)]
    a_u: Width = 0.0
    b: Annotated[Number, Field(gt=0, lt=1000)]
    b_u: Width = 0.0
    c: Number | None = Field(None, description="for one-step")
    c_u: Width = 0.0
    d: Number | None = Field(None, description="for one-step")
    d_u: Width = 0.0


class PlacesBody(DecisionSettings):
    """Places in the same soil, one or a list of them."""

    places: items(PlaceBody) = Field(description="one place or a list of them")  # type: ignore[valid-type]
    method: Literal["two-step", "one-step"] = Field(
        "two-step",
        description="two-step: the same soil in a mould, then in place; one-step: permittivity and "
        "standard_conductivity of the same place",
    )
    coefficients: CoefficientsBody
    mould: MouldBody | None = Field(None, description="for two-step")  # type: ignore[valid-type]
    soil_kind: KindKey | None = Field(
        None,
        description="brings permittivities to 20 Cel where places (and the mould) have a "
        "temperature",
    )
    largest_bulk_density: Number | None = Field(None, description=word("largest_bulk_density"))
    largest_bulk_density_u: Width | None = Field(
        None, description="standard uncertainty of largest_bulk_density [g/cm3]"
    )


PLACES: TypeAdapter[PlacesBody] = TypeAdapter(PlacesBody)
_MORE: dict[str, Any] = {
    "apparent_permittivity_20": {**NUMBER, "description": word("apparent_permittivity_20")},
    "apparent_permittivity_20_u": {**NUMBER, "description": "standard uncertainty [1]"},
    "condition_number": {
        **NUMBER,
        "description": "of the two equations, each scaled to length one; large: nearly the same "
        "equation twice (one-step)",
    },
}
DESCRIPTION = described(
    PLACES,
    "Water content and dry density of compacted soil from TDR readings, with coefficients fitted "
    "to this soil: in two steps by way of a mould of known total density, or in one step from "
    "permittivity and conductivity. The conductivity must be adjusted to that of the pore water "
    "for which c and d hold, and c and d are for the unit it has in the request (dS/m unless "
    "units.standard_conductivity names another).",
    answer_schema(
        NOUN,
        row_schema(OUTCOMES, _MORE),
        {
            "method": {"type": "string"},
            "coefficients": {"type": "object", "description": "as used, each with its _u"},
            "largest_bulk_density": {**NUMBER, "description": word("largest_bulk_density")},
            "largest_bulk_density_u": {**NUMBER, "description": "standard uncertainty [g/cm3]"},
            "mould": {"type": ["object", "null"], "description": "as used, with its sources"},
        },
    ),
    "Numbers with bands, bulk_density being the dry one; none, and a flag, where the two equations "
    "cannot be told apart or no soil has these readings.",
)
