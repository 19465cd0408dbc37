"""What can be said of a whole table of readings once its rows have been seen."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from math import sqrt
from types import MappingProxyType

import numpy as np
from numpy.typing import NDArray
from scipy.constants import speed_of_light

from models.advisories import Advice, advise
from models.conversion import Units, unit_of
from models.flags import BIT, Flags
from models.quantity import QUANTITIES
from models.readings import impossible_in, quantity_of
from models.relation import Array, Range
from models.units import UNITS

OPEN = 100.0
"""Ratio of the ends of a band from which its conductivity is hardly known."""
CONDUCTS_MUCH = 0.5
"""S/m of the soil as a whole, which few soils exceed, and many a number meant in mS/m does."""
NOTHING: Mapping[str, NDArray[np.bool_]] = MappingProxyType({})


@dataclass(slots=True)
class _Suspicion:
    """Impossible values of one quantity that another unit would explain."""

    other: str
    example: float
    count: int = 0


@dataclass(slots=True)
class _Counted:
    """How many values of a kind there were, and one of them, as it was sent."""

    count: int = 0
    example: str = ""

    def add(self, values: Array, *, largest: bool = False) -> None:
        """Some more of them."""
        if values.size:
            self.count += values.size
            value = float(values.max() if largest else values[0])
            if not self.example or (largest and value > float(self.example)):
                self.example = f"{value:g}"


@dataclass(slots=True)
class Remarks:
    """Gathers, block by block, what an advisory of the whole answer should say."""

    probe_length: float | None = None
    """Of the rods, m, where travel times come."""
    as_sent: bool = True
    """Whether numbers are in the units in which a caller wrote them."""
    _suspicions: dict[str, _Suspicion] = field(default_factory=dict)
    _widths: dict[str, _Counted] = field(default_factory=dict)
    _times: _Counted = field(default_factory=_Counted)
    _conducting: _Counted = field(default_factory=_Counted)
    _frozen: int = 0
    _open: int = 0

    def note(
        self,
        columns: Mapping[str, Array],
        units: Units,
        flags: Flags,
        answered: Mapping[str, Array] = MappingProxyType({}),
        unreadable: Mapping[str, NDArray[np.bool_]] = NOTHING,
    ) -> None:
        """Look at one block: numbers as they were sent, the flags they got, what was answered.

        unreadable: by column, where text stands that is no number.
        """
        upper = answered.get("pore_water_conductivity_upper")
        if upper is not None:
            lower = answered["pore_water_conductivity_lower"]
            wide = (upper > OPEN * lower) | (np.isnan(upper) & ~np.isnan(lower))
            self._open += int(np.count_nonzero(wide))
        seen = np.bitwise_or.reduce(flags, initial=np.uint64(0))
        if seen & BIT["frozen"]:
            self._frozen += int(np.count_nonzero(flags & BIT["frozen"]))
        for name, values in columns.items():
            if name in QUANTITIES and QUANTITIES[name].lookalikes:
                bit = BIT[f"out-of-gate:{name}"]
                if seen & bit:
                    self._suspect(name, values[(flags & bit) != 0], units)
        if seen & BIT["unusable-uncertainty"]:
            self._note_widths(columns, units, unreadable)
        if self.as_sent and "bulk_conductivity" in columns and "bulk_conductivity" not in units:
            self._note_conducting(columns["bulk_conductivity"])

    def advice(self, units: Units) -> tuple[Advice, ...]:
        """The advisories that what was seen gives rise to."""
        said = [
            advise("unit-suspected", name=name, count=found.count, unit=unit_of(name, units).code,
                   other=found.other, value=f"{found.example:g}")
            for name, found in self._suspicions.items()
        ]  # fmt: skip
        said += [
            advise("uncertainty-not-used", name=name, about=quantity_of(name)[0],
                   count=found.count, value=found.example)
            for name, found in self._widths.items()
        ]  # fmt: skip
        if self._times.count:
            said.append(self._impossible_times(units))
        if self._conducting.count:
            found = self._conducting
            said.append(
                advise(
                    "bulk-unit-doubted",
                    count=found.count,
                    value=found.example,
                    name="bulk_conductivity",
                    other="mS/m",
                )
            )
        if self._open:
            said.append(advise("pore-water-open", count=self._open))
        if self._frozen:
            said.append(advise("frozen-readings", count=self._frozen))
        return tuple(said)

    def _suspect(self, name: str, impossible: Array, units: Units) -> None:
        """Another unit is suspected where it makes a value possible that is not so as sent."""
        quantity, unit, gate = QUANTITIES[name], unit_of(name, units), self._gate(name)
        if name == "travel_time" and self.probe_length is not None:
            self._times.add(impossible)
        known = self._suspicions.get(name)
        example = float(impossible[0])
        other = known.other if known else quantity.likely_unit(
            float(unit.to_si(example)), unit.code, gate
        )  # fmt: skip
        if other is None:
            return
        fits = ~gate.excludes(UNITS[other].to_si(impossible))
        found = self._suspicions.setdefault(name, _Suspicion(other, example))
        found.count += int(np.count_nonzero(fits))

    def _gate(self, name: str) -> Range:
        if name == "travel_time" and self.probe_length is not None:
            return travel_times(self.probe_length)
        return QUANTITIES[name].gate_si

    def _impossible_times(self, units: Units) -> Advice:
        assert self.probe_length is not None  # noqa: S101 - counted only where it is known
        gate, unit = travel_times(self.probe_length), unit_of("travel_time", units)
        return advise(
            "travel-time-impossible", count=self._times.count, value=self._times.example,
            unit=unit.code, length=f"{self.probe_length:g}",
            low=f"{float(unit.from_si(gate.low)):.3g}",
            high=f"{float(unit.from_si(gate.high)):.3g}",
        )  # fmt: skip

    def _note_widths(
        self,
        columns: Mapping[str, Array],
        units: Units,
        unreadable: Mapping[str, NDArray[np.bool_]],
    ) -> None:
        for name, values in columns.items():
            about, is_width = quantity_of(name)
            if not is_width:
                continue
            si = unit_of(name, units).width_to_si(values)
            odd = values[impossible_in(QUANTITIES[about], si, is_width=True)]
            text = int(np.count_nonzero(unreadable.get(name, False)))
            if odd.size or text:
                found = self._widths.setdefault(name, _Counted())
                found.add(odd)
                found.count += text
                found.example = found.example or "text"

    def _note_conducting(self, values: Array) -> None:
        """Possible values that few soils reach, sent without a word on their unit."""
        quantity = QUANTITIES["bulk_conductivity"]
        si = UNITS[quantity.unit].to_si(values)
        self._conducting.add(
            values[(si > CONDUCTS_MUCH) & (si <= quantity.gate_si.high)], largest=True
        )


def travel_times(length: float) -> Range:
    """Two-way times along rods of a length, m, in a medium of a possible permittivity; s."""
    gate, light = QUANTITIES["apparent_permittivity"].gate_si, 2.0 * length / speed_of_light
    return Range(light * sqrt(gate.low), light * sqrt(gate.high))
