"""What can be said of a whole table of readings once its rows have been seen."""

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np

from models.advisories import Advice, advise
from models.conversion import Units, unit_of
from models.flags import BIT, Flags
from models.quantity import QUANTITIES
from models.relation import Array
from models.units import UNITS

OPEN = 100.0
"""Ratio of the ends of a band from which its conductivity is hardly known."""


@dataclass(slots=True)
class _Suspicion:
    """Impossible values of one quantity that another unit would explain."""

    other: str
    example: float
    count: int = 0


class Remarks:
    """Gathers, block by block, what an advisory of the whole answer should say."""

    def __init__(self) -> None:
        self._suspicions: dict[str, _Suspicion] = {}
        self._frozen = self._open = 0

    def note(
        self,
        columns: Mapping[str, Array],
        units: Units,
        flags: Flags,
        answered: Mapping[str, Array] = MappingProxyType({}),
    ) -> None:
        """Look at one block: numbers as they were sent, the flags they got, what was answered."""
        upper = answered.get("pore_water_conductivity_upper")
        if upper is not None:
            lower = answered["pore_water_conductivity_lower"]
            wide = (upper > OPEN * lower) | (np.isnan(upper) & ~np.isnan(lower))
            self._open += int(np.count_nonzero(wide))
        frozen = BIT["frozen"]
        if np.bitwise_or.reduce(flags, initial=np.uint64(0)) & frozen:
            self._frozen += int(np.count_nonzero(flags & frozen))
        for name, values in columns.items():
            if name in QUANTITIES and QUANTITIES[name].lookalikes:
                self._suspect(name, values[(flags & BIT[f"out-of-gate:{name}"]) != 0], units)

    def advice(self, units: Units) -> tuple[Advice, ...]:
        """The advisories that what was seen gives rise to."""
        said = [
            advise("unit-suspected", name=name, count=found.count, unit=unit_of(name, units).code,
                   other=found.other, value=f"{found.example:g}")
            for name, found in self._suspicions.items()
        ]  # fmt: skip
        if self._open:
            said.append(advise("pore-water-open", count=self._open))
        if self._frozen:
            said.append(advise("frozen-readings", count=self._frozen))
        return tuple(said)

    def _suspect(self, name: str, impossible: Array, units: Units) -> None:
        if not impossible.size:
            return
        quantity, unit = QUANTITIES[name], unit_of(name, units)
        known = self._suspicions.get(name)
        example = float(impossible[0])
        other = (
            known.other if known else quantity.likely_unit(float(unit.to_si(example)), unit.code)
        )
        if other is None:
            return
        fits = ~quantity.gate_si.excludes(UNITS[other].to_si(impossible))
        found = self._suspicions.setdefault(name, _Suspicion(other, example))
        found.count += int(np.count_nonzero(fits))
