"""Least squares of a complex model to complex data, both parts weighted, with its covariance."""

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import least_squares

from models.relation import Array, ComplexArray

Model = Callable[[Array], tuple[ComplexArray, ComplexArray]]
"""Values, shape (n,), and their derivatives by the parameters, shape (n, parameters)."""

EVALUATIONS = 200
SINGULAR = 1e-12
"""Singular values below this share of the largest count as that: nothing is known there."""
STRAY = 1e9
"""What a residual counts where the model has no value."""


def complex_least_squares(
    model: Model,
    start: Array,
    bounds: tuple[Array, Array],
    data: ComplexArray,
    noise: Array,
    tolerance: float,
) -> tuple[Array, float]:
    """The best parameters within ``bounds``, and half the sum of squared residuals there.

    data: shape (n,). noise: standard uncertainties of real and imaginary part, shape (2, n).
    tolerance: relative change at which the search ends.
    """
    low, high = bounds
    margin = 1e-9 * np.minimum(high - low, 1.0)
    inside = np.clip(start, low + margin, high - margin)

    def residuals(vector: Array) -> Array:
        off = model(vector)[0] - data
        return np.nan_to_num(np.concatenate([off.real / noise[0], off.imag / noise[1]]), nan=STRAY)

    def derivatives(vector: Array) -> Array:
        return np.nan_to_num(stacked(model(vector)[1], noise))

    answer = least_squares(
        residuals, inside, jac=derivatives, bounds=bounds, x_scale="jac",
        ftol=tolerance, xtol=tolerance, gtol=tolerance, max_nfev=EVALUATIONS,
    )  # fmt: skip
    return np.asarray(answer.x), float(answer.cost)


def stacked(derivatives: ComplexArray, noise: Array) -> Array:
    """Derivatives of the residuals, real parts above imaginary ones; shape (2 n, parameters)."""
    parts = [derivatives.real / noise[0][:, None], derivatives.imag / noise[1][:, None]]
    return np.concatenate(parts)


def covariance(derivatives: ComplexArray, noise: Array, free: NDArray[np.intp]) -> Array:
    """Of the parameters for a noise of that size; 0 for those that are not ``free``.

    derivatives: shape (n, parameters). noise: shape (2, n). free: indices.
    """
    slopes = stacked(derivatives, noise)[:, free]
    scales = np.linalg.norm(slopes, axis=0)
    scales = np.where(scales > 0, scales, np.finfo(float).tiny ** 0.5)
    _, sizes, turned = np.linalg.svd(slopes / scales, full_matrices=False)
    sizes = np.maximum(sizes, sizes.max(initial=SINGULAR) * SINGULAR)
    root = turned.T / sizes / scales[:, None]
    spread = np.zeros((derivatives.shape[1],) * 2)
    spread[np.ix_(free, free)] = root @ root.T
    return spread
