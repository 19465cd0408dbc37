"""What an answer to readings should say of them as a whole: names, units and values meant."""

from collections.abc import Iterable, Iterator, Mapping, Sequence
from typing import Any

import numpy as np

from models.flags import BIT, Flags
from models.quantity import QUANTITIES
from models.readings import quantity_of
from models.remarks import Remarks
from service.faults import shown
from service.schemas.echo import advice_echo
from service.stations.ingest.arrival import Rows, likely
from service.store.possible import POSSIBLE

MOST_NAMES = 20
FEW = 16
"""Rows up to which an array takes longer to make than to do without."""


class Suspicions:
    """Values that are impossible in their unit, some of which another unit would explain."""

    def __init__(self) -> None:
        self._remarks: Remarks | None = None
        self._odd: dict[str, tuple[int, float, int]] = {}
        """By column: the first row, its value, and how many there are."""

    def note(self, rows: Rows) -> None:
        """Look at some readings, in the unit of the API."""
        for name, (low, high) in POSSIBLE.items():
            if name not in rows.values:
                continue
            cells: Sequence[Any] = rows.values[name]
            if odd := _outside(cells, low, high):
                found = rows.numbers[odd[0]], cells[odd[0]], 0
                first, example, count = self._odd.get(name, found)
                self._odd[name] = (first, example, count + len(odd))
                self._suspect(name, [cells[row] for row in odd])

    def advisories(self) -> list[dict[str, Any]]:
        """What was suspected."""
        told: list[dict[str, Any]] = list(_impossible(self._odd))
        return told + ([] if self._remarks is None else advice_echo(self._remarks.advice({})))

    def _suspect(self, name: str, odd: Sequence[float]) -> None:
        if name in QUANTITIES and QUANTITIES[name].lookalikes:
            self._remarks = self._remarks or Remarks()
            flags: Flags = np.full(len(odd), BIT[f"out-of-gate:{name}"])
            self._remarks.note({name: np.array(odd, dtype=np.float64)}, {}, flags)


def _outside(cells: Sequence[float | None], low: float, high: float) -> list[int]:
    """Rows whose number is not from low to high; one is looked at faster as it is."""
    if len(cells) <= FEW:
        return [
            row for row, cell in enumerate(cells) if cell is not None and not low <= cell <= high
        ]
    values = np.array(cells, dtype=np.float64)
    return np.flatnonzero((values < low) | (values > high)).tolist()


def _impossible(odd: Mapping[str, tuple[int, float, int]]) -> Iterator[dict[str, Any]]:
    """What became of impossible values, and what to do now."""
    for name, (row, value, count) in odd.items():
        low, high = POSSIBLE[name]
        unit = QUANTITIES[quantity_of(name)[0]].unit
        rest = f" and {count - 1} more" if count > 1 else ""
        text = (
            f"{name} {value:g} in row {row}{rest}: possible is {low:g} to {high:g} {unit}. What is "
            "impossible is kept as it was sent, gives no estimate, and counts as missing: send the "
            "reading again with the right number, or with its unit in units, and it is completed. "
            "A number that stands for no value belongs into sentinels of the station."
        )
        yield {"code": "impossible-value", "text": text, "row": row}


def advice_on_nothing(kept: int, rejected: int) -> Iterator[dict[str, str]]:
    """That nothing of a request was kept because of its rows."""
    if rejected and not kept:
        rows = "the one row was" if rejected == 1 else f"all {rejected} rows were"
        yield {"code": "nothing-kept", "text": f"{rows} rejected: nothing was kept"}


def advice_on_twice(found: Sequence[tuple[str, int]]) -> Iterator[dict[str, Any]]:
    """That readings name a depth while the probe there has readings of its own.

    found: the probe, and a row of the request that it read as well.
    """
    first: dict[str, tuple[int, int]] = {}
    for probe, row in found:
        told, count = first.get(probe, (row, 0))
        first[probe] = (told, count + 1)
    for probe, (row, count) in first.items():
        rest = f" and {count - 1} more" if count > 1 else ""
        text = (
            f"row {row}{rest} names the depth that {probe} is at, which has a reading of its own "
            "of that moment: both are kept, and means and charts count that of the probe"
        )
        yield {"code": "read-twice", "text": text, "row": row}


def advice_on_gone(count: int) -> Iterator[dict[str, str]]:
    """That possible values came for impossible ones that were kept."""
    if count:
        told = "1 impossible value" if count == 1 else f"{count} impossible values"
        text = (
            f"{told} gave way to what came now; as of earlier revisions, and among the conflicts, "
            "what was sent first is still there"
        )
        yield {"code": "impossible-gave-way", "text": text}


def advice_on_names(ignored: Iterable[str]) -> Iterator[dict[str, str]]:
    """What was not kept because of its name, where a known name is near."""
    told = 0
    for name in ignored:
        meant = likely(name)
        if meant and told < MOST_NAMES:
            told += 1
            text = f"{shown(name)} is no name of a reading and was not kept; did you mean {meant}?"
            yield {"code": "name-not-known", "text": text}
