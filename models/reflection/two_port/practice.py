"""Good practice with a sample between two ports."""

from collections.abc import Iterable, Iterator
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
IMPOSSIBLE = 0.2
"""By how much the real part of a permeability may be below 1, beside its uncertainty."""
UNLIKE, UNSTATED = 0.02, 0.05
"""Difference of S-parameters that are equal in a sample; where no noise was stated."""
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


def permeability_findings(
    frequency: Array, both: Constants, mu_u: Array
) -> tuple[Finding, tuple[Finding, ...]]:
    """Whether the permeability is 1, over the frequencies at which it is well known.

    Returns that, and whether it is a possible one where it is known at all.
    """
    mu = both.permeability
    seen = np.isfinite(mu) & (mu_u < KNOWN) & np.isfinite(mu_u)
    about = "median departure of permeability from 1 where it is known to 0.1"
    if seen.sum() < max(3, frequency.size // 20):
        return at_most("magnetic", about, np.nan, MAGNETIC), ()
    middle = complex(np.median(mu[seen].real), np.median(mu[seen].imag))
    doubt = MARGIN * float(np.median(mu_u[seen]))
    magnetic = at_most("magnetic", about, abs(middle - 1), max(MAGNETIC, doubt))
    about = "median real part of permeability where it is known to 0.1"
    least = 1 - max(IMPOSSIBLE, doubt)
    return magnetic, (at_least("permeability-below-one", about, middle.real, least),)


@np.errstate(all="ignore")
def likeness_findings(s: Parameters, stated: Array | None) -> tuple[Finding, ...]:
    """Whether the sample is the same from both sides, S-parameters being those at its faces.

    stated: standard uncertainty of each part, shape (f,); None: not known.
    """
    told = []
    for key, one, other, names in (
        ("not-symmetric", s[0], s[3], "S11 and S22"), ("not-reciprocal", s[1], s[2], "S21 and S12")
    ):  # fmt: skip
        size = np.sqrt(np.nanmean(np.square(np.abs(one - other))))
        limit = UNSTATED
        if stated is not None:
            limit = max(UNLIKE, 2 * MARGIN * float(np.sqrt(np.mean(np.square(stated)))))
        about = f"difference of {names} at the faces of the sample, root mean square"
        told.append(at_most(key, about, size, limit))
    return tuple(told)


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


def flag_everywhere(findings: Iterable[Finding], flags: Flags) -> None:
    """Mark every frequency, in place, by what does not hold of the sweep as a whole."""
    for finding in findings:
        if not finding.holds:
            raised(flags[0], np.ones(flags.shape[1], dtype=bool), finding.key)


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
