"""Schema pieces made from the vocabulary, so that no name or unit is written twice."""

from collections.abc import Iterable
from typing import Annotated, Any

from pydantic import BaseModel, ConfigDict, Field, create_model

from models.quantity import QUANTITIES

Number = Annotated[float, Field(strict=True, allow_inf_nan=False)]
"""A JSON number: no text, no true or false, no NaN, no infinity."""


class Body(BaseModel):
    """Strict on the way in: a misspelt key is an error, not a default."""

    model_config = ConfigDict(extra="forbid", frozen=True, hide_input_in_errors=True)


def described(name: str) -> str:
    """A quantity as a description: meaning, unit and gate."""
    quantity = QUANTITIES[name]
    gate = f", {quantity.gate}" if quantity.gate else ""
    return f"{quantity.meaning} [{quantity.unit}{gate}]"


def quantity_fields(names: Iterable[str]) -> dict[str, Any]:
    """Optional number fields ``name`` and ``name_u`` for quantities."""
    fields: dict[str, Any] = {}
    for name in names:
        unit = QUANTITIES[name].unit
        fields[name] = (Number | None, Field(None, description=described(name)))
        fields[f"{name}_u"] = (
            Annotated[Number, Field(ge=0)] | None,
            Field(None, description=f"standard uncertainty of {name} [{unit}]"),
        )
    return fields


def body_of(title: str, doc: str, fields: dict[str, Any]) -> type[Body]:
    """A strict schema class with the given fields."""
    made: type[Body] = create_model(title, __base__=Body, __doc__=doc, **fields)
    return made
