"""Readings as a table, a block of rows at a time, judged by whole columns."""

from collections.abc import Callable, Mapping
from functools import partial

import numpy as np
import polars as pl
from numpy.typing import NDArray

from service.formats.block import Block
from service.formats.errors import HeaderError
from service.formats.header import folded
from service.stations.ingest.arrival import DEPTH_GATE, Arrival, Rows, Rules
from service.stations.times import TimeError, microseconds, read_column
from service.store.interface import VALUES, place_at

Marks = NDArray[np.bool_]


class TableReader:
    """Checks the blocks of one table; rows are counted on from block to block.

    probe, depth: what holds for every row that states none.
    """

    def __init__(self, rules: Rules, probe: str | None, depth: float | None) -> None:
        self.rules = rules
        self._probe, self._depth = probe, depth
        self._convert = rules.converters()
        self._row = 0

    def __call__(self, block: Block) -> Arrival:
        """The rows of a block that can be kept; raises HeaderError where there is no time."""
        first, self._row = self._row, self._row + len(block)
        arrival = Arrival(Rows([], [], [], {}))
        texts = {folded(column.name): column for column in block.cells()}
        if "time" not in texts and len(block):
            raise HeaderError("a column time", ", ".join(block.header.names)[:200])
        arrival.ignored = [
            name for name in texts if name not in block.values and name not in {"time", "probe"}
        ]
        if not len(block):
            return arrival
        checks = _Checks(block, first, arrival)
        checks.refuse(block.broken, "", lambda _: "the row does not have the cells of the table")
        for name, odd in block.unreadable.items():
            checks.refuse(odd, name, partial(_no_number, texts.get(name)))
        times = self._times(texts["time"], checks)
        values = {name: self._values(name, block, arrival) for name in block.values}
        places = self._places(texts.get("probe"), values, checks)
        kept = np.flatnonzero(checks.fine)
        arrival.rows = Rows(
            (kept + first).tolist(),
            places if len(kept) == len(block) else [places[row] for row in kept.tolist()],
            times[kept].tolist(),
            _filled(values, kept),
        )
        return arrival

    def _times(self, texts: pl.Series, checks: "_Checks") -> NDArray[np.int64]:
        times, known = read_column(texts)
        checks.refuse(~known, "time", lambda row: _time_fault(texts[row]))
        wrong = known & ((times > self.rules.latest) | (times < self.rules.station.earliest))
        checks.refuse(wrong, "time", lambda row: self.rules.time_fault(int(times[row])) or "")
        return times

    def _values(self, name: str, block: Block, arrival: Arrival) -> NDArray[np.float64]:
        """A column in the unit of the API, NaN where there is no number."""
        values = block.values[name]
        agreed = self.rules.station.sentinels.get(name)
        if agreed:
            values = np.where(np.isin(values, list(agreed)), np.nan, values)
        gone = np.isnan(values)
        if name in block.unreadable:
            gone &= ~block.unreadable[name]
        arrival.missing += int(np.count_nonzero(gone))
        convert = self._convert.get(name)
        return values if convert is None else np.asarray(convert(values), dtype=np.float64)

    def _places(
        self, probes: pl.Series | None, values: dict[str, NDArray[np.float64]], checks: "_Checks"
    ) -> list[str]:
        """Probe or depth of each row; the depth stays a value where there is a probe as well."""
        count = len(checks.fine)
        if probes is None:
            named = pl.repeat(self._probe or "", count, dtype=pl.String, eager=True)
        else:
            named = probes.fill_null("").str.strip_chars()
            named = named.replace("", self._probe) if self._probe else named
        faults = {
            name: fault
            for name in named.unique().to_list()
            if name and (fault := self.rules.probe_fault(name))
        }
        if faults:
            unknown = named.is_in(list(faults)).to_numpy()
            checks.refuse(unknown, "probe", lambda row: faults[named[row]])
        places: list[str] = named.to_list()
        bare = (named == "").to_numpy()
        if not bare.any():
            return places
        depth = values.get("depth", np.full(count, np.nan))
        if self._depth is not None:
            depth = np.where(np.isnan(depth), self._depth, depth)
        lost = bare & ~((depth >= DEPTH_GATE.low) & (depth <= DEPTH_GATE.high))
        checks.refuse(lost, "probe", lambda _: "expected a probe or a depth from -1 to 1000 m")
        spelt = {value: place_at(value) for value in np.unique(depth[bare & ~lost]).tolist()}
        for row in np.flatnonzero(bare & ~lost).tolist():
            places[row] = spelt[depth[row]]
        if "depth" in values:
            values["depth"] = np.where(bare, np.nan, values["depth"])
        return places


class _Checks:
    """Which rows of a block are fine so far."""

    def __init__(self, block: Block, first: int, arrival: Arrival) -> None:
        self.fine: Marks = np.ones(len(block), dtype=np.bool_)
        self._lines, self._first, self._arrival = block.lines, first, arrival

    def refuse(self, wrong: Marks, column: str, detail: Callable[[int], str]) -> None:
        """Refuse the marked rows, each for the first thing that is wrong with it."""
        for row in np.flatnonzero(wrong & self.fine).tolist():
            line = f"line {int(self._lines[row])}"
            place = f"{line}, {column}" if column else line
            self._arrival.reject(self._first + row, place, detail(row))
        self.fine &= ~wrong


def _filled(
    values: Mapping[str, NDArray[np.float64]], kept: NDArray[np.intp]
) -> dict[str, list[float | None]]:
    """The columns that hold a number, None where a row has none."""
    found: dict[str, list[float | None]] = {}
    for name in VALUES:
        if name in values:
            column = values[name][kept]
            known = ~np.isnan(column)
            if known.all() and len(kept):
                found[name] = column.tolist()
            elif known.any():
                found[name] = pl.Series(column, nan_to_null=True).to_list()
    return found


def _no_number(cells: pl.Series | None, row: int) -> str:
    return "expected a number" + ("" if cells is None else f", found {str(cells[row])[:60]!r}")


def _time_fault(text: str | None) -> str:
    try:
        microseconds((text or "").strip())
    except TimeError as error:
        return f"{error}, found {(text or '')[:60]!r}"
    return "the time cannot be read"
