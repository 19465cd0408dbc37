"""Damped least squares with derivatives, and what is known of the numbers beforehand."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from models.relation import Array

MOST = 60
"""Steps."""
CLOSE = 1e-3
"""Change of the sum of squares that moves no value by more than a thirtieth of its uncertainty."""
EASIER, HARDER = 1 / 5, 4.0


@dataclass(frozen=True, slots=True, eq=False)
class Fit:
    """Where the sum of squares is least."""

    values: Array
    jacobian: Array
    """Of the residuals, at the values: shape (residuals, values)."""
    residuals: Array
    cost: float
    """Sum of squares, what was known beforehand included."""
    converged: bool

    def covariance(self, known: Array) -> Array:
        """Inverse of the normal matrix; known: 1 / u of each value beforehand, 0 where nothing."""
        normal = self.jacobian.T @ self.jacobian + np.diag(np.square(known))
        return np.linalg.pinv(normal, hermitian=True)


Model = Callable[[Array], tuple[Array, Array]]
"""Residuals, in units of their standard uncertainty, and their jacobian."""


@np.errstate(all="ignore")
def least_squares(model: Model, start: Array, expected: Array, known: Array) -> Fit:
    """Minimise sum residual^2 + sum (known (value - expected))^2.

    known: 1 / standard uncertainty of each value before the data, 0 where nothing is known.

    Levenberg (1944) and Marquardt (1963): the diagonal is what the step is damped by. A step that
    makes it worse, or leads where the model has no number, is taken back.
    """
    values = start.copy()
    residuals, jacobian = model(values)
    cost = _cost(residuals, values, expected, known)
    damping, converged = 1e-3, False
    for _ in range(MOST):
        normal = jacobian.T @ jacobian
        normal.flat[:: values.size + 1] += np.square(known)
        slope = jacobian.T @ residuals + np.square(known) * (values - expected)
        damped = normal.copy()
        damped.flat[:: values.size + 1] *= 1 + damping
        damped.flat[:: values.size + 1] += 1e-12 * np.max(np.diagonal(normal))
        try:
            step = np.linalg.solve(damped, slope)
        except np.linalg.LinAlgError:
            break  # nothing moves the residuals: here is as good as anywhere
        there = values - np.clip(step, -1.0, 1.0)
        new_residuals, new_jacobian = model(there)
        new_cost = _cost(new_residuals, there, expected, known)
        if not new_cost <= cost:
            damping *= HARDER
            if damping > 1e9:
                break
            continue
        gain = cost - new_cost
        values, residuals, jacobian, cost = there, new_residuals, new_jacobian, new_cost
        damping = max(damping * EASIER, 1e-9)
        if gain <= CLOSE:
            converged = True
            break
    return Fit(values, jacobian, residuals, cost, converged)


def _cost(residuals: Array, values: Array, expected: Array, known: Array) -> float:
    cost = residuals @ residuals + np.sum(np.square(known * (values - expected)))
    return float(cost) if np.isfinite(cost) else np.inf
