"""Ends by curves of single inputs: against closed forms, against draws, and where there is none."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.stats import lognorm, norm, qmc

from models.uncertainty.quantiles.additive import ends
from models.uncertainty.quantiles.closed_form import Reason, ratio_interval
from models.uncertainty.quantiles.curves import Curve, Steps
from models.uncertainty.quantiles.intermediate import Intermediate

Z = norm.ppf(0.975)
ONE = np.ones(1)


def alone(value):
    """An intermediate that nothing moves and that moves nothing."""
    zero = np.zeros_like(value)
    return Intermediate(Steps(zero, zero), zero, {}, {}, zero, zero)


def stepped(function, names, value, size=1.0):
    return {
        n: Steps(function({n: size}) - value, function({n: -size}) - value, size) for n in names
    }


@pytest.mark.parametrize("power", [-2.0, -1.0, -0.5, 0.5, 1.0, 2.0])
@pytest.mark.parametrize("width", [0.02, 0.2, 0.5])
def test_a_curve_through_a_power_is_that_power(power, width):
    """ln (1 + w z)^p / p for p = -1 to 2: the curve that the form is made for."""
    at = np.linspace(-1.8, 1.8, 37)
    curve = Curve.through(Steps(np.log1p(ONE * width) * power, np.log1p(-ONE * width) * power))
    assert_allclose(curve.at(at, curve.wedge(at)), np.log1p(width * at) * power, rtol=0.01)
    assert_allclose(curve.reach, 1.0 / width, rtol=0.03)


def test_short_steps_give_the_same_curve():
    long = Curve.through(Steps(np.log1p(ONE * 0.4), np.log1p(-ONE * 0.4)))
    short = Curve.through(Steps(np.log1p(ONE * 0.08), np.log1p(-ONE * 0.08), 0.2))
    assert_allclose(short.bend, long.bend, rtol=0.02)
    assert_allclose(short.scale, long.scale, rtol=0.02)


def test_a_product_of_factors_is_lognormal():
    """scipy's lognormal distribution: a sum of straight lines in the logarithm."""
    sigma = np.array([0.1, 0.5])

    def function(scores):
        zero = np.zeros(2)
        return 0.6 * sigma * scores.get("a", zero) + 0.8 * sigma * scores.get("b", zero)

    value = np.zeros(2)
    found = ends(
        lambda p: function(p.scores), value, stepped(function, "ab", value), probability=0.95
    )
    expected = lognorm(s=sigma)
    assert_allclose(np.exp(found.lower), expected.ppf(0.025), rtol=1e-12)
    assert_allclose(np.exp(found.upper), expected.ppf(0.975), rtol=1e-12)


@pytest.mark.parametrize(("spread", "within"), [(0.05, 0.01), (0.2, 0.01), (0.35, 0.05)])
def test_a_ratio_has_the_interval_of_fieller(spread, within):
    """Logarithm of (1 + 0.1 a) / (1 + spread b), against the closed form of 1954.

    At 0.35 the denominator is below zero once in 470 times: Fieller counts that as beyond any
    number, here it cannot be.
    """

    def function(scores):
        above = 1.0 + 0.1 * scores.get("a", 0.0 * ONE)
        return np.log(above / (1.0 + spread * scores.get("b", 0.0 * ONE)))

    value = np.zeros(1)
    found = ends(lambda p: function(p.scores), value, stepped(function, "ab", value),
                 probability=0.95)  # fmt: skip
    closed = ratio_interval(1.0, 0.1, 1.0, spread)
    half = float(np.log(closed.upper / closed.lower) / 2)
    assert found.settled.all()
    assert_allclose(found.lower, np.log(closed.lower), atol=within * half)
    assert_allclose(found.upper, np.log(closed.upper), atol=within * half)


def test_a_denominator_that_may_be_zero_leaves_no_upper_end():
    """Where Fieller has none either: a denominator of 1 with a standard uncertainty of 0.6."""
    assert ratio_interval(1.0, 0.0, 1.0, 0.6).reason == Reason.UNBOUNDED_ABOVE

    def function(scores):
        with np.errstate(invalid="ignore"):
            return -np.log(1.0 + 0.6 * scores.get("b", 0.0 * ONE))

    value = np.zeros(1)
    found = ends(lambda p: function(p.scores), value, stepped(function, "b", value),
                 probability=0.95)  # fmt: skip
    assert np.isposinf(found.upper).all()
    assert np.isfinite(found.lower).all()


def test_a_numerator_that_may_be_zero_leaves_no_lower_end():
    """A difference of 1 with a standard uncertainty of 0.6 is below zero once in twenty-one."""

    def function(scores):
        with np.errstate(invalid="ignore", divide="ignore"):
            return np.log(1.0 + 0.6 * scores.get("b", 0.0 * ONE))

    value = np.zeros(1)
    found = ends(lambda p: function(p.scores), value, stepped(function, "b", value),
                 probability=0.95)  # fmt: skip
    assert np.isneginf(found.lower).all()
    assert_allclose(found.upper, np.log(1.0 + 0.6 * Z), rtol=0.02)


