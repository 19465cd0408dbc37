"""Laws that hold for any temperature compensation; a new one is tested by being registered."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from models.conductivity import DEFAULT_COMPENSATION, TEMPERATURE_COMPENSATIONS
from models.errors import ParameterError
from models.quantity import QUANTITIES


@pytest.fixture(params=TEMPERATURE_COMPENSATIONS.values(), ids=TEMPERATURE_COMPENSATIONS)
def compensation(request):
    return request.param


@pytest.fixture
def temperature(compensation):
    valid = compensation.validity["temperature"]
    return np.linspace(valid.low, valid.high, 201)


def test_nothing_changes_at_25_degrees(compensation):
    assert_allclose(compensation.factor(25.0), 1.0, rtol=1e-15)


def test_factor_falls_with_temperature(compensation, temperature):
    assert np.all(np.diff(compensation.factor(temperature)) < 0)


def test_there_and_back_is_the_identity(compensation, temperature):
    measured = np.geomspace(1e-4, 10, 201)
    at_25 = compensation.to_25(measured, temperature)
    assert_allclose(compensation.from_25(at_25, temperature), measured, rtol=1e-14)


def test_cold_water_conducts_better_at_25_than_it_was_measured(compensation):
    assert compensation.to_25(0.1, 10.0) > 0.1 > compensation.to_25(0.1, 30.0)
    assert compensation.from_25(0.1, 10.0) < 0.1 < compensation.from_25(0.1, 30.0)


def test_all_of_them_agree_within_three_standard_uncertainties(compensation):
    temperature = np.linspace(5.0, 35.0, 31)
    default = TEMPERATURE_COMPENSATIONS[DEFAULT_COMPENSATION]
    away = compensation.factor(temperature) / default.factor(temperature) - 1
    assert np.all(np.abs(away) <= 3 * compensation.relative_uncertainty(temperature) + 1e-12)


@pytest.mark.parametrize(
    # Standard deviation over nine salts in percent, McCleskey et al. (2012), 20 meq/L.
    ("temperature", "percent"),
    [(5, 1.97), (10, 1.33), (15, 0.81), (20, 0.38), (25, 0.0), (30, 0.34), (35, 0.66), (40, 0.96)],
)
def test_uncertainty_is_the_spread_between_salts(compensation, temperature, percent):
    stated = 100 * compensation.relative_uncertainty(temperature)
    assert_allclose(stated, percent, atol=0.2)


def test_nan_in_nan_out(compensation):
    assert np.isnan(compensation.factor(np.nan))
    assert np.isnan(compensation.to_25(np.nan, 20.0))
    assert np.isnan(compensation.from_25(0.1, np.nan))
    assert np.isnan(compensation.relative_uncertainty(np.nan))


def test_keeps_the_shape_it_is_given(compensation):
    for shape in ((), (0,), (3,), (2, 3)):
        assert np.shape(compensation.factor(np.full(shape, 20.0))) == shape
        assert np.shape(compensation.to_25(np.full(shape, 0.1), 20.0)) == shape
        assert np.shape(compensation.relative_uncertainty(np.full(shape, 20.0))) == shape


def test_no_warning_whatever_the_numbers(compensation):
    odd = np.array([-1e9, -273.15, -27.4, 0.0, 1e9, np.inf, -np.inf, np.nan])
    compensation.to_25(odd[:, None], odd)
    compensation.from_25(odd[:, None], odd)


def test_every_declaration_can_be_looked_up(compensation):
    assert compensation.equation
    assert compensation.source.note, "says how its numbers were confirmed"
    assert set(compensation.validity) <= set(QUANTITIES)
    bound = compensation.bind({})
    assert_array_equal(compensation.factor(10.0, **bound), compensation.factor(10.0))


def test_default_is_registered_and_first():
    assert next(iter(TEMPERATURE_COMPENSATIONS)) == DEFAULT_COMPENSATION


def test_linear_takes_a_coefficient_and_refuses_percent():
    linear = TEMPERATURE_COMPENSATIONS["linear"]
    assert_allclose(linear.to_25(1.0, 15.0, coefficient=0.02), 1.25)
    assert_allclose(linear.factor(15.0, coefficient=np.array([0.0, 0.02])), [1.0, 1.25])
    with pytest.raises(ParameterError, match="coefficient"):
        linear.bind({"coefficient": 1.91})


def test_linear_has_no_factor_where_its_line_reaches_zero():
    factor = TEMPERATURE_COMPENSATIONS["linear"].factor([-40.0, 25 - 1 / 0.0191, -20.0])
    assert_array_equal(np.isnan(factor), [True, True, False])


def test_table_of_iso_7888_ends_where_it_is_printed_to_end():
    factor = TEMPERATURE_COMPENSATIONS["iso-7888"].factor([-0.01, 0.0, 35.9, 35.91])
    assert_array_equal(np.isnan(factor), [True, False, False, True])
