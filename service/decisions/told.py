"""Outcomes as an answer tells them: four numbers by name, null where there is none."""

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

import numpy as np

from models.advisories import Advice, advise
from models.conversion import Units, from_si
from models.decisions.outcome import Outcome
from models.decisions.terms import WORDS
from models.relation import Array

ENDS = ("", "_u", "_lower", "_upper")
"""Suffixes of a number with a band."""


def banded(outcomes: Mapping[str, Outcome], row: int, units: Units) -> dict[str, float | None]:
    """The numbers of one row, in the caller's units."""
    told: dict[str, float | None] = {}
    for name, found in outcomes.items():
        parts = (found.value, found.standard_uncertainty, found.lower, found.upper)
        for end, values in zip(ENDS, parts, strict=True):
            told[name + end] = number(from_si(name + end, float(values[row]), units, WORDS))
    return told


def listed(name: str, found: Sequence[Outcome], row: int, units: Units) -> dict[str, Any]:
    """Several outcomes of one row as lists: the number and its ends."""
    single = [banded({name: one}, row, units) for one in found]
    return {name + end: [one[name + end] for one in single] for end in ENDS}


def number(value: Array | float) -> float | None:
    """As JSON has it: null for NaN and what is not finite."""
    plain = float(value)
    return plain if np.isfinite(plain) else None


def converted(name: str, values: Array, units: Units) -> list[float | None]:
    """A column in the caller's unit."""
    return [number(value) for value in from_si(name, values, units, WORDS)]


def units_told(rows: Iterable[Mapping[str, Any]], units: Units) -> dict[str, str]:
    """The unit of every quantity that stands somewhere in the rows."""
    names: set[str] = set()
    for row in rows:
        _gather(row, names)
    return {name: units.get(name, WORDS[name].unit) for name in WORDS if name in names}


def _gather(part: Any, names: set[str]) -> None:
    if isinstance(part, Mapping):
        for name, value in part.items():
            if name in WORDS and WORDS[name].unit:
                names.add(name)
            _gather(value, names)
    elif isinstance(part, list):
        for item in part:
            _gather(item, names)


def advice_told(said: Iterable[Advice]) -> list[dict[str, str]]:
    """Advisories as an answer shows them."""
    return [{"code": one.code, "text": one.text} for one in said]


def exact_values(names: Sequence[str]) -> list[Advice]:
    """That values came without an uncertainty, where some did."""
    if not names:
        return []
    example = f"{names[0]}_u"
    return [advise("no-uncertainty-stated", names=", ".join(names), example=example)]