def test_an_intermediate_that_moves_nothing_changes_nothing():
    """The two ways to a sum of curves are one where nothing goes through the intermediate."""

    def function(scores):
        return np.log((1.0 + 0.1 * scores.get("a", 0.0)) / (1.0 + 0.2 * scores.get("b", 0.0)))

    value = np.zeros(3)
    steps = stepped(function, "ab", value)
    with_none = ends(lambda p: function(p.scores), value, steps, straight=0.1, probability=0.9)
    beside = ends(
        lambda p: function(p.scores), value, steps, alone(value), straight=0.1, probability=0.9
    )
    assert_allclose(with_none.lower, beside.lower, rtol=1e-13)
    assert_allclose(with_none.upper, beside.upper, rtol=1e-13)


def test_what_adds_straight_counts_like_an_input_with_a_straight_curve():
    """A factor of its own of the logarithm, beside a denominator that bends."""

    def function(scores):
        return 0.15 * scores.get("own", 0.0) - np.log(1.0 + 0.2 * scores.get("b", 0.0))

    value = np.zeros(2)
    every = stepped(function, ("own", "b"), value)
    one_of_many = ends(lambda p: function(p.scores), value, every, probability=0.95)
    apart = ends(
        lambda p: function(p.scores), value, {"b": every["b"]}, straight=0.15, probability=0.95
    )
    assert_allclose(apart.lower, one_of_many.lower, rtol=1e-12)
    assert_allclose(apart.upper, one_of_many.upper, rtol=1e-12)


def test_what_works_on_both_ways_is_counted_once():
    """One input in an intermediate and beside it; the rest of the intermediate bends by itself."""
    draws = norm.ppf(qmc.Sobol(3, rng=np.random.default_rng(4)).random_base2(17))

    def inner(a, c):
        return 0.30 + 0.02 * a + 0.03 * c + 0.002 * c**2

    def outer(theta, a, b):
        return -2.0 * np.log(theta) - np.log(1.0 - 0.2 * b) + 0.1 * a

    value = ONE * outer(0.30, 0.0, 0.0)
    reach = ONE * np.hypot(0.02, 0.03)
    through = Intermediate(
        Steps(outer(0.30 + reach, 0, 0) - value, outer(0.30 - reach, 0, 0) - value), reach,
        {"a": 0.02 * ONE, "c": 0.03 * ONE}, {"c": 0.002 * ONE}, 0.0 * ONE, 0.0 * ONE,
    )  # fmt: skip
    direct = {
        "a": Steps(0.1 * ONE, -0.1 * ONE),
        "b": Steps(outer(0.30, 0, 1.0) - value, outer(0.30, 0, -1.0) - value),
    }
    found = ends(
        lambda p: outer(0.30 + p.intermediate, p.scores.get("a", 0.0), p.scores.get("b", 0.0)),
        value, direct, through, probability=0.95,
    )  # fmt: skip
    drawn = outer(inner(draws[:, 0], draws[:, 2]), draws[:, 0], draws[:, 1])
    lower, upper = np.quantile(drawn, [0.025, 0.975])
    assert_allclose((found.lower[0], found.upper[0]), (lower, upper), atol=0.01 * (upper - lower))


def test_a_curve_that_turns_back_is_not_settled():
    value = np.zeros(1)
    direct = {"a": Steps(0.3 * ONE, 0.25 * ONE)}
    found = ends(lambda p: p.scores["a"] ** 2, value, direct, alone(value), probability=0.95)
    assert not found.settled.any()
    assert np.isnan(found.lower).all()


@pytest.mark.parametrize("through", [alone, lambda _: None])
def test_a_row_does_not_depend_on_its_neighbours(through):
    """Nor does its last digit: nine inputs are more than numpy adds up one by one."""
    rng = np.random.default_rng(3)
    width = rng.uniform(0.0, 0.3, 50)
    names = "abcdefghi"

    def function(scores, width):
        return -sum(
            np.log(1.0 - width / place * scores.get(n, 0.0)) for place, n in enumerate(names, 1)
        )

    def of(rows):
        some = width[rows]
        value = np.zeros(some.size)
        direct = {
            n: Steps(-np.log(1.0 - some / place), -np.log(1.0 + some / place))
            for place, n in enumerate(names, 1)
        }
        return ends(lambda p: function(p.scores, some), value, direct, through(value),
                    probability=0.95)  # fmt: skip

    together, order = of(np.arange(50)), rng.permutation(50)
    shuffled = of(order)
    for name in ("lower", "upper"):
        assert np.array_equal(getattr(shuffled, name), getattr(together, name)[order])
        single = [getattr(of(np.array([row])), name)[0] for row in (3, 17)]
        assert np.array_equal(single, getattr(together, name)[[3, 17]])


def test_an_end_that_the_measurand_does_not_have_is_not_believed():
    """Two steps as of 1 / (1 - 0.6 z), and a measurand that goes on beyond them all the same."""

    def function(z):
        return -np.log(np.maximum(1.0 - 0.6 * z, 0.4)) + np.maximum(z - 1.0, 0.0) * 0.2

    value = np.zeros(1)
    direct = {"a": Steps(function(ONE), function(-ONE))}
    found = ends(lambda p: function(p.scores["a"]), value, direct, alone(value), probability=0.95)
    assert not np.isinf(found.upper).any()
