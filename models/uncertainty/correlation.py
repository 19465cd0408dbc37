"""Correlation and covariance matrices: what makes one, and its triangular factor.

A matrix with a negative eigenvalue is of no random quantities at all (JCGM 102, 3.11): some linear
combination would have a negative variance. Coefficients typed in with two digits can do that.
"""

import numpy as np
from numpy.typing import ArrayLike

from models.errors import Complaint, ParameterError
from models.relation import Array, column

ROUNDING = 1e-12
"""How far below zero rounding may take an eigenvalue, relative to the largest."""


def correlation_matrix(given: ArrayLike, size: int) -> Array:
    """The correlation matrix of ``size`` inputs, checked.

    given: shape (size, size).
    Raises ParameterError when it is not symmetric with a unit diagonal and coefficients within
    -1 to 1, or has a negative eigenvalue, which the message names.
    """
    matrix = _square(given, size)
    if matrix.ndim != 2:
        raise _refused("is one matrix for all rows")
    if not np.allclose(np.diagonal(matrix), 1.0, rtol=0.0, atol=ROUNDING):
        raise _refused("has 1 all along its diagonal")
    return matrix


def covariance_matrix(given: ArrayLike, size: int) -> Array:
    """The covariance matrix of ``size`` inputs, checked.

    given: shape (size, size), or (n, size, size): one per row.
    Raises ParameterError when one is not symmetric or has a negative eigenvalue.
    """
    return _square(given, size)


def covariance_from(standard_uncertainties: ArrayLike, correlation: ArrayLike) -> Array:
    """Covariance from standard uncertainties, shape (size,) or (n, size), and a correlation matrix.

    Raises ParameterError as ``correlation_matrix`` does, and for a negative or NaN uncertainty.
    """
    u = column(standard_uncertainties)
    if not np.all(u >= 0):
        raise _refused("needs standard uncertainties of at least 0")
    return u[..., :, None] * correlation_matrix(correlation, u.shape[-1]) * u[..., None, :]


def triangular(matrix: Array) -> Array:
    """The lower triangular L with L L' = matrix, also where the matrix has no full rank.

    Cholesky's algorithm divides by a pivot that is 0 where one input is fixed by the others; the
    triangle of an orthogonal decomposition of the matrix root does not.
    """
    values, vectors = np.linalg.eigh(matrix)
    noise = len(values) * np.finfo(np.float64).eps * values[-1]
    root = vectors * np.sqrt(np.where(values > noise, values, 0.0))
    _, upper = np.linalg.qr(root.T)
    return column(np.tril((upper * np.where(np.diagonal(upper) < 0, -1.0, 1.0)[:, None]).T))


def _square(given: ArrayLike, size: int) -> Array:
    matrix = column(given)
    if matrix.ndim not in {2, 3} or matrix.shape[-2:] != (size, size):
        raise _refused(f"has {size} rows and {size} columns, found shape {matrix.shape}")
    if not np.isfinite(matrix).all():
        raise _refused("holds finite numbers")
    if not np.allclose(matrix, np.swapaxes(matrix, -1, -2), rtol=ROUNDING, atol=0.0):
        raise _refused("is symmetric")
    eigenvalues = np.linalg.eigvalsh(matrix)
    lowest, scale = eigenvalues[..., 0], np.abs(eigenvalues).max(axis=-1)
    if np.any(lowest < -ROUNDING * scale):
        raise _refused(f"has no negative eigenvalue, found {np.min(lowest):.3g}")
    return matrix


def _refused(detail: str) -> ParameterError:
    return ParameterError("uncertainty", [Complaint("correlation", f"the matrix {detail}")])
