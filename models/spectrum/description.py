"""What a fit says in numbers: every parameter with its band, what follows, and which terms hold."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, ComplexArray, column
from models.spectrum.fit import Fit
from models.spectrum.form import Slot, evaluate
from models.uncertainty.coverage import coverage_factor, shortest_interval
from models.uncertainty.first_order import expanded_factor

WIDEST = 40.0
"""Of a logarithm: e^40 either way is no number any more."""


@dataclass(frozen=True, slots=True)
class Banded:
    """A quantity with its standard uncertainty and coverage interval, SI."""

    name: str
    value: float
    standard_uncertainty: float
    lower: float
    upper: float
    term: int | None = None


@dataclass(frozen=True, slots=True)
class Curve:
    """The fitted spectrum with the band of each part; shape (n,) each."""

    frequency: Array
    real: Array
    real_u: Array
    loss: Array
    loss_u: Array
    factor: float
    """Half-width of the bands in standard uncertainties."""


def factor_of(fit: Fit, probability: float) -> float:
    """Half-width of a coverage interval: Student's where the residuals told the noise."""
    if fit.noise_shape is None and not fit.misfit:
        return coverage_factor(probability)
    return float(expanded_factor(probability, fit.degrees_of_freedom))


def parameters(fit: Fit, probability: float) -> tuple[Banded, ...]:
    """Every parameter of the form, and the static permittivity; SI.

    Bands of what is fitted as a logarithm are even on that scale; others are restricted to what
    is physically possible.
    """
    found = [
        _banded(slot, value, u, factor_of(fit, probability), probability)
        for slot, value, u in zip(fit.form.slots, fit.vector, widths(fit), strict=True)
    ]
    return (*found, _static(fit, probability))


def curve(fit: Fit, probability: float, frequency: Array | None = None) -> Curve:
    """The fitted permittivity at any frequencies, with what its parameters leave open."""
    f = fit.spectrum.frequency if frequency is None else frequency
    value, slopes = evaluate(fit.form, fit.vector, f)
    real_u, loss_u = spread(fit, slopes)
    real = np.ascontiguousarray(value.real)
    return Curve(f, real, real_u, -value.imag, loss_u, factor_of(fit, probability))


def spread(fit: Fit, slopes: ComplexArray) -> tuple[Array, Array]:
    """Standard uncertainty of real and imaginary part of what has these derivatives.

    slopes: by the parameters, shape (n, parameters).
    """
    real, imag = (
        np.sqrt(np.einsum("ij,jk,ik->i", part, fit.covariance, part).clip(0.0))
        for part in (slopes.real, slopes.imag)
    )
    return real, imag


def widths(fit: Fit) -> Array:
    """Standard uncertainties of the vector of a fit."""
    return np.sqrt(np.diagonal(fit.covariance).clip(0.0))


def _banded(slot: Slot, value: float, u: float, factor: float, probability: float) -> Banded:
    if slot.logarithmic:
        reach = min(factor * u, WIDEST)
        size = float(np.exp(value))
        return Banded(
            slot.name, size, size * min(u, np.exp(WIDEST)),
            size * float(np.exp(-reach)), size * float(np.exp(reach)), slot.term,
        )  # fmt: skip
    lower, upper = restricted(
        value, u * factor / coverage_factor(probability), slot.low, slot.high, probability
    )
    return Banded(slot.name, float(value), float(u), lower, upper, slot.term)


def restricted(
    value: ArrayLike, u: ArrayLike, low: float, high: float, probability: float
) -> tuple[float, float]:
    """Shortest interval of one number that lies in a range."""
    centre, width = np.atleast_1d(column(value)), np.atleast_1d(column(u))
    found = shortest_interval(centre, width, width, low=low, high=high, probability=probability)
    return float(found.lower[0]), float(found.upper[0])


def _static(fit: Fit, probability: float) -> Banded:
    """eps_inf and every strength together: the permittivity below all relaxations."""
    slots, values = fit.form.slots, fit.form.values(fit.vector)
    slopes = np.array([
        1.0 if slot.name == "infinite_permittivity"
        else value if slot.name == "relaxation_strength" else 0.0
        for slot, value in zip(slots, values, strict=True)
    ])  # fmt: skip
    total = float(slopes[0] * values[0] + np.sum(slopes[1:]))
    u = float(np.sqrt(max(slopes @ fit.covariance @ slopes, 0.0)))
    factor = factor_of(fit, probability)
    lower, upper = restricted(
        total, u * factor / coverage_factor(probability), 1.0, np.inf, probability
    )
    return Banded("static_permittivity", total, u, lower, upper)
