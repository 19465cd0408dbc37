"""Correlation matrices: what is refused, and the factor that draws and gradients are turned by."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.errors import ParameterError
from models.uncertainty.correlation import (
    correlation_matrix,
    covariance_from,
    covariance_matrix,
    triangular,
)


def test_names_the_negative_eigenvalue():
    """Eigenvalues of a matrix with -0.9 everywhere beside its diagonal: 1.9, 1.9 and -0.8."""
    impossible = np.full((3, 3), -0.9) + 1.9 * np.eye(3)
    with pytest.raises(ParameterError, match=r"negative eigenvalue, found -0\.8"):
        correlation_matrix(impossible, 3)


@pytest.mark.parametrize(
    ("matrix", "why"),
    [
        ([[1.0, 0.2], [0.3, 1.0]], "symmetric"),
        ([[1.0, 0.2], [0.2, 0.9]], "diagonal"),
        ([[1.0, np.nan], [np.nan, 1.0]], "finite"),
        ([[1.0, 1.2], [1.2, 1.0]], "eigenvalue"),
        ([[1.0]], "2 rows and 2 columns"),
        ([[[1.0, 0.0], [0.0, 1.0]]], "one matrix"),
    ],
)
def test_refuses_what_is_no_correlation_matrix(matrix, why):
    with pytest.raises(ParameterError, match=why):
        correlation_matrix(matrix, 2)


@pytest.mark.parametrize("rank", [1, 2, 3, 5])
def test_factor_is_triangular_and_gives_the_matrix_back_at_any_rank(rank):
    root = np.random.default_rng(rank).standard_normal((5, rank))
    covariance = root @ root.T
    u = np.sqrt(np.diag(covariance))
    matrix = covariance / np.outer(u, u)
    factor = triangular(correlation_matrix(matrix, 5))
    assert_allclose(factor @ factor.T, matrix, atol=1e-14)
    assert_allclose(factor, np.tril(factor), atol=0)


def test_factor_of_a_full_matrix_is_that_of_cholesky():
    """Oracle: numpy.linalg.cholesky."""
    matrix = np.array([[1.0, -0.3, 0.8], [-0.3, 1.0, -0.6], [0.8, -0.6, 1.0]])
    assert_allclose(triangular(matrix), np.linalg.cholesky(matrix), atol=1e-14)


def test_fully_correlated_inputs_share_one_variable():
    factor = triangular(correlation_matrix(np.ones((3, 3)), 3))
    assert_allclose(factor, [[1, 0, 0], [1, 0, 0], [1, 0, 0]], atol=1e-14)


def test_covariance_may_differ_from_row_to_row():
    found = covariance_from([[1.0, 2.0], [3.0, 0.5]], [[1.0, 0.5], [0.5, 1.0]])
    assert_allclose(found, [[[1, 1], [1, 4]], [[9, 0.75], [0.75, 0.25]]])
    assert covariance_matrix(found, 2).shape == (2, 2, 2)
    broken = found * np.array([[1.0, 3.0], [3.0, 1.0]])
    with pytest.raises(ParameterError, match="eigenvalue"):
        covariance_matrix(broken, 2)


@pytest.mark.parametrize("u", [-1.0, np.nan])
def test_refuses_negative_uncertainties(u):
    with pytest.raises(ParameterError, match="at least 0"):
        covariance_from([1.0, u], np.eye(2))
