"""What may be known of an input: distributions, each as a map from the standard normal one.

The map takes a standard-normal variable to the input, x = F^-1(Phi(z)); quantiles, draws and the
way along a gradient all use it, so that no other property of a distribution is ever needed.
Shapes and standard uncertainties: JCGM 100, 4.3, and JCGM 101, 6.4.
"""

from abc import ABC, abstractmethod
from collections.abc import Iterable
from dataclasses import dataclass, fields, replace
from typing import Any, Self

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import erf, lambertw, ndtr, ndtri, stdtr, stdtrit

from models.errors import Complaint, ParameterError
from models.relation import Array, column
from models.uncertainty.first_order import Input


@dataclass(frozen=True, slots=True)
class Distribution(ABC):
    """One column of inputs, all of one shape: mean + width x a standard deviate.

    mean, width: scalars or shape (n,); NaN is allowed in ``mean`` alone: that row has no number.
    Raises ParameterError when a width is negative, infinite or NaN.
    """

    mean: Any
    width: Any

    def __post_init__(self) -> None:
        self._refuse_unless(np.isfinite(self.width) & (column(self.width) >= 0), "width")

    @abstractmethod
    def deviate(self, z: ArrayLike) -> Array:
        """The map of a standard-normal z for mean 0 and width 1, elementwise."""

    @property
    @abstractmethod
    def standard_uncertainty(self) -> Array:
        """Standard deviation."""

    @property
    def rows(self) -> int:
        """How many rows the columns have; 1 where all are scalars."""
        return max(np.size(getattr(self, field.name)) for field in fields(self))

    @property
    def exact(self) -> bool:
        """Whether nothing is uncertain in any row."""
        return not np.any(self.width)

    def from_normal(self, z: ArrayLike) -> Array:
        """The input where a standard-normal variable is z, elementwise."""
        return column(self.mean + self.width * self.deviate(z))

    def quantile(self, probability: ArrayLike) -> Array:
        """The value not exceeded with that probability, elementwise."""
        return self.from_normal(ndtri(column(probability)))

    def take(self, index: Any) -> Self:
        """Some of the rows; ``np.s_[:, None]`` sets them up against draws along the last axis."""
        columns = {field.name: getattr(self, field.name) for field in fields(self)}
        if all(np.size(values) == 1 for values in columns.values()):
            return self
        return replace(
            self,
            **{
                name: np.reshape(values, ())[()] if np.size(values) == 1 else column(values)[index]
                for name, values in columns.items()
            },
        )

    def _refuse_unless(self, holds: Any, name: str, meaning: str = "finite and >= 0") -> None:
        if not np.all(holds):
            shape = type(self).__name__.lower()
            found = np.broadcast_to(column(getattr(self, name)), np.shape(holds))
            worst = found[~np.asarray(holds)].flat[0]
            detail = f"{name} of a {shape} distribution is {meaning}, found {worst:g}"
            raise ParameterError("uncertainty", [Complaint(name, detail)])


@dataclass(frozen=True, slots=True)
class Normal(Distribution):
    """Width: the standard uncertainty."""

    def deviate(self, z: ArrayLike) -> Array:
        """z itself."""
        return column(z)

    @property
    def standard_uncertainty(self) -> Array:
        """The width."""
        return column(self.width)


@dataclass(frozen=True, slots=True)
class Rectangular(Distribution):
    """Anything within mean -+ width, all equally likely."""

    def deviate(self, z: ArrayLike) -> Array:
        """From -1 to 1."""
        return column(erf(column(z) / np.sqrt(2.0)))

    @property
    def standard_uncertainty(self) -> Array:
        """Half-width over root three."""
        return column(self.width) / np.sqrt(3.0)


@dataclass(frozen=True, slots=True)
class Triangular(Distribution):
    """Within mean -+ width, likeliest in the middle."""

    def deviate(self, z: ArrayLike) -> Array:
        """From -1 to 1."""
        z = column(z)
        return np.copysign(1.0 - np.sqrt(2.0 * ndtr(-np.abs(z))), z)

    @property
    def standard_uncertainty(self) -> Array:
        """Half-width over root six."""
        return column(self.width) / np.sqrt(6.0)


@dataclass(frozen=True, slots=True)
class UShaped(Distribution):
    """Within mean -+ width, likeliest at the ends: a sine at an unknown phase (arcsine)."""

    def deviate(self, z: ArrayLike) -> Array:
        """From -1 to 1."""
        return np.sin(0.5 * np.pi * erf(column(z) / np.sqrt(2.0)))

    @property
    def standard_uncertainty(self) -> Array:
        """Half-width over root two."""
        return column(self.width) / np.sqrt(2.0)


