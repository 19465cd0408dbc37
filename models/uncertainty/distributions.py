"""What may be known of an input: distributions, each as a map from the standard normal one.

The map takes a standard-normal variable to the input, x = F^-1(Phi(z)); quantiles, draws and the
way along a gradient all use it, so that no other property of a distribution is ever needed.
Shapes and standard uncertainties: JCGM 100, 4.3, and JCGM 101, 6.4.
"""

from abc import ABC, abstractmethod
from collections.abc import Iterable
from dataclasses import dataclass, fields
from typing import Any, Self

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import erf, lambertw, ndtr, ndtri, stdtrit

from models.errors import Complaint, ParameterError
from models.relation import Array, column
from models.uncertainty.first_order import Input


@dataclass(frozen=True, slots=True)
class Distribution(ABC):
    """A column of inputs, all of one shape.

    mean, width: scalars or shape (n,); what the width is, each shape says.
    Raises ParameterError when a width is negative, infinite or NaN. A mean may be NaN: no number.
    """

    mean: Any
    width: Any

    def __post_init__(self) -> None:
        self._refuse_unless(np.isfinite(self.width) & (column(self.width) >= 0), "width")

    @abstractmethod
    def from_normal(self, z: ArrayLike) -> Array:
        """The input where a standard-normal variable is z, elementwise."""

    @property
    @abstractmethod
    def standard_uncertainty(self) -> Array:
        """Standard deviation."""

    @property
    def rows(self) -> int:
        """How many rows the columns have; 1 where all are scalars."""
        shapes = (np.shape(getattr(self, field.name)) for field in fields(self))
        return int(np.broadcast_shapes((1,), *shapes)[0])

    @property
    def exact(self) -> bool:
        """Whether nothing is uncertain in any row."""
        return not np.any(self.width)

    def quantile(self, probability: ArrayLike) -> Array:
        """The value not exceeded with that probability, elementwise."""
        return self.from_normal(ndtri(column(probability)))

    def take(self, index: Any) -> Self:
        """Some of the rows; ``np.s_[:, None]`` sets them up against draws along the last axis."""
        taken = object.__new__(type(self))  # what holds for all rows holds for some
        for field in fields(self):
            values = getattr(self, field.name)
            single = np.size(values) == 1
            some = np.reshape(values, ())[()] if single else column(values)[index]
            object.__setattr__(taken, field.name, some)
        return taken

    def _refuse_unless(self, holds: Any, name: str, meaning: str = "finite and >= 0") -> None:
        if not np.all(holds):
            found = np.broadcast_to(column(getattr(self, name)), np.shape(holds))
            worst = found[~np.asarray(holds)].flat[0]
            shape = type(self).__name__
            detail = f"{name} of {shape} must be {meaning}, found {worst:g}"
            raise ParameterError("uncertainty", [Complaint(name, detail)])


@dataclass(frozen=True, slots=True)
class Lognormal(Distribution):
    """Of a positive quantity known by a factor; mean and width are its own, not its logarithm's.

    Width: the standard uncertainty. Rows whose mean is not above 0 have no number.
    """

    def from_normal(self, z: ArrayLike) -> Array:
        """Normal in the logarithm."""
        mean = np.where(column(self.mean) > 0, self.mean, np.nan)
        variance = np.log1p(np.square(self.width / mean))
        return mean * np.exp(np.sqrt(variance) * column(z) - 0.5 * variance)

    @property
    def standard_uncertainty(self) -> Array:
        """The width."""
        return column(self.width)


@dataclass(frozen=True, slots=True)
class Symmetric(Distribution):
    """The mean, and the width times a deviate that is as likely above 0 as below."""

    def from_normal(self, z: ArrayLike) -> Array:
        """The mean and so many widths."""
        return self.mean + self.width * self.deviate(column(z))

    @abstractmethod
    def deviate(self, z: Array) -> Array:
        """The map for mean 0 and width 1, elementwise."""


@dataclass(frozen=True, slots=True)
class Normal(Symmetric):
    """Width: the standard uncertainty."""

    def deviate(self, z: Array) -> Array:
        """The variable itself."""
        return z

    @property
    def standard_uncertainty(self) -> Array:
        """The width."""
        return column(self.width)


