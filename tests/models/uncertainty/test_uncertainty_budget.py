"""Budgets: shares add up, the largest is the largest, and a band narrows by what it says."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.errors import ParameterError
from models.uncertainty.budget import NOBODY, budget_of
from models.uncertainty.correlation import covariance_from
from models.uncertainty.distributions import Normal, Rectangular
from models.uncertainty.draws import Draws
from models.uncertainty.first_order import Input, propagate
from models.uncertainty.joint import propagate_jointly
from models.uncertainty.validation import validate_first_order


def measurand(x, y, z):
    return x * y - z


X = np.array([1.0, 5.0, 20.0])
INPUTS = [Input("x", X, 0.3), Input("y", 2.0, 0.0, 0.05), Input("z", 1.0, 0.4)]


def test_shares_of_the_variance_add_up_and_name_the_largest():
    found = budget_of(propagate(measurand, INPUTS, measurand(X, 2.0, 1.0)).contributions)
    variance = np.stack([np.full(3, 0.36), (0.05 * X) ** 2, np.full(3, 0.16)])
    for name, expected in zip("xyz", variance / variance.sum(axis=0), strict=True):
        assert_allclose(found.share[name], expected, rtol=1e-9)
    assert_allclose(sum(found.share.values()), 1.0)
    assert [found.names[place] for place in found.largest] == ["x", "x", "y"]


@pytest.mark.parametrize("without", ["x", "y", "z"])
def test_the_band_narrows_by_what_the_budget_says(without):
    value = measurand(X, 2.0, 1.0)
    full = propagate(measurand, INPUTS, value)
    less = propagate(measurand, [each for each in INPUTS if each.name != without]
                     + [Input(without, {"x": X, "y": 2.0, "z": 1.0}[without])], value)  # fmt: skip
    before, after = (np.sqrt(p.per_reading + p.shared) for p in (full, less))
    found = budget_of(full.contributions)
    assert_allclose(found.narrowing[without], 1 - after / before, atol=1e-12)


def test_half_the_variance_is_29_per_cent_of_the_band():
    found = budget_of({"x": np.ones(1), "y": np.ones(1)})
    assert_allclose(found.narrowing["x"], 1 - np.sqrt(0.5))


def test_correlated_inputs_share_what_they_have_in_common():
    matrix = np.array([[1.0, 0.8], [0.8, 1.0]])
    found = budget_of({"x": np.array([3.0, 1.0]), "y": np.array([-1.0, 1.0])}, matrix)
    total = propagate_jointly(
        lambda x, y: 3 * x - y, {"x": 0.0, "y": 0.0}, covariance_from([1.0, 1.0], matrix)
    )
    assert_allclose(sum(found.share.values()), 1.0)
    assert found.share["y"][0] < 0  # it takes away from what x brings
    alone = 1 - np.sqrt(9.0 / total.covariance[0, 0, 0])
    assert_allclose(found.narrowing["y"][0], alone, rtol=1e-9)
    assert_allclose(found.share["x"][1], 0.5)


def test_nothing_uncertain_is_nobody_s():
    found = budget_of({"x": np.array([0.0, np.nan, 1.0]), "y": np.zeros(3)})
    assert list(found.largest) == [NOBODY, NOBODY, 0]
    assert np.isnan(found.share["x"][:2]).all()


def test_refuses_a_correlation_of_nothing():
    with pytest.raises(ParameterError, match="eigenvalue"):
        budget_of({"x": np.ones(1), "y": np.ones(1)}, [[1.0, 2.0], [2.0, 1.0]])


def test_first_order_holds_for_a_sum_and_not_for_one_wide_rectangle():
    """JCGM 101, 9.2.2 to 9.2.4, from memory; limits differ by 0.04 and by 2.9."""
    root_3 = np.sqrt(3.0)
    cases = [
        (Normal(0.0, 1.0), Normal(0.0, 1.0), True),
        (Rectangular(0.0, root_3), Rectangular(0.0, root_3), True),
        (Rectangular(0.0, root_3), Rectangular(0.0, 10 * root_3), False),
    ]
    for many, one, holds in cases:
        found = validate_first_order(
            lambda a, b, c, d: a + b + c + d, {"a": many, "b": many, "c": many, "d": one}
        )
        assert found.holds[0] == holds


def test_three_digits_ask_more_of_the_first_order_than_two():
    given = {name: Rectangular(0.0, np.sqrt(3.0)) for name in "abcd"}
    found = validate_first_order(lambda a, b, c, d: a + b + c + d, given, digits=3)
    assert_allclose(found.tolerance, 0.005)
    assert not found.holds[0]


def test_validation_is_per_row_and_never_holds_for_no_number():
    x = np.array([0.0, 50.0, np.nan])
    found = validate_first_order(
        lambda x: x * x, {"x": Normal(x, 1.0)}, digits=1, draws=Draws(2**14)
    )
    assert list(found.holds) == [False, True, False]
