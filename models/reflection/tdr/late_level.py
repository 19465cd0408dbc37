"""The level a trace settles at, and the bulk conductivity that it means."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.reflection.tdr.record import Traces
from models.reflection.tdr.smoothing import noise_of, still_u
from models.relation import Array

TAILS = (1.0, 0.5, 0.25, 0.1)
"""Shares of a record, counted from its end, over which it may have settled."""
DRIFT = 2e-3
"""Difference between the halves of a tail up to which it counts as settled."""
NOISY = 3.0
"""Times its noise, up to which such a difference is noise."""


@dataclass(frozen=True, slots=True, eq=False)
class LateLevel:
    """The mean over the end of a record; shape (traces,)."""

    value: Array
    standard_uncertainty: Array
    from_time: Array
    """s, two-way, where the mean begins."""
    settled: NDArray[np.bool_]


def late_level(given: Traces) -> LateLevel:
    """Mean over the longest tail of each trace that has settled; its noise, and what drifts.

    Where none has, the shortest one is taken, and the drift over it counts as uncertainty.
    """
    noise, still = noise_of(given), still_u(given)
    value, u, begin = (np.full(given.count, np.nan) for _ in range(3))
    done, settled = np.zeros(given.count, dtype=np.bool_), np.zeros(given.count, dtype=np.bool_)
    for share in TAILS:
        length = max(int(share * given.points), 4)
        tail = given.rho[:, given.points - length :]
        half = length // 2
        drift = np.abs(tail[:, half:].mean(axis=-1) - tail[:, :half].mean(axis=-1))
        mean_u = noise / np.sqrt(length)
        by_noise = NOISY * 2.0 * mean_u
        quiet = drift <= np.maximum(by_noise, DRIFT)
        here = ~done & (quiet | (share == TAILS[-1]))
        done |= here
        settled |= here & quiet
        value[here] = tail.mean(axis=-1)[here]
        drifting = np.where(drift <= by_noise, 0.0, 0.5 * drift)
        u[here] = np.hypot(np.hypot(mean_u, still), drifting)[here]
        begin[here] = given.end - given.step * (length - 1)
    return LateLevel(value, u, begin, settled)


def level_after(given: Traces, time: float) -> tuple[float, float]:
    """Mean level of traces from a two-way time on, and its noise; over the last tenth at least."""
    first = int(np.ceil((time - given.start) / given.step))
    first = min(max(first, 0), given.points - max(given.points // 10, 4))
    tail = given.rho[:, first:]
    noise = float(np.sqrt(np.mean(np.square(noise_of(given)))))
    still = float(np.sqrt(np.mean(np.square(still_u(given)))))
    return float(tail.mean()), float(np.hypot(noise / np.sqrt(tail.size), still))


@dataclass(frozen=True, slots=True)
class Known:
    """A number and its standard uncertainty."""

    value: float
    standard_uncertainty: float = 0.0


@dataclass(frozen=True, slots=True)
class Circuit:
    """What stands between the late level and the conductivity of the medium."""

    constant: Known
    """Conductivity over conductance of the rods, 1/m."""
    series_resistance: Known
    """Of cable and contacts, ohm."""
    open_level: Known = Known(1.0)
    """Where the record settles with nothing between the rods."""
    instrument_impedance: float = 50.0
    """ohm"""


@dataclass(frozen=True, slots=True, eq=False)
class Conductivity:
    """S/m, shape (traces,); NaN where the level leaves no resistance for the medium."""

    value: Array
    standard_uncertainty: Array
    shared: Array


def resistance(level: float, open_level: float, impedance: float) -> float:
    """Resistance at the end of the line, ohm, of a late level.

    The scale of the instrument is corrected first: an open line reflects everything.
    """
    q = 2.0 * (1.0 + level) / (1.0 + open_level)
    return impedance * q / (2.0 - q)


@np.errstate(all="ignore")
def bulk_conductivity(level: Array, level_u: Array, circuit: Circuit) -> Conductivity:
    """Conductivity of the medium from late levels, cable and contacts in series with it.

    level: shape (traces,). Castiglione and Shouse (2003) take the cable as a scale instead, which
    reads high by the share of its resistance in the impedance of the instrument.

    sigma = K / (R - Rs) with R = Z (1 + r) / (1 - r), r the level scaled so that open is 1. Noise
    above the open level means no conduction, not a negative one.
    """
    scale = 2.0 / (1.0 + circuit.open_level.value)
    q = scale * (1.0 + level)
    conductance = (2.0 - q) / (circuit.instrument_impedance * q)
    conductance = np.where(q >= 2.0, 0.0, np.where(q > 0.0, conductance, np.nan))
    left = 1.0 - conductance * circuit.series_resistance.value
    constant = circuit.constant.value
    value = np.where(left > 0.0, constant * conductance / left, np.nan)
    slope = 2.0 * constant / (circuit.instrument_impedance * np.square(q * left))
    open_u = circuit.open_level.standard_uncertainty * q / (1.0 + circuit.open_level.value)
    shared = np.sqrt(
        np.square(slope * open_u)
        + np.square(value * circuit.constant.standard_uncertainty / constant)
        + np.square(value * value * circuit.series_resistance.standard_uncertainty / constant)
    )
    total = np.hypot(shared, slope * scale * level_u)
    lost = np.where(np.isnan(value), np.nan, 0.0)
    return Conductivity(value, total + lost, shared + lost)
