"""What lies between an analyser and a reference plane: three complex terms of one port.

rho = e00 + e10e01 G / (1 - e11 G): reflection rho as read, G at the plane. Any three known
reflections settle it; more of them over-determine it.
"""

from dataclasses import dataclass

import numpy as np

from models.relation import Array, ComplexArray

PASSES = 2
"""Gauss-Newton steps from the weighted linear solution; each adds digits."""


@dataclass(frozen=True, slots=True)
class ErrorTerms:
    """One column each, shape (f,)."""

    directivity: ComplexArray
    """e00"""
    source_match: ComplexArray
    """e11"""
    tracking: ComplexArray
    """e10e01"""

    @np.errstate(all="ignore")
    def corrected(self, read: ComplexArray) -> ComplexArray:
        """Reflection at the plane of one that was read, shape (..., f)."""
        away = read - self.directivity
        return away / (self.tracking + self.source_match * away)

    @np.errstate(all="ignore")
    def read(self, true: ComplexArray) -> ComplexArray:
        """Reflection that is read when the one at the plane is ``true``, shape (..., f)."""
        return self.directivity + self.tracking * true / (1 - self.source_match * true)

    @np.errstate(all="ignore")
    def gradient(self, true: ComplexArray) -> ComplexArray:
        """Derivative of what is read by e00, e11 and e10e01 - e00 e11, shape (..., f, 3)."""
        inverse = 1 / (1 - self.source_match * true)
        return np.stack([inverse, self.read(true) * true * inverse, true * inverse], axis=-1)

    @np.errstate(all="ignore")
    def slope(self, true: ComplexArray) -> ComplexArray:
        """Derivative of what is read by the reflection at the plane, shape (..., f)."""
        return self.tracking / (1 - self.source_match * true) ** 2


@dataclass(frozen=True, slots=True)
class Fit:
    """Error terms from standards, and how they answer to what was read."""

    terms: ErrorTerms
    residual: ComplexArray
    """Read minus fitted, shape (n, f); zero where three standards settle three terms."""
    response: ComplexArray
    """Change of (e00, e11, e10e01 - e00 e11) with what was read, shape (f, 3, n)."""


@np.errstate(all="ignore")
def fit(read: ComplexArray, true: ComplexArray, spread: Array) -> Fit:
    """Error terms by least squares, weighted by the standard uncertainty of what was read.

    read, true: reflections of n >= 3 standards as read and at the plane, shape (n, f).
    spread: standard uncertainty of each part of what was read, shape (n, f), relative to one
        another where they are not known.
    NaN where a standard has no number or two of them are one.
    """
    usable = np.isfinite(read).all(axis=0) & np.isfinite(true).all(axis=0)
    usable = np.atleast_1d(usable & (np.isfinite(spread) & (spread > 0)).all(axis=0))
    rho, gamma = (np.where(usable, column, 0.0) for column in (read, true))
    weight = np.where(usable, 1 / spread, 0.0).T[:, :, None]
    rows = np.stack([np.ones_like(rho), rho * gamma, gamma], axis=-1).swapaxes(0, 1)
    solution = (_pseudo_inverse(rows * weight) @ (rho.T[:, :, None] * weight))[..., 0]
    inverse = np.zeros((rho.shape[1], 3, rho.shape[0]), dtype=complex)
    for _ in range(PASSES):
        terms = _terms(solution)
        rows = terms.gradient(gamma).swapaxes(0, 1) * weight
        inverse = _pseudo_inverse(np.where(np.isfinite(rows), rows, 0.0))
        away = (rho - terms.read(gamma)).T[:, :, None] * weight
        solution = solution + (inverse @ np.where(np.isfinite(away), away, 0.0))[..., 0]
    solution = np.where(usable[:, None], solution, np.nan)
    terms = _terms(solution)
    return Fit(terms, read - terms.read(true), inverse * weight.swapaxes(1, 2))


def _terms(solution: ComplexArray) -> ErrorTerms:
    directivity, match, mixed = np.moveaxis(solution, -1, 0)
    return ErrorTerms(directivity, match, mixed + directivity * match)


def _pseudo_inverse(rows: ComplexArray) -> ComplexArray:
    """(A^H A)^-1 A^H of every matrix, shape (f, n, 3) to (f, 3, n), by QR; NaN where singular."""
    q, r = np.linalg.qr(rows)
    diagonal = np.abs(np.diagonal(r, axis1=-2, axis2=-1))
    singular = np.asarray(diagonal.min(axis=-1) <= 1e-13 * diagonal.max(axis=-1))
    r = np.where(singular[:, None, None], np.eye(3), r)
    inverse: ComplexArray = np.linalg.solve(r, np.conj(np.swapaxes(q, -1, -2)))
    return np.where(singular[:, None, None], np.nan, inverse)
