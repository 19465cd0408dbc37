"""Monte Carlo: same answer however it is cut, draws outside the domain counted, when it stops."""

import tracemalloc

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal
from scipy import stats

from models.errors import ParameterError
from models.uncertainty import evaluation
from models.uncertainty.distributions import Normal, Rectangular
from models.uncertainty.draws import Draws, interval_of, moments_of, numerical_tolerance
from models.uncertainty.monte_carlo import (
    Stopping,
    simulate,
    simulate_jointly,
    simulate_until_stable,
)

ROWS = 37
X = np.linspace(1.0, 30.0, ROWS)
FIGURES = ("value", "standard_uncertainty", "lower", "upper", "outside", "draws")


def measurand(x, y):
    with np.errstate(invalid="ignore"):
        return np.sqrt(x - 3.0) * y


def inputs(x=X):
    return {"x": Normal(x, 0.5), "y": Rectangular(0.4, 0.05)}


def figures(found):
    return [getattr(found, name) for name in FIGURES]


@pytest.mark.parametrize("kind", ["quasi-random", "pseudo-random"])
@pytest.mark.parametrize("interval", ["symmetric", "shortest"])
def test_a_row_does_not_know_its_neighbours_nor_the_block_it_is_in(kind, interval, monkeypatch):
    how = {"draws": Draws(1024, seed=5, kind=kind), "interval": interval}
    together = simulate(measurand, inputs(), **how)
    backwards = simulate(measurand, inputs(X[::-1].copy()), **how)
    monkeypatch.setattr(evaluation, "BLOCK", 3000)
    in_blocks = simulate(measurand, inputs(), **how)
    for whole, turned, cut in zip(
        figures(together), figures(backwards), figures(in_blocks), strict=True
    ):
        assert_array_equal(whole, turned[::-1])
        assert_array_equal(whole, cut)
    for row in range(0, ROWS, 6):
        alone = simulate(measurand, inputs(X[row : row + 1]), **how)
        for whole, one in zip(figures(together), figures(alone), strict=True):
            assert_array_equal(whole[row : row + 1], one)


def test_same_seed_same_answer_other_seed_another():
    first, again, other = (
        simulate(measurand, inputs(), draws=Draws(512, seed=seed)).upper for seed in (1, 1, 2)
    )
    assert_array_equal(first, again)
    assert (first[10:] != other[10:]).all()


@pytest.mark.parametrize("kind", ["quasi-random", "pseudo-random"])
def test_counts_the_draws_outside_the_domain_and_leaves_them_out(kind):
    """Oracle: scipy.stats, the share of x below 3, and the mean of a truncated normal."""
    x = np.array([2.0, 3.0, 4.0, 6.0])
    found = simulate(
        lambda x: np.where(x >= 3.0, x, np.nan),
        {"x": Normal(x, 0.5)},
        draws=Draws(2**16, kind=kind),
    )
    expected = stats.norm.cdf((3.0 - x) / 0.5)
    assert_allclose(found.outside / found.draws, expected, atol=6e-3)
    inside = stats.truncnorm((3.0 - x) / 0.5, np.inf, x, 0.5)
    assert_allclose(found.value, inside.mean(), atol=6e-3)
    assert_allclose(found.lower, inside.ppf(0.025), atol=8e-3)
    assert (found.lower >= 3.0).all()


def test_a_row_all_of_whose_draws_are_outside_has_no_number_and_says_so():
    found = simulate(measurand, inputs(np.array([-9.0, np.nan, 10.0])), draws=Draws(256))
    for figure in figures(found)[:4]:
        assert np.isnan(figure[:2]).all()
        assert np.isfinite(figure[2])
    assert list(found.outside) == [256, 256, 0]


def test_infinite_draws_are_outside():
    found = simulate(
        lambda x: np.where(x > 0, x, np.inf), {"x": Normal(0.0, 1.0)}, draws=Draws(512)
    )
    assert found.outside[0] == 256
    assert np.isfinite(found.upper[0])


def test_quasi_random_draws_do_the_work_of_many_more():
    """Ends of a normal distribution: half-width 1.96, 2^13 points, within half a per cent."""
    found = simulate(lambda x, y: x + y, {"x": Normal(0.0, 0.6), "y": Normal(0.0, 0.8)})
    assert found.draws[0] == 8192
    assert_allclose([found.lower[0], found.upper[0]], stats.norm.ppf([0.025, 0.975]), atol=0.01)
    assert_allclose(found.standard_uncertainty, 1.0, rtol=1e-3)
    assert_allclose(found.value, 0.0, atol=1e-4)


def test_shortest_interval_of_an_exponential_starts_at_its_peak():
    """Exact: 0 to -ln 0.05, while the symmetric one starts at -ln 0.975."""
    exponential = {"p": Rectangular(0.5, 0.5)}
    shortest, symmetric = (
        simulate(lambda p: -np.log(p), exponential, draws=Draws(2**14), interval=kind)
        for kind in ("shortest", "symmetric")
    )
    assert_allclose([shortest.lower[0], shortest.upper[0]], [0.0, -np.log(0.05)], atol=0.03)
    ends = -np.log([0.975, 0.025])
    assert_allclose([symmetric.lower[0], symmetric.upper[0]], ends, atol=0.03)


