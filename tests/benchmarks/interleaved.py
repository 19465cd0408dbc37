"""Side by side: every case and its reference in the same rounds, medians, one JSON line each."""

import json
import os
import statistics
import time
from collections.abc import Callable, Mapping

QUIET_IDLE = 0.93
PATIENCE = 10.0


def quiet() -> bool:
    """Wait until the machine is idle, ten seconds at most; whether it was."""
    end = time.monotonic() + PATIENCE
    while time.monotonic() < end:
        busy, total = _ticks()
        time.sleep(0.3)
        later_busy, later_total = _ticks()
        if later_total > total and 1 - (later_busy - busy) / (later_total - total) >= QUIET_IDLE:
            return True
    return False


def _ticks() -> tuple[int, int]:
    with open("/proc/stat") as stat:  # noqa: PTH123
        counts = [int(word) for word in stat.readline().split()[1:]]
    return sum(counts) - counts[3] - counts[4], sum(counts)


def medians(
    cases: Mapping[str, Callable[[], object]],
    rounds: int = 9,
    clock: Callable[[], float] = time.perf_counter,
) -> dict[str, float]:
    """Median time of each case, s, interleaved; the first is warmed with the rest.

    clock: wall time, or time.process_time for what one thread computes.
    """
    for case in cases.values():
        case()
    taken: dict[str, list[float]] = {name: [] for name in cases}
    for _ in range(rounds):
        for name, case in cases.items():
            start = clock()
            case()
            taken[name].append(clock() - start)
    return {name: statistics.median(times) for name, times in taken.items()}


def report(name: str, ratio: float, aim: str, **figures: float) -> None:
    """One line of JSON: what was compared, the ratio, what it should be."""
    rounded = {key: float(f"{value:.4g}") for key, value in figures.items()}
    line = {"name": name, "ratio": float(f"{ratio:.3g}"), "aim": aim, **rounded}
    print(json.dumps({**line, "load": os.getloadavg()[0]}), flush=True)
