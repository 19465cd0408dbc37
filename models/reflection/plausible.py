"""Whether a permittivity can be that of a moist, relaxing, conducting medium."""

import numpy as np
from scipy.ndimage import median_filter

from models.flags import Flags
from models.reflection.estimates import Band
from models.reflection.sweep_flags import MARGIN, Finding, at_most, raised
from models.relation import Array, ComplexArray

WATER = 88.0
"""Real part of the permittivity of water at 0 Cel: soils, and what is poured on them, have less."""
FAST = 1e8
"""Hz, below which clay and electrodes may show more than water does."""
RISE = 0.10
"""Of |eps|, by which the real part may rise with frequency beside its uncertainty."""
WINDOW = 5
"""Points of the running median that single outliers do not get through."""
FEWEST = 8
"""Points of a sweep from which its course is judged."""


@np.errstate(all="ignore")
def judge(
    frequency: Array, permittivity: ComplexArray, band: Band, flags: Flags
) -> tuple[tuple[Finding, ...], ...]:
    """Mark, in place, what no such medium has; the numbers behind it, sample by sample.

    What could not be looked at, for want of numbers, is left out.

    frequency: shape (f,), Hz, rising. permittivity: shape (m, f).
    """
    told = []
    for place, eps in enumerate(permittivity):
        least = eps.real - MARGIN * band.real[place]
        above = np.where(frequency >= FAST, least, np.nan)
        raised(flags[place], above > WATER, "above-water")
        rise = _rise(eps, band.real[place])
        raised(flags[place], rise > RISE, "rises-with-frequency")
        told.append(tuple(finding for finding in (
            at_most("above-water", "largest real part less three standard uncertainties, from "
                    "0.1 GHz on", above, WATER, frequency),
            at_most("rises-with-frequency", "largest rise of the real part with frequency beyond "
                    "three standard uncertainties, over |eps|", rise, RISE, frequency),
        ) if not np.isnan(finding.value)))  # fmt: skip
    return tuple(told)


def _rise(eps: ComplexArray, u: Array) -> Array:
    """By how much the real part certainly exceeds what it was at some lower frequency, over |eps|.

    Polarisation follows a slower field better than a faster one: the real part never rises, but
    for noise. NaN where there are too few points.
    """
    known = np.isfinite(eps)
    rise = np.full(eps.size, np.nan)
    if known.sum() < FEWEST:
        return rise
    real = median_filter(eps.real[known], WINDOW, mode="nearest")
    lowest = np.minimum.accumulate(real + MARGIN * u[known])
    rise[known] = (real - MARGIN * u[known] - lowest) / np.abs(eps[known])
    return np.maximum(rise, 0.0)
