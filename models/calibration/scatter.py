"""How well the variance of the pairs about their curve is known, and what band that makes.

Where no uncertainty was stated that variance is open, and what follows is Student's distribution.
Stated uncertainties are the least that it can be: it is that, or more, every ratio alike, and
chi-square says how likely each is (Box and Tiao, 1973, have the distribution of a
variance that is known not to be smaller; cited from memory).
"""

from dataclasses import dataclass

import numpy as np
from scipy.special import gammainc, gammaincinv, gammaln, ndtr, stdtrit

from models.relation import Array, column
from models.uncertainty.coverage import coverage_factor

NODES = 96
"""Values by which the factor's distribution is represented."""
LARGEST = 100.0
"""Factor of the variances, uncertainties a tenth of what they should be: what is thought of
beforehand, every ratio alike; chi-square may say that it is more."""
NOTHING = 1e-12
"""Share of the variance that is stated, where next to nothing is."""
BELIEVED = 0.1
"""Probability beforehand that stated uncertainties are right: with it simulated bands hold 93 % of
new truths or more whatever the soil adds to them, and nearly all where it adds nothing."""
STEPS = 60
CLOSE = 1e-9
"""Relative change of a half-width that is none."""
TINY = 1e-30
"""Variance in place of none."""


@dataclass(frozen=True, slots=True)
class Scatter:
    """What chi-square says of the factor by which the variance of the pairs is another."""

    chi_square: float
    """Of the curve as it was fitted."""
    degrees_of_freedom: int
    stated: bool
    """Whether uncertainties were stated."""
    least: float = 1.0
    """Factor at which nothing is left but stated uncertainties."""

    @property
    def factor(self) -> float:
        """Of the variances: 1 where uncertainties were stated."""
        return 1.0 if self.stated else self.chi_square / self.degrees_of_freedom

    def half_width(self, scaled: Array, fixed: Array, probability: float) -> Array:
        """Half-width of the interval that holds the coverage probability, shape (m,).

        scaled: variance that goes with the factor, for factor 1. fixed: variance that does not.
        """
        if not self.stated and not np.any(fixed):
            t = float(stdtrit(self.degrees_of_freedom, 0.5 * (1.0 + probability)))
            return t * np.sqrt(self.factor * scaled)
        factors, shares = self.distribution()
        return _half_width(factors, shares, scaled, fixed, probability)

    def distribution(self) -> tuple[Array, Array]:
        """Factors and their probabilities."""
        half = 0.5 * self.degrees_of_freedom
        if not self.stated:
            return self._between(half, 1.0), np.full(NODES, 1.0 / NODES)
        least = max(self.least, NOTHING)
        squares = max(0.5 * self.chi_square / least, 1e-9)
        high = float(gammainc(half, squares))
        right = np.log(BELIEVED) - squares
        more = (np.log((1.0 - BELIEVED) / np.log(LARGEST)) + gammaln(half) + np.log(max(high, TINY))
                - half * np.log(squares))  # fmt: skip
        share = 1.0 / (1.0 + np.exp(np.clip(more - right, -700.0, 700.0)))
        factors = np.concatenate(([least], self._between(half, high)))
        shares = np.concatenate(([share], np.full(NODES, (1.0 - share) / NODES)))
        return factors, shares

    def _between(self, half: float, high: float) -> Array:
        """Factors at equal steps of the probability of chi-square, up to where it is ``high``."""
        steps = high * (np.arange(NODES) + 0.5) / NODES
        return 0.5 * self.chi_square / np.maximum(column(gammaincinv(half, steps)), 1e-12)


def _half_width(
    factors: Array, shares: Array, scaled: Array, fixed: Array, probability: float
) -> Array:
    """Of normal distributions about one centre, each with its share.

    Newton's steps from below: what is held grows ever more slowly, so none leads too far.
    """
    variance = factors[:, None] * scaled + fixed
    deviation = np.sqrt(np.maximum(variance, TINY))
    width = coverage_factor(probability) * deviation.min(axis=0)
    for _ in range(STEPS):
        away = width / deviation
        held = shares @ (2.0 * ndtr(away) - 1.0)
        rate = shares @ (2.0 * np.exp(-0.5 * np.square(away)) / (np.sqrt(2.0 * np.pi) * deviation))
        step = np.maximum(probability - held, 0.0) / rate
        width = width + step
        if np.all(step <= CLOSE * width):
            break
    return width