@dataclass(frozen=True, slots=True)
class CurvilinearTrapezoid(Distribution):
    """Within limits that are themselves known to -+ blur only (JCGM 101, 6.4.3).

    width: from the mean to the middle of a limit; blur: scalar or shape (n,), at most the width.
    """

    blur: Any

    def __post_init__(self) -> None:
        Distribution.__post_init__(self)
        blur = column(self.blur)
        self._refuse_unless((blur >= 0) & (blur <= self.width), "blur", ">= 0 and <= width")

    def deviate(self, z: ArrayLike) -> Array:
        """Closed form: flat within width - blur, and beyond it the tail 1 - q + q ln q inverted."""
        z = column(z)
        blur = np.divide(
            self.blur, self.width, out=np.zeros(self.rows_shape), where=column(self.width) > 0
        )
        blur = np.maximum(blur, 1e-9)  # a rectangle, to nine digits
        tail, reach = ndtr(-np.abs(z)), 1.0 + blur
        share = np.minimum(4.0 * blur * tail / reach, 1.0)
        q = np.exp(1.0 + np.real(lambertw((share - 1.0) / np.e, -1)))
        flat = np.log1p(2.0 * blur / (1.0 - blur + 1e-300)) / (4.0 * blur)
        inner = (0.5 - tail) / flat
        return np.copysign(np.where(inner < 1.0 - blur, inner, reach * q), z)

    @property
    def rows_shape(self) -> tuple[int, ...]:
        """Common shape of width and blur."""
        return np.broadcast_shapes(np.shape(self.width), np.shape(self.blur))

    @property
    def standard_uncertainty(self) -> Array:
        """Root of a third of width squared and a ninth of blur squared."""
        return np.sqrt(np.square(column(self.width)) / 3.0 + np.square(column(self.blur)) / 9.0)


@dataclass(frozen=True, slots=True)
class StudentT(Distribution):
    """Of a mean of few observations. Width: its standard deviation of the mean, s / root n.

    degrees_of_freedom: scalar or shape (n,), > 2: at 2 and below the variance is infinite, and
    Monte Carlo would report a standard uncertainty that depends on the draws alone.
    """

    degrees_of_freedom: Any

    def __post_init__(self) -> None:
        Distribution.__post_init__(self)
        enough = column(self.degrees_of_freedom) > 2
        self._refuse_unless(enough, "degrees_of_freedom", "above 2 (else it has no variance)")

    def deviate(self, z: ArrayLike) -> Array:
        """Of Student's t, from the lower tail on both sides: no digits lost in the upper one."""
        z = column(z)
        tail = stdtrit(column(self.degrees_of_freedom), ndtr(-np.abs(z)))
        return np.copysign(tail, z)

    @property
    def standard_uncertainty(self) -> Array:
        """Larger than the width, by root of nu / (nu - 2)."""
        nu = column(self.degrees_of_freedom)
        return self.width * np.sqrt(nu / (nu - 2.0))


@dataclass(frozen=True, slots=True)
class Lognormal(Distribution):
    """Of a quantity that is positive and known by a factor. Mean and width are its own, not the log's.

    Width: the standard uncertainty. Rows whose mean is not above 0 have no number.
    """

    def deviate(self, z: ArrayLike) -> Array:
        """In standard uncertainties from the mean."""
        spread = np.divide(
            self.from_normal(z) - self.mean,
            self.width,
            out=np.zeros(np.broadcast_shapes(np.shape(z), np.shape(self.mean), np.shape(self.width))),
            where=column(self.width) > 0,
        )
        return column(spread)

    def from_normal(self, z: ArrayLike) -> Array:
        """Exact in both tails."""
        mean = column(self.mean)
        mean = np.where(mean > 0, mean, np.nan)
        variance = np.log1p(np.square(self.width / mean))
        return mean * np.exp(np.sqrt(variance) * column(z) - 0.5 * variance)

    @property
    def standard_uncertainty(self) -> Array:
        """The width."""
        return column(self.width)


def rows_of(inputs: Iterable[Distribution]) -> int:
    """How many rows a set of inputs has."""
    return max((given.rows for given in inputs), default=1)


def as_normal(inputs: Iterable[Input]) -> dict[str, Distribution]:
    """First-order inputs as normal distributions, both parts of each uncertainty together."""
    return {given.name: Normal(given.value, given.total) for given in inputs}
