"""From complex frequency to time: the reflected step that a line shows, with derivatives.

On a line parallel to the imaginary axis the inverse Laplace transform is a Fourier transform of a
function that is damped by exp(-a t): what lies beyond the period comes back smaller by exp(-a T),
so that the period need not outlast the slow end of a step. At late times, where all is smooth,
the sum of Stehfest (1970) over a few real frequencies does.
"""

from dataclasses import dataclass
from functools import lru_cache
from math import factorial

import numpy as np
from scipy.fft import irfft, next_fast_len

from models.errors import Complaint, ParameterError
from models.relation import Array, ComplexArray, column

LONGER = 1.5
"""Period over the time of the last point."""
DAMPING = 12.0
"""a T: what comes back is smaller by exp(-12)."""
BANDWIDTH = 6.2
"""Over the spread of the step's slope: angular frequency beyond which nothing is left of it."""
MOST = 1 << 19
"""Points of the transform, from the launch of the step on: 30 m of cable take 30 000."""
FINEST = 2
"""Times the highest frequency, for the sampling rate of the transform."""
LATE_TERMS = 10
"""Of the sum for late times; more lose digits to rounding."""


@dataclass(frozen=True, slots=True, eq=False)
class Grid:
    """Points in time of a trace, and the complex frequencies that reach them."""

    s: ComplexArray
    period_points: int
    step: float
    growth: Array
    """What undoes the damping, at the points of the trace."""
    first: int
    every: int
    shift: float

    def to_time(self, spectra: ComplexArray) -> Array:
        """Time functions from Laplace transforms: (..., frequencies) to (..., points)."""
        full = irfft(spectra * np.exp(self.s * self.shift), self.period_points, axis=-1)
        last = self.first + self.every * self.growth.size
        return full[..., self.first : last : self.every] * self.growth


def grid(start: float, step: float, points: int, spread: float) -> Grid:
    """The grid of a trace.

    start, step: s, two-way time of the first point and between points. spread: s, least standard
    deviation of the slope of the step that will be asked for.
    Raises ParameterError where a trace begins before the launch of the step, or the way from there
    is too long for such points.
    """
    if start < 0:
        detail = (
            "expected times from the launch of the step on, or distances from the instrument; "
            f"found a first point {1e9 * -start:.4g} ns before it"
        )
        raise ParameterError("trace", [Complaint("start", detail, ())])
    highest = BANDWIDTH / (2 * np.pi * spread)
    every = max(int(np.ceil(FINEST * highest * step)), 1)
    fine = step / every
    end = start + step * points
    wanted = int(np.ceil(LONGER * end / fine))
    if wanted > MOST:
        detail = (
            f"expected at most {MOST} points of {1e12 * fine:.3g} ps from the launch of the step, "
            f"found {wanted}: send coarser points, or times from the launch"
        )
        raise ParameterError("trace", [Complaint("axis", detail, ())])
    count = next_fast_len(wanted, real=True)
    period = count * fine
    damping = DAMPING / period
    used = min(count // 2 + 1, int(highest * period) + 1)
    s = damping + 2j * np.pi * np.arange(used) / period
    first = int(start // fine)
    time = start + step * np.arange(points)
    growth = np.exp(damping * time) / fine
    return Grid(s, count, fine, growth, first, every, start - first * fine)


@lru_cache(maxsize=1)
def _late_weights() -> Array:
    half = LATE_TERMS // 2

    def term(k: int, j: int) -> float:
        over = (factorial(half - j) * factorial(j) * factorial(j - 1)
                * factorial(k - j) * factorial(2 * j - k))  # fmt: skip
        return float(j**half * factorial(2 * j)) / over

    return column(
        [
            (-1) ** (k + half) * sum(term(k, j) for j in range((k + 1) // 2, min(k, half) + 1))
            for k in range(1, LATE_TERMS + 1)
        ]
    )


def late_frequencies(time: float) -> ComplexArray:
    """Real frequencies whose values tell a smooth function at a late time, s."""
    return np.arange(1, LATE_TERMS + 1) * (np.log(2.0) / time) + 0j


def late_value(steps: ComplexArray) -> Array:
    """The function at that time from s times its transform: shape (..., LATE_TERMS) to (...)."""
    return (steps.real / np.arange(1, LATE_TERMS + 1)) @ _late_weights()
