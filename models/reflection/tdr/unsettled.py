"""What a record leaves open of its late level when it ends soon after the end reflection."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.reflection.tdr.late_level import Circuit
from models.reflection.tdr.probe import WAVE_IMPEDANCE
from models.reflection.tdr.record import Traces
from models.relation import Array

ENOUGH = 3.0
"""Round trips after the end reflection, from which the slope of a record counts no more."""
STILL_CHANGES = 2.0
"""Times the change from the middle to the end of what follows the end reflection, for what is still
to come: an exponential that has fallen by a third in that time falls by twice that afterwards."""
SLOW_SHARE = 0.1
"""Of the end reflection, before the first round trip is over: what arrives late in simulated soils
that relax below 0.1 GHz."""


@dataclass(frozen=True, slots=True, eq=False)
class Ends:
    """End reflections of traces, shape (traces,); NaN where there is none."""

    time: Array
    """s"""
    trip: Array
    """s, along the rods and back."""
    index: Array
    """Refractive, of what surrounds the rods."""

    def rows(self, which: NDArray[np.intp]) -> "Ends":
        """Some of them."""
        return Ends(self.time[which], self.trip[which], self.index[which])


@np.errstate(all="ignore")
def unsettled(
    given: Traces, ends: Ends, conductivity: Array, between: Circuit, length: float
) -> Array:
    """Standard uncertainty of late levels for reflections still to come; shape (traces,).

    conductivity: S/m, as the record shows it. length: of the rods, m. Where no end reflection is
    seen none returns, and 0 is said.

    Each round trip multiplies a reflection by q = G exp(-2 a L), with G that of the rods towards
    the cable, and a = eta0 sigma / 2 n the attenuation by conduction: after n of them the sum of
    all that follow is (1 - G^2) exp(-2 a L) q^(n + 1) / (1 - q). Half of the conductivity shown is
    taken for a: what has not settled shows too much.
    """
    line = between.instrument_impedance
    rods = between.constant.value * WAVE_IMPEDANCE * length / ends.index
    mismatch = (line - rods) / (line + rods)
    kept = np.exp(-WAVE_IMPEDANCE * 0.5 * np.nan_to_num(conductivity) * length / ends.index)
    trips = np.maximum((given.end - ends.time) / ends.trip, 0.0)
    ratio = mismatch * kept
    first = (1 - np.square(mismatch)) * kept
    to_come = first * np.abs(ratio) ** (np.floor(trips) + 1) / (1 - ratio)
    lacking = np.maximum(1 - trips / ENOUGH, 0.0)
    slow = SLOW_SHARE * first * np.maximum(1 - trips, 0.0)
    changing = STILL_CHANGES * lacking * _change(given, ends.time)
    return np.nan_to_num(np.sqrt(np.square(to_come) + np.square(changing) + np.square(slow)))


def _change(given: Traces, end: Array) -> Array:
    """Of the mean level between the third and the fourth quarter after the end reflection."""
    time = given.time
    after = (given.end - end)[:, None]
    last = time > end[:, None] + 0.75 * after
    middle = (time > end[:, None] + 0.5 * after) & ~last
    means = [np.where(part, given.rho, 0.0).sum(axis=-1) / np.maximum(part.sum(axis=-1), 1)
             for part in (middle, last)]  # fmt: skip
    return np.abs(means[1] - means[0])
