"""What came in one request: rows that can be kept, by column, and what is wrong with the others."""

import time
from collections.abc import Callable, Container, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from models.numerics.digits import without_rounding
from models.quantity import QUANTITIES
from models.readings import quantity_of
from models.units import UNITS
from service.faults import shown
from service.formats.header import likely as likely_names
from service.stations.documents import Documents
from service.stations.station import Station
from service.stations.times import SECOND, rfc3339
from service.store.interface import IN_PLACE_OF_RAW, VALUES, Batch, place_at

SHOWN = 1000
"""Rejected rows and conflicts that an answer lists; of the others it says how many there are."""
RAW_RECORDS = ("waveform", "reflection", "scattering", "spectrum")
"""Keys of a reading that hold its raw record."""
KNOWN = (*VALUES, *RAW_RECORDS, "time", "probe")
"""Names that a reading may hold something under."""
DEPTH_GATE = QUANTITIES["depth"].gate_si

Values = Mapping[str, Sequence[float | bytes | None]]


def likely(name: str) -> str:
    """The known names that a name may stand for, as the middle of a sentence; empty: none."""
    return " or ".join(likely_names(name, KNOWN))


def nothing_known(names: Iterable[str]) -> str:
    """What is wrong with a row that holds no value; names: of what it holds besides."""
    near = [f"does {shown(name)} mean {meant}?" for name in names if (meant := likely(name))]
    listed = f"holds no value: expected one of {', '.join(VALUES[1:4])} or another"
    return "; ".join((listed, *near[:3]))


def raw_fault(kinds: Sequence[str], named: Container[str], units: Mapping[str, str]) -> str | None:
    """What is wrong with the raw records of a row.

    named: the numbers it holds. units: of the request, which do not reach into a record.
    """
    if len(kinds) > 1:
        return f"a reading carries one raw record, found {' and '.join(kinds)}"
    both = [name for name in IN_PLACE_OF_RAW if name in named] if kinds else []
    if both:
        return f"a reading carries {kinds[0]} or {both[0]}, found both"
    if kinds and kinds[0] != "waveform" and units.get("frequency", "Hz") != "Hz":
        return "units do not reach into a raw record: send its frequencies in Hz"
    return None


class Broken(str):
    """In place of a row: why there is none."""

    __slots__ = ()


@dataclass(frozen=True, slots=True)
class Rejected:
    """A row that is not kept."""

    row: int
    pointer: str
    detail: str


@dataclass(slots=True)
class Rows:
    """Rows that can be kept, as columns of equal length."""

    numbers: Sequence[int]
    """Of each row, in the request, counted from 0."""
    places: Sequence[str]
    times: Sequence[int]
    values: Values

    def batches(self, station: str, documents: int, most: int) -> Iterator[tuple[int, Batch]]:
        """In parts of at most so many rows, each with the place where it begins."""
        for start in range(0, len(self.times), most):
            part = slice(start, start + most)
            values = {name: cells[part] for name, cells in self.values.items()}
            yield start, Batch(station, documents, self.places[part], self.times[part], values)


@dataclass(slots=True)
class Arrival:
    """The rows, and what was found on the way."""

    rows: Rows
    rejected: list[Rejected] = field(default_factory=list)
    rejected_count: int = 0
    missing: int = 0
    """Cells that said there is no value: empty, null, a word or an agreed number for it."""
    ignored: Sequence[str] = ()
    """Names of columns that are none of ours."""

    def reject(self, row: int, pointer: str, detail: str) -> None:
        """Note a row that is not kept."""
        self.rejected_count += 1
        if len(self.rejected) < SHOWN:
            self.rejected.append(Rejected(row, pointer, detail))


@dataclass(frozen=True, slots=True)
class Rules:
    """What a row of one station is checked against."""

    station: Station
    documents: Documents
    latest: int
    """Microseconds: what is later is of a clock that is wrong."""
    units: Mapping[str, str]
    """UCUM codes by quantity, where they are not those of the API."""

    @classmethod
    def of(
        cls, station: Station, documents: Documents, allowance: float, units: Mapping[str, str]
    ) -> "Rules":
        """The rules as of now. allowance: seconds that a clock may be ahead."""
        latest = time.time_ns() // 1000 + int(allowance * SECOND)
        return cls(station, documents, latest, units)

    def time_fault(self, moment: int) -> str | None:
        """What is wrong with a moment."""
        if moment > self.latest:
            return (
                f"{rfc3339(moment)} is in the future: the clock of the logger is ahead, or the "
                "offset is wrong"
            )
        if moment < self.station.earliest:
            return (
                f"{rfc3339(moment)} is before {rfc3339(self.station.earliest)}: the clock of the "
                "logger was reset; the station can state an earlier moment as `earliest`"
            )
        return None

    def probe_fault(self, probe: str) -> str | None:
        """What is wrong with the name of a probe."""
        if self.documents.find("probe", probe):
            return None
        named = sorted({item.probe for item in self.station.installations})
        listed = f"; installed here are {', '.join(named[:10])}" if named else ""
        return f"there is no probe {probe[:80]}{listed}"

    def depth_fault(self, depth: float) -> str | None:
        """What is wrong with a depth that readings name instead of a probe, m."""
        if not DEPTH_GATE.low <= depth <= DEPTH_GATE.high:
            return f"expected a depth from 0 to {DEPTH_GATE.high:g} m, found {depth:g}"
        above = depth < 0 and place_at(depth) not in {
            place_at(item.depth) for item in self.station.installations
        }
        if above:
            return (
                f"a depth is counted downwards, found {depth:g} m: send {-depth:g}, or install the "
                "probe above the surface first"
            )
        return None

    def converters(self) -> dict[str, Callable[[Any], Any]]:
        """For each column in another unit, what brings its values to the unit of the API."""
        found: dict[str, Callable[[Any], Any]] = {}
        if not self.units:
            return found
        for name in VALUES:
            about, is_width = quantity_of(name)
            code = self.units.get(about)
            if code is not None and code != QUANTITIES[about].unit:
                found[name] = converter(about, code, is_width=is_width)
        return found


def converter(quantity: str, code: str, *, is_width: bool = False) -> Callable[[Any], Any]:
    """What brings values of a quantity from a unit to that of the API.

    The same number comes out as would have been sent in the unit of the API.
    """
    unit, own = UNITS[code], UNITS[QUANTITIES[quantity].unit]
    if is_width:
        return lambda value: without_rounding(own.width_from_si(unit.width_to_si(value)))
    offset = float(own.from_si(unit.offset))
    return lambda value: without_rounding(own.from_si(unit.to_si(value)), offset)
