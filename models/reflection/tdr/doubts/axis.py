"""Whether traces were taken on another axis than they came on: ns sent as metres."""

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray
from scipy.constants import speed_of_light

from models.reflection.tdr.bench import Bench, Record
from models.reflection.tdr.calibration import rise_of
from models.reflection.tdr.measure import times_of
from models.reflection.tdr.record import Traces

NS_OVER_M = 1e-9 * speed_of_light / 2.0
"""Two-way time of a nanosecond over that of a metre."""
SLOW = 0.7e-9
"""s, rise of a first reflection from which it is rather one of a tenth of a nanosecond, stretched:
nineteen simulated cables in twenty of 3 to 30 m rise faster."""


def as_nanoseconds(record: Record) -> Record:
    """A record on an axis in ns that was taken as one in m."""
    return Record(_shrunk(record.trace), None if record.late is None else _shrunk(record.late))


def _shrunk(trace: Traces) -> Traces:
    return replace(trace, start=NS_OVER_M * trace.start, step=NS_OVER_M * trace.step)


def in_nanoseconds(record: Record, bench: Bench) -> NDArray[np.bool_]:
    """Which traces rise too slowly for their axis, and show the end of the rods were it in ns.

    record: traces that show no end on an axis in m. bench: without traces in air and in water.
    """
    slow = np.zeros(record.trace.count, dtype=np.bool_)
    for row in range(record.trace.count):
        one = record.trace.rows(np.array([row]))
        _, rise = rise_of((one,))
        if rise > SLOW:
            columns, _ = times_of(_shrunk(one), bench)
            slow[row] = np.isfinite(columns["apparent_permittivity"][0])
    return slow
