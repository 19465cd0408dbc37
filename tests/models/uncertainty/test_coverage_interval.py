"""The shortest interval of a two-piece normal in a range: laws, and coverage by simulation."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose
from scipy.integrate import quad
from scipy.stats import norm, truncnorm

from models.uncertainty.coverage import coverage_factor, shortest_interval, two_piece


def interval(value, below, above=None, low=0.0, high=0.46, probability=0.95):
    value = np.atleast_1d(np.asarray(value, dtype=float))
    below = np.broadcast_to(below, value.shape).astype(float)
    above = below if above is None else np.broadcast_to(above, value.shape).astype(float)
    return shortest_interval(value, below, above, low=low, high=high, probability=probability)


def test_coverage_factor_is_that_of_the_normal_table():
    """1.96 at 95 % and 2.58 at 99 %: JCGM 100, table G.1."""
    assert coverage_factor(0.95) == pytest.approx(1.960, abs=5e-4)
    assert coverage_factor(0.99) == pytest.approx(2.576, abs=5e-4)


def test_far_from_both_ends_it_is_value_minus_and_plus_k_u():
    found = interval(0.23, 0.02)
    assert_allclose(found.lower, 0.23 - norm.ppf(0.975) * 0.02, rtol=1e-12)
    assert_allclose(found.upper, 0.23 + norm.ppf(0.975) * 0.02, rtol=1e-12)


@pytest.mark.parametrize("value", [-0.03, 0.0, 0.004, 0.03, 0.42, 0.45, 0.46, 0.49])
def test_holds_the_stated_probability_of_the_truncated_normal(value):
    """Oracle: scipy.stats.truncnorm."""
    found = interval(value, 0.02)
    known = truncnorm((0.0 - value) / 0.02, (0.46 - value) / 0.02, loc=value, scale=0.02)
    held = known.cdf(found.upper[0]) - known.cdf(found.lower[0])
    assert held == pytest.approx(0.95, abs=1e-9)
    assert known.pdf(found.lower[0]) == pytest.approx(known.pdf(found.upper[0])) or (
        found.lower[0] == 0.0 or found.upper[0] == 0.46
    )


@given(
    value=st.floats(-0.05, 0.55),
    below=st.floats(1e-6, 0.3),
    above=st.floats(1e-6, 0.3),
    probability=st.floats(0.5, 0.999),
)
def test_lies_in_the_range_and_holds_the_most_probable_value(value, below, above, probability):
    found = interval(value, below, above, probability=probability)
    assert 0.0 <= found.lower[0] <= found.peak[0] <= found.upper[0] <= 0.46


def test_reaches_further_to_the_side_of_the_larger_scale():
    found = interval(0.23, 0.06, 0.02, low=-10.0, high=10.0)
    assert 0.23 - found.lower[0] == pytest.approx(3 * (found.upper[0] - 0.23))


def test_no_number_gives_no_interval():
    found = interval([np.nan, 0.2], 0.02)
    assert np.isnan([found.lower[0], found.upper[0], found.peak[0]]).all()
    assert np.isfinite(found.lower[1])


def test_an_exact_value_is_its_own_interval():
    found = interval([0.2, -0.1], 0.0)
    assert_allclose(found.lower, [0.2, 0.0])
    assert_allclose(found.upper, [0.2, 0.0])


@pytest.mark.parametrize("truth", [0.0, 0.005, 0.02, 0.2, 0.44, 0.46])
def test_covers_the_truth_near_dry_and_near_saturated_too(truth):
    draws = truth + 0.02 * np.random.default_rng(3).standard_normal(100_000)
    found = interval(draws, 0.02)
    assert 0.94 < np.mean((found.lower <= truth) & (truth <= found.upper)) < 0.98


@pytest.mark.parametrize(("below", "above"), [
    (0.1, 0.1), (0.3, 0.1), (0.02, 0.4), (0.0, 0.2), (0.2, 0.0),
])  # fmt: skip
def test_a_two_piece_normal_has_the_distribution_of_its_density(below, above):
    """Its density is that of two halves of equal height, integrated by scipy."""
    z = np.linspace(-3.0, 3.0, 13)
    at = two_piece(z, below, above)
    whole = np.sqrt(np.pi / 2.0) * (below + above)

    def density(x):
        scale = below if x < 0 else above
        return np.exp(-0.5 * (x / scale) ** 2) / whole if scale > 0 else 0.0

    for end, score in zip(at, z, strict=True):
        down = quad(density, -12.0 * below, min(end, 0.0))[0] if below > 0 else 0.0
        up = quad(density, 0.0, end)[0] if end > 0 else 0.0
        assert down + up == pytest.approx(norm.cdf(score), abs=1e-9)
    assert (np.diff(at) >= 0).all()