@dataclass(frozen=True, slots=True)
class Rectangular(Symmetric):
    """Anything within mean -+ width, all equally likely."""

    def deviate(self, z: Array) -> Array:
        """From -1 to 1."""
        return column(erf(z / np.sqrt(2.0)))

    @property
    def standard_uncertainty(self) -> Array:
        """Half-width over root three."""
        return column(self.width) / np.sqrt(3.0)


@dataclass(frozen=True, slots=True)
class Triangular(Symmetric):
    """Within mean -+ width, likeliest in the middle."""

    def deviate(self, z: Array) -> Array:
        """From -1 to 1."""
        return np.copysign(1.0 - np.sqrt(2.0 * ndtr(-np.abs(z))), z)

    @property
    def standard_uncertainty(self) -> Array:
        """Half-width over root six."""
        return column(self.width) / np.sqrt(6.0)


@dataclass(frozen=True, slots=True)
class UShaped(Symmetric):
    """Within mean -+ width, likeliest at the ends: a sine wave met at an unknown phase."""

    def deviate(self, z: Array) -> Array:
        """From -1 to 1."""
        return np.sin(0.5 * np.pi * erf(z / np.sqrt(2.0)))

    @property
    def standard_uncertainty(self) -> Array:
        """Half-width over root two."""
        return column(self.width) / np.sqrt(2.0)


@dataclass(frozen=True, slots=True)
class CurvilinearTrapezoid(Symmetric):
    """Within mean -+ width, the limits themselves known to -+ blur width (JCGM 101, 6.4.3).

    blur: scalar or shape (n,), share of the width, 0 (a rectangle) to 1.
    """

    blur: Any

    def __post_init__(self) -> None:
        Distribution.__post_init__(self)
        blur = column(self.blur)
        self._refuse_unless((blur >= 0) & (blur <= 1), "blur", "0 to 1")

    def deviate(self, z: Array) -> Array:
        """In closed form: flat in the middle, then 1 - q + q ln q of probability is left."""
        blur = np.clip(self.blur, 1e-9, 1.0 - 1e-9)  # the two limits, to nine digits
        left, reach = ndtr(-np.abs(z)), 1.0 + blur
        share = np.minimum(4.0 * blur * left / reach, 1.0)
        q = np.exp(1.0 + np.real(lambertw((share - 1.0) / np.e, -1)))
        middle = (0.5 - left) * 4.0 * blur / np.log((1.0 + blur) / (1.0 - blur))
        return np.copysign(np.where(middle < 1.0 - blur, middle, reach * q), z)

    @property
    def standard_uncertainty(self) -> Array:
        """Of a rectangle, and a little more."""
        return self.width * np.sqrt(1.0 / 3.0 + np.square(column(self.blur)) / 9.0)


@dataclass(frozen=True, slots=True)
class StudentT(Symmetric):
    """Of the mean of a few observations. Width: their standard deviation over root n.

    degrees_of_freedom: scalar or shape (n,), > 2. At 2 and below the variance is infinite, and
    draws would report whatever standard uncertainty their number happens to give.
    """

    degrees_of_freedom: Any

    def __post_init__(self) -> None:
        Distribution.__post_init__(self)
        enough = column(self.degrees_of_freedom) > 2
        self._refuse_unless(enough, "degrees_of_freedom", "above 2 (else there is no variance)")

    def deviate(self, z: Array) -> Array:
        """Student's t; always from the lower tail, where no digits are lost."""
        return np.copysign(stdtrit(column(self.degrees_of_freedom), ndtr(-np.abs(z))), z)

    @property
    def standard_uncertainty(self) -> Array:
        """Larger than the width, by the root of nu / (nu - 2)."""
        nu = column(self.degrees_of_freedom)
        return self.width * np.sqrt(nu / (nu - 2.0))


def rows_of(inputs: Iterable[Distribution]) -> int:
    """How many rows a set of inputs has. Raises ValueError where their lengths differ."""
    return int(np.broadcast_shapes((1,), *((given.rows,) for given in inputs))[0])


def as_normal(inputs: Iterable[Input]) -> dict[str, Distribution]:
    """First-order inputs as normal distributions, both parts of each uncertainty together."""
    return {given.name: Normal(given.value, given.total) for given in inputs}
