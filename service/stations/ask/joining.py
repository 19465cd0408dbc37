"""One sensor, one series: readings that name a depth join those of the probe that was there."""

from collections.abc import Mapping

import numpy as np
import polars as pl
from numpy.typing import NDArray

from service.stations.ask.estimating import Estimated
from service.stations.ask.stored import Stored

Places = NDArray[np.intp]


def probe_names(result: Estimated, rows: Places | None = None) -> pl.Series:
    """The probe of each row, or of those named; null where none is known."""
    names = pl.Series([*result.probes, None], dtype=pl.String)
    places = result.probe if rows is None else result.probe[rows]
    return names.gather(np.where(places < 0, len(result.probes), places))


def series_of(found: Stored, result: Estimated) -> Mapping[int, Places]:
    """The rows of each series by the number of its channel, in order of time.

    Rows of a depth count for the probe that alone was installed there, where it has a channel of
    its own; of two readings of one moment the one that names the probe counts.
    """
    of_row = found.number.copy()
    numbers = {c.probe: n for n, c in found.channels.items() if c.probe is not None}
    by_depth = np.isin(found.number, [n for n, c in found.channels.items() if c.probe is None])
    for place, name in enumerate(result.probes):
        if name in numbers:
            of_row[by_depth & (result.probe == place)] = numbers[name]
    order = np.lexsort((by_depth, found.time, of_row))
    again = np.zeros(len(order), dtype=np.bool_)
    again[1:] = (np.diff(of_row[order]) == 0) & (np.diff(found.time[order]) == 0)
    order = order[~again]
    return {n: order[of_row[order] == n] for n in np.unique(of_row).tolist()}


def doubled(found: Stored, result: Estimated) -> list[dict[str, str]]:
    """What is said of readings that name a depth while the probe there has one of its own."""
    counted = sum(rows.size for rows in series_of(found, result).values())
    count = len(found) - counted
    if not count:
        return []
    told = "1 reading names" if count == 1 else f"{count} readings name"
    text = (
        f"{told} a depth at a moment of which the probe there has a reading of its own: both are "
        "kept, and means and charts count the one that names the probe"
    )
    return [{"code": "read-twice", "text": text}]


def newest_of_each(table: pl.DataFrame, *keys: str) -> pl.DataFrame:
    """One row for each sensor: the last one of those that name its probe or its depth."""
    return table.sort("time", maintain_order=True).unique(
        subset=[*keys, "probe", "depth"], keep="last", maintain_order=True
    )
