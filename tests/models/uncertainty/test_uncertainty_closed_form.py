"""Intervals in closed form: a ratio, whose ends may not exist, and a monotone function."""

import numpy as np
from numpy.testing import assert_allclose, assert_array_equal
from scipy.stats import norm

from models.uncertainty.distributions import Normal
from models.uncertainty.draws import Draws
from models.uncertainty.monte_carlo import simulate
from models.uncertainty.quantiles.closed_form import Reason, monotone_interval, ratio_interval


def test_ratio_agrees_with_draws_where_it_is_bounded():
    n, d = np.array([4.0, -4.0, 0.1]), np.array([3.9, 12.0, -7.0])
    found = ratio_interval(n, 0.4, d, 0.7, covariance=0.1)
    drawn = simulate(
        lambda n, d: n / d,
        {"n": Normal(n, 0.4), "d": Normal(d, 0.7)},
        correlation=np.array([[1.0, 0.1 / 0.28], [0.1 / 0.28, 1.0]]),
        draws=Draws(2**16),
    )
    half = 0.5 * (drawn.upper - drawn.lower)
    assert (found.reason == Reason.NONE).all()
    assert (np.abs(found.lower - drawn.lower) < 0.01 * half).all()
    assert (np.abs(found.upper - drawn.upper) < 0.01 * half).all()


def test_both_ends_of_a_ratio_are_told_from_zero_by_exactly_z():
    """Fieller (1954), by its definition: |n - r d| = z u(n - r d) at each end."""
    found = ratio_interval(2.0, 0.3, 1.5, 0.2, covariance=-0.02)
    for r in (found.lower, found.upper):
        u = np.sqrt(0.3**2 + r**2 * 0.2**2 + 2 * r * 0.02)
        assert_allclose(np.abs(2.0 - r * 1.5), norm.ppf(0.975) * u, rtol=1e-12)


def test_an_unbounded_end_is_no_number_with_its_reason():
    z = norm.ppf(0.975)
    found = ratio_interval(
        np.array([5.0, -5.0, 0.1, np.nan, 5.0, 5.0]), 0.3,
        np.array([1.0, 1.0, 0.1, 1.0, z * 0.6, 0.0]), 0.6,
    )  # fmt: skip
    assert list(found.reason) == [
        Reason.UNBOUNDED_ABOVE, Reason.UNBOUNDED_BELOW, Reason.UNBOUNDED,
        Reason.NO_NUMBER, Reason.UNBOUNDED_ABOVE, Reason.UNBOUNDED,
    ]  # fmt: skip
    assert_array_equal(np.isnan(found.lower), [False, True, True, True, False, True])
    assert_array_equal(np.isnan(found.upper), [True, False, True, True, True, True])
    assert 0 < found.lower[0] < 5.0
    assert_allclose(found.upper[1], -found.lower[0])


def test_an_exact_denominator_only_scales():
    found = ratio_interval(3.0, 0.2, -2.0, 0.0)
    reach = norm.ppf(0.975) * 0.2
    assert_allclose([found.lower, found.upper], [-(3 + reach) / 2, -(3 - reach) / 2])


def test_monotone_map_refuses_a_turn():
    found = monotone_interval(lambda x: x * x, Normal(np.array([0.0, 9.0, np.nan]), 1.0))
    assert list(found.reason) == [Reason.NOT_MONOTONE, Reason.NONE, Reason.NO_NUMBER]
    assert np.isnan(found.upper[0])
