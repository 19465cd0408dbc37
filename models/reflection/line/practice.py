"""Good practice with a filled line or cell."""

from collections.abc import Iterator
from dataclasses import replace
from typing import Protocol

import numpy as np

from models.flags import Flags
from models.reflection.propagation import attenuation_length, propagation_constant
from models.reflection.sweep_flags import MARGIN, Finding, at_least, at_most, raised
from models.relation import Array, ComplexArray

ABOVE_ONE = 0.02
GRAINS = 50.0
ENDLESS = 2.3
"""Attenuation lengths after which a hundredth comes back from the end."""
SHORT = 0.01
MAGNETIC = 0.05


class Described(Protocol):
    """What practice asks of a query; lengths in m."""

    @property
    def frequency(self) -> Array:
        """Hz, shape (f,)."""

    @property
    def length(self) -> float | None:
        """Of the filling."""

    @property
    def ends(self) -> tuple[str, ...]:
        """What ended the cell; none for an endless line."""

    @property
    def grain_size(self) -> float | None:
        """Of the largest grain."""

    @property
    def gap_width(self) -> float | None:
        """Between the conductors."""


@np.errstate(all="ignore")
def flag(reflection: ComplexArray, spread: Array, flags: Flags) -> None:
    """Mark, in place, where more comes back than went in."""
    excess = np.abs(reflection) - 1
    above = (excess > MARGIN * spread) & (excess > ABOVE_ONE)
    for row in above:
        raised(flags[0], row, "reflection-above-one")


def findings_of(
    query: Described, eps: ComplexArray, reflection: ComplexArray
) -> tuple[Finding, ...]:
    """Every check, kept or not, with its number and limit."""
    return (_of_reflection(query.frequency, reflection), *_of_sample(query, eps))


def magnetic_finding(mu: ComplexArray, residual: Array, *, known: bool) -> Finding:
    """Whether both ends of a cell agree on a permeability of 1.

    residual: of the fit with a permeability of 1, over its spread; it counts where noise is known.
    """
    usable = mu[np.isfinite(mu)]
    middle = complex(np.median(usable.real), np.median(usable.imag)) if usable.size else 1.0
    about = "median departure of permeability from 1, from both ends"
    found = at_most("magnetic", about, abs(middle - 1), MAGNETIC)
    fits = known and float(np.median(residual)) < MARGIN
    return replace(found, holds=True) if fits else found


def _of_reflection(frequency: Array, reflection: ComplexArray) -> Finding:
    with np.errstate(all="ignore"):
        size = np.abs(reflection).max(axis=0)
    about = "largest reflection at the sample"
    return at_most("reflection-above-one", about, size, 1 + ABOVE_ONE, frequency)


def _of_sample(query: Described, eps: ComplexArray) -> Iterator[Finding]:
    f = query.frequency
    if query.length is not None and query.ends:
        turns = np.abs(propagation_constant(eps, f).imag) * query.length / (2 * np.pi)
        about = "length of the cell in wavelengths, smallest"
        yield at_least("electrically-short", about, turns, SHORT, f)
    elif query.length is not None:
        thick = query.length / attenuation_length(eps, f)
        about = "length of the filling in attenuation lengths, smallest"
        yield at_least("sample-thickness", about, thick, ENDLESS, f)
    if query.grain_size is not None and query.gap_width is not None:
        about = "gap between the conductors over the largest grain"
        yield at_least("grain-size", about, query.gap_width / query.grain_size, GRAINS)
