"""Cubics that rise everywhere, and their inverse in closed form."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, column


@dataclass(frozen=True, slots=True)
class IncreasingCubic:
    """constant + linear x + quadratic x^2 + cubic x^3, increasing for every x.

    Raises ValueError for coefficients of any other shape: those have no single inverse.
    """

    constant: float
    linear: float
    quadratic: float
    cubic: float

    def __post_init__(self) -> None:
        if self.cubic <= 0 or self.least_slope <= 0:
            raise ValueError(f"{self.written('x')} does not increase everywhere")

    @property
    def flattest(self) -> float:
        """Where the slope is least: the point of inflection."""
        return -self.quadratic / (3 * self.cubic)

    @property
    def least_slope(self) -> float:
        """The slope there."""
        return self.linear + self.quadratic * self.flattest

    @np.errstate(over="ignore", invalid="ignore")
    def __call__(self, x: ArrayLike) -> Array:
        """The cubic, elementwise."""
        x = column(x)
        return self.constant + x * (self.linear + x * (self.quadratic + x * self.cubic))

    @np.errstate(over="ignore", invalid="ignore")
    def inverse(self, y: ArrayLike) -> Array:
        """The one x at which the cubic is y, elementwise.

        From the point of inflection the cubic is s t + c t^3 with s, c > 0, and t follows from
        sinh(3 u) = 3 sinh(u) + 4 sinh(u)^3. One Newton step takes away what rounding left.
        """
        y = column(y)
        scale = 2 * np.sqrt(self.least_slope / (3 * self.cubic))
        height = y - self(self.flattest)
        t = scale * np.sinh(np.arcsinh(3 * height / (self.least_slope * scale)) / 3)
        x = self.flattest + t
        slope = self.linear + x * (2 * self.quadratic + x * 3 * self.cubic)
        return x - (self(x) - y) / slope

    def written(self, symbol: str) -> str:
        """The cubic as a line of text."""
        terms = ((self.linear, ""), (self.quadratic, "^2"), (self.cubic, "^3"))
        powers = (f" {'-' if c < 0 else '+'} {abs(c):g} {symbol}{power}" for c, power in terms)
        return f"{self.constant:g}" + "".join(powers)
