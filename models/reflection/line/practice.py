"""Good practice with a filled line or cell."""

from collections.abc import Iterator
from typing import Protocol

import numpy as np

from models.flags import Flags
from models.reflection.propagation import attenuation_length, propagation_constant
from models.reflection.sweep_flags import MARGIN, Finding, between, raised
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
    raised(flags[0], above.any(axis=0), "reflection-above-one")


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
    middle = complex(np.median(usable.real) + 1j * np.median(usable.imag)) if usable.size else 1.0
    departure = abs(middle - 1)
    fits = known and float(np.nanmedian(residual)) < MARGIN
    return Finding("magnetic", holds=departure <= MAGNETIC or fits, value=departure,
                   limit=MAGNETIC, unit="1",
                   about="median departure of permeability from 1, from both ends")  # fmt: skip


def _of_reflection(frequency: Array, reflection: ComplexArray) -> Finding:
    with np.errstate(all="ignore"):
        size = np.abs(reflection).max(axis=0)
    above = size > 1 + ABOVE_ONE
    return Finding("reflection-above-one", holds=not above.any(), value=_largest(size),
                   limit=1 + ABOVE_ONE, unit="1", about="largest reflection at the sample",
                   frequencies=between(frequency, above))  # fmt: skip


def _of_sample(query: Described, eps: ComplexArray) -> Iterator[Finding]:
    frequency = query.frequency
    if query.length is not None and np.isfinite(eps).any():
        if query.ends:
            way = propagation_constant(eps, frequency)
            turns = np.abs(way.imag) * query.length / (2 * np.pi)
            short = turns < SHORT
            yield Finding("electrically-short", holds=not short.any(),
                          value=float(np.nanmin(turns)), limit=SHORT, unit="1",
                          about="length of the cell in wavelengths, smallest",
                          frequencies=between(frequency, short))  # fmt: skip
        else:
            thick = query.length / attenuation_length(eps, frequency)
            thin = thick < ENDLESS
            yield Finding("sample-thickness", holds=not thin.any(), value=float(np.nanmin(thick)),
                          limit=ENDLESS, unit="1",
                          about="length of the filling in attenuation lengths, smallest",
                          frequencies=between(frequency, thin))  # fmt: skip
    if query.grain_size is not None and query.gap_width is not None:
        ratio = query.gap_width / query.grain_size
        yield Finding("grain-size", holds=ratio >= GRAINS, value=ratio, limit=GRAINS, unit="1",
                      about="gap between the conductors over the largest grain")  # fmt: skip


def _largest(values: Array) -> float:
    usable = values[np.isfinite(values)]
    return float(usable.max()) if usable.size else float("nan")
