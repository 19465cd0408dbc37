"""Items of a request in SI, each with what it rests on and where that came from."""

from collections.abc import Collection, Iterable, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np

from models.conversion import Units, from_si, refuse_units, to_si
from models.decisions.terms import WORDS
from models.errors import Complaint, ParameterError
from models.relation import Array
from service.decisions.fields import LABELS, ItemBody
from service.errors import Unprocessable
from service.faults import Fault, pointer

GIVEN = "given"
Place = tuple[str, ...]


@dataclass(slots=True)
class Row:
    """One item: numbers by name in SI, their uncertainties (k = 1) and their origins."""

    place: Place
    fields: Collection[str] = ()
    """Keys that its part of the request takes."""
    values: dict[str, float] = field(default_factory=dict)
    spread: dict[str, float] = field(default_factory=dict)
    origins: dict[str, str] = field(default_factory=dict)

    def has(self, *names: str) -> bool:
        """Whether all of them are known."""
        return all(name in self.values for name in names)

    def add(self, name: str, value: float, u: float, origin: str) -> None:
        """Settle what was not given; the first to enter a name keeps it."""
        if name not in self.values:
            self.values[name], self.spread[name] = value, u
            self.origins[name] = origin

    def drop(self, name: str) -> None:
        """Forget what another number stands for."""
        for part in (self.values, self.spread, self.origins):
            part.pop(name, None)

    def fault(self, name: str, detail: str) -> Complaint:
        """A complaint about one of its fields."""
        return Complaint(name, detail, (*self.place, name))


def rows_of(
    bodies: Sequence[Any], noun: str, units: Units, *, single: bool, apart: Iterable[str] = ()
) -> list[Row]:
    """The numbers of every item in SI.

    noun: key of the items in the request. apart: fields that are read elsewhere.
    Raises ParameterError for units that are none, Unprocessable with every other fault.
    """
    refuse_units(units, WORDS)
    rows: list[Row] = []
    complaints: list[Complaint] = []
    for k, body in enumerate(bodies):
        row = Row((noun,) if single else (noun, str(k)), type(body).model_fields)
        complaints += fill(row, body, units, apart)
        rows.append(row)
    refuse(complaints)
    return rows


def fill(row: Row, body: Any, units: Units, apart: Iterable[str] = ()) -> list[Complaint]:
    """Put the numbers of a body into a row; what is wrong with them."""
    stated = {name: value for name, value in body if name not in apart and _is_number(value)}
    given = {name: value for name, value in stated.items() if name in WORDS}
    spread = {name: value for name, value in stated.items() if name not in WORDS}
    lonely = [name for name in spread if name.removesuffix("_u") not in given]
    complaints = [
        row.fault(name, f"{name} stands without {name.removesuffix('_u')}") for name in lonely
    ]
    try:
        si = to_si("request", stated, units, WORDS)
    except ParameterError as error:
        return complaints + [replace(c, place=(*row.place, c.name)) for c in error.complaints]
    for name in given:
        row.add(name, si[name], si.get(f"{name}_u", 0.0), GIVEN)
    return complaints


def _is_number(value: Any) -> bool:
    return isinstance(value, float | int) and not isinstance(value, bool)


def refuse(complaints: Sequence[Complaint]) -> None:
    """Raise Unprocessable, with every place, where there is something to complain about."""
    if complaints:
        faults = [Fault(complaint.detail, pointer(complaint.place)) for complaint in complaints]
        raise Unprocessable("the request holds what cannot be used", faults)


def known(rows: Sequence[Row], name: str) -> tuple[Array, Array]:
    """One quantity of all rows and its standard uncertainty; NaN where a row has none."""
    values = np.array([row.values.get(name, np.nan) for row in rows])
    return values, np.array([row.spread.get(name, 0.0) for row in rows])


def exactly(rows: Sequence[Row], name: str, default: float = np.nan) -> Array:
    """One quantity of all rows, without uncertainty."""
    return np.array([row.values.get(name, default) for row in rows])


def used(row: Row, units: Units) -> dict[str, Any]:
    """What a row rests on, in the caller's units, and where each number came from.

    Sent back it gives the same numbers: an uncertainty is told where one can be.
    """
    told: dict[str, Any] = {}
    for name, value in row.values.items():
        told[name] = float(from_si(name, value, units, WORDS))
        if f"{name}_u" in row.fields or row.spread[name]:
            told[f"{name}_u"] = float(from_si(f"{name}_u", row.spread[name], units, WORDS))
    return {**told, "sources": dict(row.origins)}


def without_uncertainty(rows: Sequence[Row], names: Iterable[str]) -> list[str]:
    """Which of these were given as exact in some row."""
    return [
        name
        for name in names
        if any(row.origins.get(name) == GIVEN and row.spread[name] == 0.0 for row in rows)
    ]


def labels(body: ItemBody) -> dict[str, Any]:
    """What the caller calls an item."""
    return {name: value for name in LABELS if (value := getattr(body, name)) is not None}


def in_shape(told: list[dict[str, Any]], *, single: bool) -> Any:
    """Rows as their items came: a list of them, or the one."""
    return told[0] if single else told
