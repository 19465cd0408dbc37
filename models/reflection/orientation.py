"""Which time convention sweeps were written in, as their phase and their loss tell."""

import numpy as np

from models.relation import ComplexArray

FALL = 0.2
"""Radians over a sweep that a phase must run to count."""
STEP = 1.5
"""Radians between neighbours from which the direction of a phase is no longer sure."""


@np.errstate(all="ignore")
def phase_run(read: ComplexArray) -> float:
    """By how much phase runs over a sweep, radians, in the median of sweeps, shape (n, f).

    Passive one-ports answer later, never earlier: phase falls with frequency for exp(+j w t).
    Zero where steps in frequency are too long to tell.
    """
    if read.shape[-1] < 2:
        return 0.0
    steps = np.angle(read[:, 1:] * np.conj(read[:, :-1]))
    if float(np.nanmedian(np.abs(steps))) > STEP:
        return 0.0
    return float(np.median(np.nansum(steps, axis=1)))


def rises(read: ComplexArray) -> bool:
    """Whether phase clearly rises with frequency: the sweeps were written for exp(-j w t)."""
    return phase_run(read) > FALL


def falls(read: ComplexArray) -> bool:
    """Whether phase clearly falls with frequency."""
    return phase_run(read) < -FALL


def loss_share(permittivity: ComplexArray) -> float:
    """Median loss beside |eps|, over everything that has a number; zero where nothing has."""
    with np.errstate(all="ignore"):
        share = -permittivity.imag / np.abs(permittivity)
    usable = share[np.isfinite(share)]
    return float(np.median(usable)) if usable.size else 0.0
