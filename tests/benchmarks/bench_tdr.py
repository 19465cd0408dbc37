"""TDR traces in passes of a smoothing filter over one of them: one trace, a thousand, the whole.

Run: python -m tests.benchmarks.bench_tdr
"""

import numpy as np
from scipy.signal import savgol_filter

from models.reflection.tdr.bench import Record
from models.reflection.tdr.invert_traces import by_whole_trace
from models.reflection.tdr.measure import by_travel_time
from models.reflection.tdr.record import traces
from tests.benchmarks.interleaved import medians, quiet, report
from tests.models.reflection.tdr_records import calibrated, noisy, record, soil

POINTS, WINDOW, MANY = 2048, 33, 1000


def main():
    bench, known = calibrated("long")
    known()
    medium = [(soil(0.25, 0.03), 1.0)]
    drawn = noisy(medium, 0.0015, MANY, seed=1, points=POINTS)
    late = record("long_moist_loam").late
    levels = traces(late.start, late.step, np.repeat(late.rho, MANY, axis=0))
    one = Record(drawn.rows(np.array([0])), levels.rows(np.array([0])))
    saline = noisy([(soil(0.30, 0.2), 1.0)], 0.0015, 1, seed=1, points=POINTS)
    wet_clay = soil(0.35, 0.05, 0.5, clay=((10, 40e6), (4, 300e6)))
    clay = noisy([(wet_clay, 1.0)], 0.0015, 1, seed=1, points=POINTS)
    sample = drawn.rho[0]
    calm = quiet()
    found = medians({
        "pass": lambda: savgol_filter(sample, WINDOW, 3),
        "one": lambda: by_travel_time(one, bench, known),
        "many": lambda: by_travel_time(Record(drawn, levels), bench, known),
        "whole": lambda: by_whole_trace(one, bench, known),
        "saline": lambda: by_whole_trace(Record(saline), bench, known),
        "clay": lambda: by_whole_trace(Record(clay), bench, known),
    })  # fmt: skip
    once = found["pass"]
    milliseconds = {"pass_ms": 1e3 * once, "calm": calm}
    report("one trace of 2048 points, above 1 ms, in smoothing passes",
           max(found["one"] - 1e-3, 0.0) / once, "at most 3", case_ms=1e3 * found["one"],
           **milliseconds)  # fmt: skip
    report("1000 traces in one call, each, in smoothing passes", found["many"] / MANY / once,
           "vectorised: below one trace alone", case_ms=1e3 * found["many"],
           alone=found["one"] / once, **milliseconds)  # fmt: skip
    for name in ("whole", "saline", "clay"):
        report(f"inversion of a whole trace ({name}), in smoothing passes", found[name] / once,
               "below 1000", case_ms=1e3 * found[name], **milliseconds)  # fmt: skip


if __name__ == "__main__":
    main()
