"""What a sweep is turned into: permittivity with its uncertainty, flags and findings."""

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtri, stdtrit

from models.flags import Flags
from models.reflection.sweep_flags import MARGIN, Finding, raised, withheld
from models.relation import Array, ComplexArray

LARGEST = 1e6
"""|eps| of a short, and of nothing else: 10 S/m have a fifth of it at 1 MHz."""
BELOW_VACUUM = 0.1
"""By how much eps' may be below 1 before it counts as impossible, beside its uncertainty."""


@dataclass(frozen=True, slots=True)
class Band:
    """Standard uncertainties of real part and loss, shape (m, f) each."""

    real: Array
    loss: Array
    real_shared: Array
    """The part of it that repeated sweeps have in common: standards, lengths."""
    loss_shared: Array


@dataclass(frozen=True, slots=True)
class SweepEstimate:
    """m samples over f frequencies; NaN where the flags say why there is no number."""

    frequency: Array
    """Shape (f,), Hz."""
    permittivity: ComplexArray
    """eps' - j eps'', shape (m, f)."""
    band: Band
    flags: Flags
    """Shape (m, f)."""
    findings: tuple[tuple[Finding, ...], ...]
    """Of each sample."""
    degrees_of_freedom: Array
    """Of the noise, shape (m, f); infinite where it was stated."""
    conjugated: bool = False
    permeability: ComplexArray | None = None
    """mu' - j mu''; None where it was taken to be 1."""
    permeability_band: Band | None = None
    noise_known: bool = True
    """Whether the bands hold noise: it was stated, or the sweeps themselves show it."""


def coverage_factor(probability: float, degrees_of_freedom: Array) -> Array:
    """Half-width of a symmetric interval in standard uncertainties: normal, or Student's t."""
    share = 0.5 * (1 + probability)
    known = np.isfinite(degrees_of_freedom)
    few = stdtrit(np.where(known, np.maximum(degrees_of_freedom, 1.0), 1.0), share)
    return np.where(known, few, ndtri(share))


def flag_loss(permittivity: ComplexArray, band: Band, flags: Flags) -> None:
    """Mark, in place, where there is no number and where the loss is below zero."""
    raised(flags, ~(np.abs(permittivity) <= LARGEST), "no-root")
    floor = MARGIN * np.maximum(band.loss, 1e-4 * np.abs(permittivity))
    raised(flags, -permittivity.imag < -floor, "negative-loss")
    short = 1.0 - permittivity.real
    raised(flags, short > np.maximum(MARGIN * band.real, BELOW_VACUUM), "below-vacuum")


def flag_uncertain(
    permittivity: ComplexArray, band: Band, flags: Flags, most: float | None
) -> None:
    """Mark, in place, what is less certain than the caller wants; None: anything goes."""
    if most is not None:
        with np.errstate(all="ignore"):
            relative = np.hypot(band.real, band.loss) / np.abs(permittivity)
        raised(flags, relative > most, "too-uncertain")


def kept(permittivity: ComplexArray, flags: Flags) -> ComplexArray:
    """The permittivity without what the flags withhold."""
    return np.where(withheld(flags), complex(np.nan, np.nan), permittivity)
