"""What an answer to readings should say of them as a whole: names and units perhaps meant."""

from collections.abc import Iterable, Iterator, Mapping, Sequence
from typing import Any

import numpy as np

from models.flags import BIT, Flags
from models.quantity import QUANTITIES
from models.remarks import Remarks
from service.faults import shown
from service.schemas.echo import advice_echo
from service.stations.ingest.arrival import Values, likely
from service.store.interface import VALUES

_GATES: Mapping[str, tuple[float, float]] = {
    name: (QUANTITIES[name].gate.low, QUANTITIES[name].gate.high)  # type: ignore[union-attr]
    for name in VALUES
    if name in QUANTITIES and QUANTITIES[name].lookalikes and QUANTITIES[name].gate
}
"""What is possible of quantities that are often sent in another unit, in the unit of the API."""
MOST_NAMES = 20


class Suspicions:
    """Values that are impossible in their unit and would be possible in another."""

    def __init__(self) -> None:
        self._remarks: Remarks | None = None

    def note(self, values: Values) -> None:
        """Look at some readings, in the unit of the API."""
        for name, (low, high) in _GATES.items():
            cells: Sequence[Any] = values.get(name, ())
            odd = [cell for cell in cells if cell is not None and not low <= cell <= high]
            if odd:
                self._remarks = self._remarks or Remarks()
                flags: Flags = np.full(len(odd), BIT[f"out-of-gate:{name}"])
                self._remarks.note({name: np.array(odd, dtype=np.float64)}, {}, flags)

    def advisories(self) -> list[dict[str, str]]:
        """What was suspected."""
        return [] if self._remarks is None else advice_echo(self._remarks.advice({}))


def advice_on_names(ignored: Iterable[str]) -> Iterator[dict[str, str]]:
    """What was not kept because of its name, where a known name is near."""
    told = 0
    for name in ignored:
        meant = likely(name)
        if meant and told < MOST_NAMES:
            told += 1
            text = f"{shown(name)} is no name of a reading and was not kept; did you mean {meant}?"
            yield {"code": "name-not-known", "text": text}
