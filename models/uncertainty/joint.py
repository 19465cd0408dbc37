"""JCGM 102: several outputs and correlated inputs, by the law of propagation of uncertainty.

Complex quantities are pairs of real ones with a covariance of two by two. Magnitude and phase of
a small reflection are then two outputs like any others; where its uncertainty is as large as the
reflection they are far from normal, and only draws describe them (JCGM 102, 9.3).
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, column
from models.uncertainty.correlation import covariance_matrix

STEP = 1e-3
"""Of differences, in standard uncertainties,"""
LEAST = 7e-4
"""but at least this share of the value, below which rounding outweighs the curvature."""


@dataclass(frozen=True, slots=True)
class Joint:
    """Outputs of a measurand and what is known of them together.

    value: shape (n, p); covariance: (n, p, p); sensitivity: (n, p, k), the derivatives.
    """

    value: Array
    covariance: Array
    sensitivity: Array

    @property
    def standard_uncertainty(self) -> Array:
        """Shape (n, p)."""
        return np.sqrt(np.diagonal(self.covariance, axis1=-2, axis2=-1))

    @property
    def correlation(self) -> Array:
        """Shape (n, p, p); NaN beside an exact output."""
        u = self.standard_uncertainty
        with np.errstate(invalid="ignore", divide="ignore"):
            return self.covariance / (u[:, :, None] * u[:, None, :])


def propagate_jointly(
    measurand: Callable[..., Any], at: Mapping[str, ArrayLike], covariance: ArrayLike
) -> Joint:
    """Covariance of all outputs of ``measurand(**at)``, elementwise along the rows.

    measurand: returns one column or a sequence of them; a complex one counts as two outputs, its
        real and its imaginary part.
    at: scalars or shape (n,). covariance: of the inputs in that order, shape (k, k) or (n, k, k).
    Raises ParameterError when the covariance is none.

    Derivatives are five-point differences, good to ten digits or more; unlike ``propagate`` they
    look no further than the value's neighbourhood, as the published law demands.
    """
    spread = covariance_matrix(covariance, len(at))
    rows = np.broadcast_shapes((1,), spread.shape[:-2], *(np.shape(given) for given in at.values()))
    columns = {name: np.broadcast_to(column(given), rows) for name, given in at.items()}
    with np.errstate(all="ignore"):
        value = outputs_of(measurand(**columns))
        slopes = []
        for j, (name, given) in enumerate(columns.items()):
            u = np.sqrt(spread[..., j, j])
            step = np.minimum(np.maximum(STEP * u, LEAST * np.abs(given)), u)
            around = (given + times * step for times in (1, -1, 2, -2))
            found = [outputs_of(measurand(**{**columns, name: x})) for x in around]
            width = np.where(step > 0, 12.0 * step, np.inf)
            slopes.append(
                [(8.0 * (a - b) - (c - d)) / width for a, b, c, d in zip(*found, strict=True)]
            )
    sensitivity = np.stack([np.stack(each, axis=-1) for each in zip(*slopes, strict=True)], axis=-2)
    return Joint(
        np.stack(np.broadcast_arrays(*value), axis=-1),
        sensitivity @ spread @ np.swapaxes(sensitivity, -1, -2),
        sensitivity,
    )


def outputs_of(result: Any) -> list[Array]:
    """What a measurand returned, as real columns; a complex column is two of them."""
    columns = result if isinstance(result, tuple | list) else (result,)
    outputs: list[Array] = []
    for one in columns:
        if np.iscomplexobj(one):
            outputs.extend((np.real(one), np.imag(one)))
        else:
            outputs.append(column(one))
    return outputs
