"""A year of five minutes in hourly bins with bands, beside plain hourly numbers of polars.

Run: python -m tests.benchmarks.bench_series
"""

from zoneinfo import ZoneInfo

import numpy as np
import polars as pl

from models.series import Bounds, resample, series
from service.page.chart import Line, Panel, time_chart
from service.stations.series_edges import bin_edges
from tests.benchmarks.interleaved import medians, quiet, report

ROWS, STEP, START = 105_120, 300.0, 1_767_225_600.0
UTC = ZoneInfo("UTC")


def main():
    rng = np.random.default_rng(3)
    seconds = START + STEP * np.arange(ROWS)
    value = 0.25 + 0.1 * np.sin(seconds / 2e6) + 0.005 * rng.standard_normal(ROWS)
    u, shared = np.full(ROWS, 0.02), np.full(ROWS, 0.015)
    flags = (rng.random(ROWS) < 0.01).astype(np.uint64)
    end = START + STEP * ROWS
    frame = pl.DataFrame({"time": (seconds * 1e6).astype("datetime64[us]"), "value": value})

    def plain():
        return frame.group_by_dynamic("time", every="1h").agg(
            pl.len(),
            pl.col("value").mean().alias("mean"),
            pl.col("value").min().alias("minimum"),
            pl.col("value").max().alias("maximum"),
            pl.col("value").last().alias("last"),
        )

    def ours(rules=("plain",)):
        rows = series(seconds, value, u, shared, flags=flags)
        edges = bin_edges(START, end, "1h", UTC)
        return resample(rows, edges, step=STEP, gap=900.0, rules=rules, bounds=Bounds(0.0, 0.5))

    line = Line("0.15 m", seconds, value, value - 0.04, value + 0.04, flags != 0)

    def chart():
        panel = Panel("Water content", "m3/m3", [line])
        return time_chart([panel], title="t", span=(START, end), zone=UTC, gap=900.0)

    calm = quiet()
    found = medians({"polars": plain, "plain": ours, "chart": chart,
                     "both": lambda: ours(("plain", "time-weighted"))}, rounds=15)  # fmt: skip
    for name in ("plain", "both", "chart"):
        report(
            f"a year at 5 min, {name}, in hourly groups of polars",
            found[name] / found["polars"],
            "at most 20",
            polars_ms=1e3 * found["polars"],
            ours_ms=1e3 * found[name],
            calm=calm,
        )


if __name__ == "__main__":
    main()
