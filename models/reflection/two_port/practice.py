"""Good practice with a sample between two ports."""

from collections.abc import Iterator
from typing import Protocol

import numpy as np

from models.flags import Flags
from models.reflection.propagation import attenuation_length, propagation_constant
from models.reflection.sweep_flags import MARGIN, Finding, between, raised
from models.reflection.two_port.nicolson_ross_weir import Constants
from models.relation import Array, ComplexArray

ABOVE_ONE = 0.02
GRAINS = 50.0
MAGNETIC, KNOWN = 0.05, 0.1
"""Departure of permeability from 1 that counts, and the uncertainty up to which it is looked at."""
DARK = 0.05
"""Reflection below which permittivity and permeability part no more."""
SHORT = 0.01
"""Wavelengths in a sample below which it is electrically short."""
THICK = 4.6
"""Attenuation lengths after which a hundredth is left."""

Parameters = tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray]


class Described(Protocol):
    """What practice asks of a query; lengths in m."""

    @property
    def frequency(self) -> Array:
        """Hz, shape (f,)."""

    @property
    def length(self) -> float:
        """Of the sample."""

    @property
    def grain_size(self) -> float | None:
        """Of the largest grain."""

    @property
    def gap_width(self) -> float | None:
        """Between the conductors."""


def magnetic_finding(frequency: Array, both: Constants, mu_u: Array) -> Finding:
    """Whether the permeability is 1, over the frequencies at which it is well known."""
    mu = both.permeability
    seen = np.isfinite(mu) & (mu_u < KNOWN) & np.isfinite(mu_u)
    about = "median departure of permeability from 1 where it is known to 0.1"
    if seen.sum() < max(3, frequency.size // 20):
        return Finding("magnetic", holds=True, value=float("nan"), limit=MAGNETIC, unit="1",
                       about=about)  # fmt: skip
    departure = abs(complex(np.median(mu[seen].real) + 1j * np.median(mu[seen].imag)) - 1)
    limit = max(MAGNETIC, MARGIN * float(np.median(mu_u[seen])))
    return Finding("magnetic", holds=departure <= limit, value=departure, limit=limit, unit="1",
                   about=about)  # fmt: skip


@np.errstate(all="ignore")
def flag(
    query: Described,
    s: Parameters,
    eps: ComplexArray,
    mu: ComplexArray | None,
    noise: Array,
    flags: Flags,
    *,
    certain: bool,
) -> None:
    """Mark, in place, the frequencies at which the sample or the sweep is doubtful."""
    power = np.square(np.abs(s[0])) + np.square(np.abs(s[1]))
    excess = np.sqrt(power) - 1
    raised(flags[0], (excess > MARGIN * noise) & (excess > ABOVE_ONE), "reflection-above-one")
    way = propagation_constant(eps, query.frequency, 1.0 if mu is None else mu) * query.length
    turns = np.abs(way.imag) / (2 * np.pi)
    raised(flags[0], turns < SHORT, "electrically-short")
    raised(flags[0], way.real > THICK, "sample-thickness")
    if mu is not None:
        near = (np.abs(s[0]) < DARK) & (turns > 0.25)
        raised(flags[0], near, "half-wave")
    if not certain:
        raised(flags[0], np.ones(eps.shape, dtype=bool), "branch-uncertain")


def findings_of(
    query: Described,
    eps: ComplexArray,
    mu: ComplexArray | None,
    magnetic: Finding,
    s: Parameters,
) -> tuple[Finding, ...]:
    """Every check, kept or not, with its number and limit."""
    return (magnetic, *_of_sample(query, eps, mu), _of_power(query.frequency, s))


def _of_power(frequency: Array, s: Parameters) -> Finding:
    with np.errstate(all="ignore"):
        size = np.sqrt(np.square(np.abs(s[0])) + np.square(np.abs(s[1])))
    above = size > 1 + ABOVE_ONE
    return Finding("reflection-above-one", holds=not above.any(), value=float(np.nanmax(size)),
                   limit=1 + ABOVE_ONE, unit="1", about="largest sqrt(|S11|^2 + |S21|^2)",
                   frequencies=between(frequency, above))  # fmt: skip


def _of_sample(query: Described, eps: ComplexArray, mu: ComplexArray | None) -> Iterator[Finding]:
    length = attenuation_length(eps, query.frequency, 1.0 if mu is None else mu)
    if np.isfinite(eps).any():
        thick = query.length / length
        bad = thick > THICK
        yield Finding("sample-thickness", holds=not bad.any(), value=float(np.nanmax(thick)),
                      limit=THICK, unit="1", about="thickness in attenuation lengths, largest",
                      frequencies=between(query.frequency, bad))  # fmt: skip
        with np.errstate(all="ignore"):
            way = propagation_constant(eps, query.frequency, 1.0 if mu is None else mu)
        turns = np.abs(way.imag) * query.length / (2 * np.pi)
        short = turns < SHORT
        yield Finding("electrically-short", holds=not short.any(), value=float(np.nanmin(turns)),
                      limit=SHORT, unit="1", about="thickness in wavelengths, smallest",
                      frequencies=between(query.frequency, short))  # fmt: skip
    if query.grain_size is not None and query.gap_width is not None:
        ratio = query.gap_width / query.grain_size
        yield Finding("grain-size", holds=ratio >= GRAINS, value=ratio, limit=GRAINS, unit="1",
                      about="gap between the conductors over the largest grain")  # fmt: skip