def test_ranks_are_those_of_the_supplement():
    """JCGM 101, 7.7.2: of 1 000 sorted draws, the 25th and the 975th, from memory."""
    ordered = np.arange(1.0, 1001.0)[None, :]
    lower, upper = interval_of(ordered, np.array([1000]), probability=0.95, kind="symmetric")
    assert (lower[0], upper[0]) == (25.0, 975.0)


def test_too_few_draws_hold_no_interval():
    ordered = np.arange(10.0)[None, :]
    lower, upper = interval_of(ordered, np.array([10]), probability=0.95, kind="shortest")
    assert np.isnan([lower[0], upper[0]]).all()


def test_moments_are_those_of_numpy_whatever_is_left_out():
    values = np.random.default_rng(1).standard_normal((3, 50))
    values[1, ::3] = np.nan
    mean, u = moments_of(values, np.isfinite(values).sum(axis=1))
    assert_allclose(mean, np.nanmean(values, axis=1))
    assert_allclose(u, np.nanstd(values, axis=1, ddof=1))


@pytest.mark.parametrize(
    ("u", "digits", "tolerance"),
    [(0.35, 2, 0.005), (0.35, 1, 0.05), (2.0, 2, 0.05), (0.0996, 2, 0.005), (35.8, 2, 0.5)],
)
def test_tolerance_is_half_a_unit_in_the_last_digit(u, digits, tolerance):
    """The first row: JCGM 101, 7.9.2, example 1, from memory; the rest by its definition."""
    assert numerical_tolerance(np.array([u]), digits)[0] == pytest.approx(tolerance)


def test_adaptive_draws_stop_when_two_digits_stand():
    rectangles = {name: Rectangular(0.0, np.sqrt(3.0)) for name in "abcd"}
    found = simulate_until_stable(lambda a, b, c, d: a + b + c + d, rectangles)
    assert 20_000 <= found.draws[0] <= 200_000
    assert found.draws[0] % 10_000 == 0
    assert_allclose(found.standard_uncertainty, 2.0, atol=0.05)
    assert_allclose(found.upper, 3.879, atol=0.05)
    more = simulate_until_stable(
        lambda a, b, c, d: a + b + c + d, rectangles, stopping=Stopping(digits=1)
    )
    assert more.draws[0] == 20_000


def test_adaptive_rows_stop_one_by_one_and_alone_as_in_company():
    x = np.array([4.0, 30.0, -9.0, 8.0, 3.2, 12.0, 20.0])
    how = {
        "draws": Draws(10_000, seed=3, kind="pseudo-random"),
        "stopping": Stopping(digits=2, most=60_000),
    }
    together = simulate_until_stable(measurand, inputs(x), **how)
    assert len(set(together.draws)) > 1
    assert together.draws[2] == 20_000  # nothing to wait for where there is no number
    assert together.draws.max() <= 60_000
    for row in range(x.size):
        alone = simulate_until_stable(measurand, inputs(x[row : row + 1]), **how)
        for whole, one in zip(figures(together), figures(alone), strict=True):
            assert_array_equal(whole[row : row + 1], one)


def test_correlated_draws_have_that_correlation():
    matrix = [[1.0, -0.7], [-0.7, 1.0]]
    found = simulate_jointly(
        lambda x, y: (x, y), {"x": Normal(1.0, 2.0), "y": Normal(X, 0.5)}, correlation=matrix
    )
    assert_allclose(found.covariance[:, 0, 1], -0.7, rtol=5e-3)
    assert_allclose(found.covariance[:, 0, 0], 4.0, rtol=2e-3)


def test_joint_draws_count_where_all_outputs_are_numbers():
    found = simulate_jointly(
        lambda x: (np.where(x > 0, x, np.nan), x), {"x": Normal(0.0, 1.0)}, draws=Draws(2**14)
    )
    assert found.outside[0] == 2**13
    assert_allclose(found.value[0], np.sqrt(2 / np.pi), rtol=1e-3)
    assert_allclose(found.covariance[0], np.full((2, 2), 1 - 2 / np.pi), rtol=2e-3)


def test_refuses_draws_that_are_none():
    for wrong in ({"count": 1}, {"seed": -1}):
        with pytest.raises(ParameterError, match="at least"):
            Draws(**wrong)


def test_quasi_random_draws_are_rounded_up_to_a_power_of_two():
    assert Draws(10_000).count == 16_384
    assert Draws(10_000, kind="pseudo-random").count == 10_000
    assert not Draws(256).normal(3).flags.writeable


def test_memory_does_not_grow_with_the_rows():
    def peak(rows):
        given = {"x": Normal(np.linspace(4, 30, rows), 0.5), "y": Rectangular(0.4, 0.05)}
        tracemalloc.start()
        simulate(measurand, given, draws=Draws(4096))
        top = tracemalloc.get_traced_memory()[1]
        tracemalloc.stop()
        return top

    peak(10)
    assert peak(400) < 2 * peak(40)


def test_no_rows_are_no_rows():
    assert simulate(measurand, inputs(np.empty(0))).value.shape == (0,)
