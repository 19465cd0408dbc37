"""The forms a calibration can have, each that of a mixing model that takes own coefficients."""

from dataclasses import dataclass
from math import comb

import numpy as np
from numpy.typing import ArrayLike

from models.errors import ParameterError
from models.mixing.empirical.polynomial import POLYNOMIAL, complaints
from models.mixing.empirical.square_root import SQUARE_ROOT
from models.mixing.family import MixingModel
from models.registry import Registry
from models.relation import Array, column


@dataclass(frozen=True, slots=True, kw_only=True)
class Form:
    """Water content as a polynomial in permittivity or in its square root."""

    key: str
    model: MixingModel
    """The mixing model that takes its coefficients."""
    coefficients: tuple[str, ...]
    """Their names there, from the constant upwards."""
    in_root: bool = False
    """Whether the polynomial is in the square root of permittivity."""

    @property
    def size(self) -> int:
        """How many coefficients there are."""
        return len(self.coefficients)

    def variable(self, permittivity: ArrayLike) -> Array:
        """What the polynomial is in."""
        return np.sqrt(column(permittivity)) if self.in_root else column(permittivity)

    def rate(self, permittivity: ArrayLike) -> Array:
        """Change of that variable with permittivity."""
        k = column(permittivity)
        return 0.5 / np.sqrt(k) if self.in_root else np.ones_like(k)

    def unusable(self, coefficients: Array) -> str:
        """Why the mixing model does not take these coefficients; empty: it does."""
        given = {n: float(c) for n, c in zip(self.coefficients, coefficients, strict=True)}
        try:
            self.model.bind(given)
        except ParameterError as error:
            return str(error)
        if self.model is POLYNOMIAL and (found := complaints(**given)):
            return f"{self.model.key}: {found[0].detail}"
        return ""


FORMS: Registry[Form] = Registry(
    "form of calibration",
    Form(key="square-root", model=SQUARE_ROOT, coefficients=("intercept", "slope"), in_root=True),
    Form(key="polynomial-1", model=POLYNOMIAL, coefficients=("constant", "linear")),
    Form(key="polynomial-2", model=POLYNOMIAL, coefficients=("constant", "linear", "quadratic")),
    Form(
        key="polynomial-3",
        model=POLYNOMIAL,
        coefficients=("constant", "linear", "quadratic", "cubic"),
    ),
)


def powers(reduced: Array, size: int) -> Array:
    """Powers 0 to size - 1 along a new last axis."""
    return reduced[..., None] ** np.arange(size)


def slopes(reduced: Array, coefficients: Array) -> Array:
    """Derivative of the polynomial; coefficients: shape (..., size)."""
    order = np.arange(1, coefficients.shape[-1])
    turned = powers(reduced, order.size) * (order * coefficients[..., 1:])[..., None, :]
    return turned.sum(axis=-1)


def expansion(centre: float, span: float, size: int) -> Array:
    """Matrix from coefficients in (g - centre) / span to coefficients in g, shape (size, size)."""
    return np.array([
        [comb(j, k) * (-centre) ** (j - k) / span**j if j >= k else 0.0 for j in range(size)]
        for k in range(size)
    ])  # fmt: skip
