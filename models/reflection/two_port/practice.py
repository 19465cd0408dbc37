"""Good practice with a sample between two ports."""

from collections.abc import Iterator
from typing import Protocol

import numpy as np

from models.flags import Flags
from models.reflection.propagation import attenuation_length, propagation_constant
from models.reflection.sweep_flags import MARGIN, Finding, at_least, at_most, raised
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
        return at_most("magnetic", about, np.nan, MAGNETIC)
    middle = complex(np.median(mu[seen].real), np.median(mu[seen].imag))
    limit = max(MAGNETIC, MARGIN * float(np.median(mu_u[seen])))
    return at_most("magnetic", about, abs(middle - 1), limit)


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
    about = "largest sqrt(|S11|^2 + |S21|^2)"
    return at_most("reflection-above-one", about, size, 1 + ABOVE_ONE, frequency)


def _of_sample(query: Described, eps: ComplexArray, mu: ComplexArray | None) -> Iterator[Finding]:
    f, permeability = query.frequency, 1.0 if mu is None else mu
    about = "thickness in attenuation lengths, largest"
    thick = query.length / attenuation_length(eps, f, permeability)
    yield at_most("sample-thickness", about, thick, THICK, f)
    turns = np.abs(propagation_constant(eps, f, permeability).imag) * query.length / (2 * np.pi)
    about = "thickness in wavelengths, smallest"
    yield at_least("electrically-short", about, turns, SHORT, f)
    if query.grain_size is not None and query.gap_width is not None:
        about = "gap between the conductors over the largest grain"
        yield at_least("grain-size", about, query.gap_width / query.grain_size, GRAINS)
