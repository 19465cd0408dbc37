"""York, Evensen, Martinez and De Basabe (2004): least squares with errors in both variables.

Generic in form by linearisation: for a straight line it is their solution, adjusted points and
covariance included; for a curve the orthogonal distance fit of Gauss and Newton, the adjusted
permittivities eliminated point by point. Without uncertainties it is ordinary least squares.
The printed examples it is held to were read in secondary copies.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.calibration.forms import Form, expansion, powers, slopes
from models.relation import Array, column

MOST = 200
"""Steps."""
CLOSE = 1e-11
"""Change of coefficients and of adjusted permittivities, over the largest, that is none: weights
that are all alike leave the coefficients of the first step where they were."""
SINGULAR = 1e-11
"""Determinant of a normal matrix with a diagonal of ones, below which it has no inverse."""
LEAST = 1e-3
"""Adjusted permittivities are kept above on the way, where a root would have no derivative."""


@dataclass(frozen=True, slots=True, eq=False)
class Fit:
    """A curve through pairs; leading axes are fits of the same pairs with other weights."""

    form: Form
    centre: float
    span: float
    reduced: Array
    """Coefficients in (variable - centre) / span, shape (..., size)."""
    reduced_covariance: Array
    """Shape (..., size, size); of the stated uncertainties, or for unit variance."""
    weights: Array
    """One over the variance of each residual, shape (..., n); 0 where the pair was left out."""
    slope: Array
    """Of the curve at each adjusted pair, shape (..., n)."""
    design: Array
    """Shape (..., n, size), at the adjusted pairs."""
    residuals: Array
    """Of the water content, along the curve's slope, shape (..., n)."""
    adjusted: Array
    """Permittivities of the adjusted pairs, shape (..., n)."""
    converged: NDArray[np.bool_]

    @property
    def coefficients(self) -> Array:
        """In permittivity or its root, as the mixing model takes them; shape (..., size)."""
        return self.reduced @ self._plain().T

    def plain(self, reduced_covariance: Array) -> Array:
        """A covariance of the reduced coefficients as one of the plain ones."""
        turn = self._plain()
        return turn @ reduced_covariance @ turn.T

    @property
    def chi_square(self) -> Array:
        """Weighted sum of squares of what the curve leaves."""
        return np.sum(self.weights * np.square(self.residuals), axis=-1)

    def basis(self, permittivity: Array) -> Array:
        """Powers at permittivities, shape (m, size)."""
        return powers(self._reduce(permittivity), self.form.size)

    def value(self, permittivity: Array) -> Array:
        """Water content at permittivities, shape (..., m)."""
        return self.reduced @ self.basis(permittivity).T

    def slope_at(self, permittivity: Array) -> Array:
        """Change of water content with permittivity, shape (..., m)."""
        steep = slopes(self._reduce(permittivity), self.reduced)
        return steep * self.form.rate(permittivity) / self.span

    def moved_by(self, water_content: Array, permittivity: Array) -> Array:
        """Reduced coefficients' change where all pairs move, shape (size,).

        water_content, permittivity: by how much each pair does, shape (n,).
        """
        moved = self.weights * (water_content - self.slope * permittivity)
        return self.reduced_covariance @ (self.design.T @ moved)

    def _reduce(self, permittivity: Array) -> Array:
        return (self.form.variable(permittivity) - self.centre) / self.span

    def _plain(self) -> Array:
        return expansion(self.centre, self.span, self.form.size)


@np.errstate(all="ignore")
def fit(
    form: Form,
    permittivity: Array,
    water_content: Array,
    permittivity_u: Array,
    water_content_u: Array,
    kept: Array | None = None,
) -> Fit:
    """The curve that is nearest to the pairs, in units of their uncertainties.

    permittivity, water_content and their standard uncertainties: shape (n,); all uncertainties 0:
    every pair has the same variance, which is left open.
    kept: shape (..., n), 1 or 0 where a pair is left out; None: all are kept.

    Where pairs are too few, or too much alike, there is NaN.
    """
    x, y = column(permittivity), column(water_content)
    variance_x, variance_y = np.square(permittivity_u), np.square(water_content_u)
    if not (variance_x.any() or variance_y.any()):
        variance_y = np.ones_like(y)
    kept = np.ones_like(x) if kept is None else column(kept)
    variable = form.variable(x)
    centre = float(0.5 * (variable.max() + variable.min()))
    span = float(0.5 * (variable.max() - variable.min())) or 1.0

    def of(points: Array) -> Array:
        return (form.variable(points) - centre) / span

    adjusted = np.broadcast_to(x, kept.shape).copy()
    level = np.where(variance_y > 0, variance_y, np.mean(variance_y) or 1.0)
    reduced, _, _ = _solve(powers(of(adjusted), form.size), kept / level, y)
    for _ in range(MOST):
        before = reduced
        slope = slopes(of(adjusted), before) * form.rate(adjusted) / span
        weights = kept / (variance_y + np.square(slope) * variance_x)
        away = x - adjusted
        reduced, covariance, design = _solve(
            powers(of(adjusted), form.size), weights, y - slope * away
        )
        left = y - slope * away - (design @ reduced[..., None])[..., 0]
        step = variance_x * slope * left / (variance_y + np.square(slope) * variance_x)
        there = np.maximum(x + step, LEAST if form.in_root else -np.inf)
        moved = np.abs(there - adjusted).max(axis=-1)
        adjusted = there
        change = np.abs(reduced - before).max(axis=-1)
        still = (change > CLOSE * np.abs(reduced).max(axis=-1)) | (moved > CLOSE * x.max())
        converged = ~still
        if converged.all():
            break
    return Fit(form, centre, span, reduced, covariance, weights, slope, design, left, adjusted,
               converged)  # fmt: skip


def _solve(design: Array, weights: Array, y: Array) -> tuple[Array, Array, Array]:
    """Weighted least squares, NaN where the normal matrix has no inverse."""
    turned = np.swapaxes(design, -1, -2) * weights[..., None, :]
    normal = turned @ design
    scale = np.sqrt(np.einsum("...ii->...i", normal))
    scale = np.where(scale > 0, scale, 1.0)
    alike = normal / (scale[..., None] * scale[..., None, :])
    sound = np.isfinite(alike).all(axis=(-1, -2))
    alike = np.where(sound[..., None, None], alike, np.eye(alike.shape[-1]))
    sound &= np.linalg.det(alike) > SINGULAR
    alike = np.where(sound[..., None, None], alike, np.eye(alike.shape[-1]))
    inverse = np.linalg.inv(alike) / (scale[..., None] * scale[..., None, :])
    inverse = np.where(sound[..., None, None], inverse, np.nan)
    return (inverse @ (turned @ y[..., None]))[..., 0], inverse, design
