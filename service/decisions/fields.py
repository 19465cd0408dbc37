"""What the bodies of all decisions have in common."""

from collections.abc import Iterable
from typing import Annotated, Any

from pydantic import Field, WithJsonSchema, create_model

from models.decisions.crops import CROPS
from models.decisions.terms import WORDS
from models.soil import TEXTURES
from service.schemas.words import Body, Number

MOST_ITEMS = 1000
"""Of one request."""
MOST_SENSORS = 200
"""Of one profile."""
Width = Annotated[Number, Field(ge=0)]
CropKey = Annotated[str, WithJsonSchema({"type": "string", "enum": list(CROPS)})]
TextureKey = Annotated[str, WithJsonSchema({"type": "string", "enum": list(TEXTURES)})]
LABELS = ("name", "time")
"""What an item may carry to be known by; the answer repeats it."""


class ItemBody(Body):
    """One item of a request."""

    name: Annotated[str, Field(max_length=80)] | None = Field(
        None, description="by which the answer calls it"
    )
    time: Annotated[str, Field(max_length=40)] | None = Field(
        None, description="of the reading, as the answer repeats it"
    )


def item_of(title: str, doc: str, fields: dict[str, Any]) -> type[ItemBody]:
    """A strict schema class of items with the given fields."""
    made: type[ItemBody] = create_model(title, __base__=ItemBody, __doc__=doc, **fields)
    return made


class DecisionSettings(Body):
    """Everything of a request but its items."""

    coverage_probability: Annotated[Number, Field(ge=0.5, le=0.999)] = 0.95
    units: dict[str, str] = Field(
        default_factory=dict,
        description="UCUM codes by quantity, where they differ from the API's own unit.",
        examples=[{"root_depth": "cm"}],
    )


def word(name: str) -> str:
    """A word as a description: meaning, unit and gate."""
    about = WORDS[name]
    gate = f", {about.gate}" if about.gate else ""
    return f"{about.meaning} [{about.unit}{gate}]"


def needed(name: str) -> dict[str, Any]:
    """A number that must be given, and its uncertainty."""
    return {name: (Number, Field(description=word(name))), f"{name}_u": _width(name)}


def optional(names: Iterable[str]) -> dict[str, Any]:
    """Numbers that may be given, each with its uncertainty."""
    fields: dict[str, Any] = {}
    for name in names:
        fields |= exact((name,))
        fields[f"{name}_u"] = _width(name)
    return fields


def exact(names: Iterable[str]) -> dict[str, Any]:
    """Numbers that may be given and count as exact."""
    return {name: (Number | None, Field(None, description=word(name))) for name in names}


def _width(name: str) -> Any:
    said = f"standard uncertainty of {name} [{WORDS[name].unit}]"
    return (Width | None, Field(None, description=said))


def items(body: Any) -> Any:
    """The type of one item or a list of them."""
    return Annotated[list[body], Field(min_length=1, max_length=MOST_ITEMS)] | body
