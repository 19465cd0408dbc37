"""Readings as a table, a block of rows at a time, judged by whole columns."""

from collections.abc import Mapping
from functools import partial

import numpy as np
import polars as pl
from numpy.typing import NDArray

from service.formats.block import Block
from service.formats.errors import HeaderError
from service.formats.header import folded
from service.formats.ndjson_rows import KEY as NDJSON
from service.stations.ingest.arrival import KNOWN, Arrival, Rows, Rules, nothing_known
from service.stations.ingest.table_cells import Checks, TableCells, cells_of, records_in
from service.stations.times import TimeError, microseconds, read_column
from service.store.interface import RAW, VALUES, place_at

_NOT_TAKEN_APART = (
    "the row does not have the cells of the table",
    "expected a JSON object on the line, each key once, without NaN or Infinity: send null where "
    "there is no number",
)
"""By whether the table is NDJSON."""


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
        """The rows of a block that can be kept.

        Raises HeaderError where there is no column of times, or none that holds a value.
        """
        first, self._row = self._row, self._row + len(block)
        arrival = Arrival(Rows([], [], [], {}))
        texts = {folded(column.name): column for column in block.cells()}
        if block.header.form == NDJSON:
            texts.setdefault("time", pl.repeat(None, len(block), dtype=pl.String, eager=True))
        if "time" not in texts and len(block):
            raise HeaderError("a column time", ", ".join(block.header.names)[:200],
                              mend="the first line names the columns")  # fmt: skip
        arrival.ignored = [name for name in texts if name not in KNOWN]
        cells = cells_of(block, texts, arrival.ignored)
        if not len(block):
            return arrival
        checks = Checks(block, first, arrival)
        checks.refuse(block.broken, "", lambda _: _NOT_TAKEN_APART[block.header.form == NDJSON])
        for name, odd in cells.unreadable.items():
            checks.refuse(odd, name, partial(_no_number, texts.get(name)))
        checks.refuse(cells.empty, "", lambda _: nothing_known(arrival.ignored))
        times = self._times(texts["time"], checks)
        gone: dict[str, NDArray[np.bool_]] = {}
        values = {name: self._values(name, cells, gone) for name in cells.values}
        records = records_in(texts, values, checks, self.rules.units)
        places = self._places(texts.get("probe"), values, checks)
        kept = np.flatnonzero(checks.fine)
        arrival.missing = sum(int(np.count_nonzero(empty[kept])) for empty in gone.values())
        columns = _filled(values, kept)
        if records:
            columns[RAW] = [records.get(row) for row in kept.tolist()]
        arrival.rows = Rows(
            (kept + first).tolist(),
            places if len(kept) == len(block) else [places[row] for row in kept.tolist()],
            times[kept].tolist(),
            columns,
        )
        return arrival

    def _times(self, texts: pl.Series, checks: Checks) -> NDArray[np.int64]:
        times, known = read_column(texts)
        checks.refuse(~known, "time", lambda row: _time_fault(texts[row]))
        wrong = known & ((times > self.rules.latest) | (times < self.rules.station.earliest))
        checks.refuse(wrong, "time", lambda row: self.rules.time_fault(int(times[row])) or "")
        return times

    def _values(
        self, name: str, cells: TableCells, gone: dict[str, NDArray[np.bool_]]
    ) -> NDArray[np.float64]:
        """A column in the unit of the API, NaN where there is no number; ``gone`` learns where."""
        values = cells.values[name]
        agreed = self.rules.station.sentinels.get(name)
        if agreed:
            values = np.where(np.isin(values, list(agreed)), np.nan, values)
        gone[name] = np.isnan(values)
        convert = self._convert.get(name)
        return values if convert is None else np.asarray(convert(values), dtype=np.float64)

    def _places(
        self, probes: pl.Series | None, values: dict[str, NDArray[np.float64]], checks: Checks
    ) -> list[str]:
        """Probe or depth of each row; the depth stays a value where there is a probe as well."""
        count = len(checks.fine)
        if probes is None:
            named = pl.repeat(self._probe or "", count, dtype=pl.String, eager=True)
        else:
            named = probes.fill_null("").str.strip_chars()
            named = named.replace("", self._probe) if self._probe else named
        names: list[str] = named.unique().to_list()
        faults = {n: fault for n in names if n and (fault := self.rules.probe_fault(n))}
        if faults:
            unknown = named.is_in(list(faults)).to_numpy()
            checks.refuse(unknown, "probe", lambda row: faults[named[row]])
        places = names * count if len(names) == 1 else named.to_list()
        bare = (named == "").to_numpy()
        if not bare.any():
            return places
        depth = values.get("depth", np.full(count, np.nan))
        if self._depth is not None:
            depth = np.where(np.isnan(depth), self._depth, depth)
        lost = bare & np.isnan(depth)
        checks.refuse(lost, "probe", lambda _: "expected a probe or a depth")
        wrong = {v: told for v in np.unique(depth[bare & ~lost]).tolist()
                 if (told := self.rules.depth_fault(v))}  # fmt: skip
        astray = bare & np.isin(depth, list(wrong))
        checks.refuse(astray, "depth", lambda row: wrong[float(depth[row])])
        lost = lost | astray
        spelt = {value: place_at(value) for value in np.unique(depth[bare & ~lost]).tolist()}
        for row in np.flatnonzero(bare & ~lost).tolist():
            places[row] = spelt[depth[row]]
        if "depth" in values:
            values["depth"] = np.where(bare, np.nan, values["depth"])
        return places


def _filled(
    values: Mapping[str, NDArray[np.float64]], kept: NDArray[np.intp]
) -> dict[str, list[float | bytes | None]]:
    """The columns that hold a number, None where a row has none."""
    found: dict[str, list[float | bytes | None]] = {}
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
