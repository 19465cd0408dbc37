"""What POST /v1/calibrations takes."""

from collections.abc import Mapping
from types import MappingProxyType
from typing import Annotated, Any, Literal

from pydantic import Field, TypeAdapter

from models.quantity import QUANTITIES
from service.schemas.words import Body, Number, body_of, described, quantity_fields

MOST_PAIRS = 500
"""Of one request."""
MOST_BANDS = 1000
"""Permittivities at which bands are asked for."""
PERMITTIVITIES = ("apparent_permittivity", "real_permittivity")
WATERS = ("water_content", "gravimetric_water_content")
DENSITY = "bulk_density"
MEASURED = (*PERMITTIVITIES, *WATERS, DENSITY)
"""What a pair may carry, each with its ``_u``."""

Level = Annotated[str, Field(min_length=1, max_length=80)] | Number
Width = Annotated[Number, Field(ge=0)]
Widths = Annotated[list[Number | None], Field(max_length=MOST_PAIRS)]

LEVEL = "the water content it was packed or wetted to: pairs of one level are replicates, and are "
LEVEL += "left out together where each is predicted from the others"

PairBody = body_of(
    "CalibrationPair",
    "A permittivity and the water content of the same sample. Water content is volumetric, or "
    "gravimetric with a bulk density, of the pair or of all.",
    {**quantity_fields(MEASURED), "level": (Level | None, Field(None, description=LEVEL))},
)


def _column(name: str) -> tuple[Any, Any]:
    return Widths | None, Field(None, description=described(name))


def _widths(name: str) -> tuple[Any, Any]:
    about = f"standard uncertainty of {name}, of each pair or of all [{QUANTITIES[name].unit}]"
    return Number | Widths | None, Field(None, description=about)


PairColumns = body_of(
    "CalibrationPairColumns",
    "The same as columns of equal length.",
    {
        **{name: _column(name) for name in MEASURED},
        **{f"{name}_u": _widths(name) for name in MEASURED},
        "level": (
            Annotated[list[Level | None], Field(max_length=MOST_PAIRS)] | None,
            Field(None, description=LEVEL),
        ),
    },
)


class AtBody(Body):
    """New readings at which bands are asked for."""

    apparent_permittivity: Annotated[list[Number], Field(min_length=1, max_length=MOST_BANDS)]
    apparent_permittivity_u: Width | Annotated[list[Width], Field(max_length=MOST_BANDS)] | None = (
        Field(
            None,
            description="standard uncertainty of the new readings, of each or of all; that of the "
            "pairs (root mean square) unless given [1]",
        )
    )


def _of_all() -> dict[str, Any]:
    """What may be said once for all pairs."""
    fields: dict[str, Any] = {}
    for name in MEASURED:
        unit = QUANTITIES[name].unit
        meant = f"standard uncertainty of every {name} that states none of its own"
        if name == DENSITY:
            fields[name] = (Number | None, Field(None, description="of all pairs that have none of "
                            f"their own: {described(name)}"))  # fmt: skip
            meant = "standard uncertainty of bulk_density, which all pairs then share"
        fields[f"{name}_u"] = (Width | None, Field(None, description=f"{meant} [{unit}]"))
        fields[f"{name}_u_shared"] = (
            Width | None,
            Field(None, description=f"standard uncertainty of an error of {name} that is the same "
                  f"in all pairs, as of one probe, oven or mould; beside each pair's own [{unit}]"),
        )  # fmt: skip
    return fields


FormKey = Literal["square-root", "polynomial"]
CalibrationBody = body_of(
    "Calibration",
    "Pairs of one soil, and the form of the curve that is wanted.",
    {
        "title": (
            Annotated[str, Field(max_length=200)] | None,
            Field(None, description="for people: soil, horizon, density, day; told back"),
        ),
        "pairs": (
            Annotated[list[PairBody], Field(max_length=MOST_PAIRS)]  # type: ignore[valid-type]
            | PairColumns,
            Field(description=f"a list of objects or one object of columns; at most {MOST_PAIRS}"),
        ),
        **_of_all(),
        "form": (
            FormKey | None,
            Field(None, description="square-root: water content is linear in the root of "
                  "permittivity; polynomial: in permittivity, of a degree. Left out, the pairs "
                  "decide, and the answer says why"),
        ),
        "degree": (
            Annotated[int, Field(strict=True, ge=1, le=3)] | None,
            Field(None, description="of the polynomial; 1 unless given"),
        ),
        "at": (
            AtBody | None,
            Field(None, description="where bands are wanted; left out, over the range"),
        ),
        "coverage_probability": (Annotated[Number, Field(ge=0.5, le=0.999)], Field(0.95)),
        "units": (
            dict[str, str],
            Field(default_factory=dict, description="UCUM codes by quantity, where they differ "
                  "from the API's own unit.", examples=[{"water_content": "%"}]),
        ),
    },
)  # fmt: skip
CALIBRATIONS: TypeAdapter[Any] = TypeAdapter(CalibrationBody)
KEYS: Mapping[tuple[str | None, int | None], str] = MappingProxyType({
    ("square-root", None): "square-root", ("polynomial", None): "polynomial-1",
    **{("polynomial", degree): f"polynomial-{degree}" for degree in (1, 2, 3)},
})  # fmt: skip
"""Forms of the models by form and degree of a request."""
