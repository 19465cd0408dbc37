"""Any increasing function is turned round to double precision, each row on its own."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose, assert_array_equal
from scipy.optimize import brentq

from models.numerics.inverse import increasing_inverse

SHAPES = {
    "line": (lambda x: 3.0 * x - 1.0, -2.0, 5.0),
    "flat inflection": (lambda x: x * x * x, -1.0, 2.0),
    "very flat inflection": (lambda x: x**21, -3.0, 2.0),
    "steep inflection": (np.cbrt, -1.0, 1000.0),
    "explosion": (np.exp, -50.0, 50.0),
    "saturation": (lambda x: np.arctan(1e6 * (x - 0.1)), -10.0, 1000.0),
    "pole at the end": (lambda x: 1 / (1 - x), 0.0, 1.0),
    "step": (lambda x: np.where(x > 0.3, 1.0, 0.0) + 1e-9 * x, -1.0, 2.0),
}
SHARES = st.lists(st.floats(0.0, 1.0), min_size=1, max_size=20)


@pytest.fixture(params=SHAPES.values(), ids=SHAPES)
def shape(request):
    return request.param


def sampled(shape, shares):
    function, low, high = shape
    with np.errstate(divide="ignore"):
        values = np.asarray(function(low + (high - low) * np.asarray(shares)))
    return np.where(np.isfinite(values), values, function(low))


@settings(max_examples=40, deadline=None)
@pytest.mark.parametrize("name", SHAPES)
@given(shares=SHARES)
def test_value_lies_between_the_neighbours_of_the_answer(name, shares):
    function, low, high = SHAPES[name]
    values = sampled(SHAPES[name], shares)
    found = increasing_inverse(function, values, low, high)
    reach = 2 * np.spacing(np.abs(found)) + 1e-28 * (high - low)
    slack = 4 * np.spacing(np.abs(values))
    with np.errstate(divide="ignore"):
        assert np.all(function(np.maximum(found - reach, low)) - slack <= values)
        assert np.all(values <= function(np.minimum(found + reach, high)) + slack)


@settings(max_examples=40, deadline=None)
@given(
    slopes=st.lists(st.floats(1e-3, 1e3), min_size=3, max_size=3),
    share=st.floats(0.01, 0.99),
)
def test_agrees_with_brent(slopes, share):
    a, b, c = slopes

    def function(x):
        return a * x + b * x**3 + c * np.sinh(x)

    value = function(-4.0 + 10.0 * share)
    reference = brentq(lambda x: function(x) - value, -4.0, 6.0, xtol=1e-15, rtol=1e-14)
    assert increasing_inverse(function, value, -4.0, 6.0) == pytest.approx(
        reference, rel=1e-13, abs=1e-14
    )


@settings(max_examples=40, deadline=None)
@pytest.mark.parametrize("name", ["line", "flat inflection", "pole at the end", "step"])
@given(shares=SHARES)
def test_answer_does_not_depend_on_the_other_rows(name, shares):
    function, low, high = SHAPES[name]
    values = sampled(SHAPES[name], shares)
    alone = [increasing_inverse(function, value, low, high) for value in values]
    assert_array_equal(increasing_inverse(function, values, low, high), alone)


def test_out_of_reach_is_no_number():
    function, low, high = SHAPES["line"]
    below, above = function(low) - 1e-9, function(high) + 1e-9
    found = increasing_inverse(function, [below, 0.0, above, np.nan, -np.inf, np.inf], low, high)
    assert np.isnan(found).tolist() == [True, False, True, True, True, True]


def test_ends_are_reached(shape):
    function, low, high = shape
    assert increasing_inverse(function, sampled(shape, [0.0]), low, high) == [low]
    high = low + 0.75 * (high - low)
    assert increasing_inverse(function, function(np.array([high])), low, high) == [high]


def test_end_missed_by_rounding_is_reached():
    beyond = np.nextafter(np.sqrt(2.0), 2.0)
    assert increasing_inverse(np.sqrt, beyond, 0.0, 2.0) == 2.0


def test_each_row_may_have_its_own_ends():
    found = increasing_inverse(lambda x: x, 5.0, [0.0, 6.0, 0.0, np.nan], [10.0, 9.0, 4.0, 9.0])
    assert_array_equal(found, [5.0, np.nan, np.nan, np.nan])


def test_ends_the_wrong_way_round_are_no_number():
    assert np.isnan(increasing_inverse(lambda x: x, 0.5, 1.0, 0.0))


def test_keeps_the_common_shape_of_values_and_of_the_arrays_the_function_holds():
    slope = np.array([[1.0], [2.0]])
    found = increasing_inverse(lambda x: slope * x, [1.0, 2.0, 3.0], 0.0, 10.0)
    assert_allclose(found, [[1.0, 2.0, 3.0], [0.5, 1.0, 1.5]], rtol=1e-15)
    assert increasing_inverse(lambda x: slope * x, 1.0, 0.0, 10.0).shape == (2, 1)
    assert increasing_inverse(np.exp, [], 0.0, 1.0).shape == (0,)
    assert increasing_inverse(np.exp, 1.5, 0.0, 1.0).shape == ()


def test_no_number_in_what_the_function_holds_is_no_number():
    slope = np.array([1.0, np.nan])
    assert_array_equal(increasing_inverse(lambda x: slope * x, 1.0, 0.0, 2.0), [1.0, np.nan])


def test_smooth_functions_take_few_evaluations():
    calls = []

    def function(x):
        calls.append(x)
        return x**0.65 + 0.1 * x

    increasing_inverse(function, function(np.linspace(0.5, 80.0, 1000)), 0.1, 100.0)
    assert len(calls) <= 15
