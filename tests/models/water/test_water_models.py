"""Laws that hold for any model of water; a new one is tested by being registered."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from models.conductivity.loss import conduction_loss
from models.quantity import QUANTITIES
from models.water import DEFAULT_WATER, WATER_MODELS, kaatze_1989
from models.water.blocks import BLOCK

GHZ = 1e9


@pytest.fixture(params=WATER_MODELS.values(), ids=WATER_MODELS)
def model(request):
    return request.param


@pytest.fixture
def temperature(model):
    valid = model.validity["temperature"]
    return np.linspace(valid.low, min(valid.high, 60.0), 41)


def test_static_permittivity_falls_with_temperature(model, temperature):
    assert np.all(np.diff(model.static(temperature)) < 0)


def test_real_part_tends_to_static_at_low_frequency(model, temperature):
    real, loss = model.parts(1e3, temperature)
    assert_allclose(real, model.static(temperature), rtol=1e-9)
    assert np.all(loss < 1e-3)


def test_real_part_falls_with_frequency(model):
    frequency = np.geomspace(1e6, model.validity["frequency"].high, 50)
    real, _ = model.parts(frequency, 20.0)
    assert np.all(np.diff(real) <= 0)


def test_real_part_and_loss_are_not_negative(model, temperature):
    frequency = np.geomspace(1e6, model.validity["frequency"].high, 20)[:, None]
    real, loss = model.parts(frequency, temperature, 0.5)
    assert np.all(real > 1)
    assert np.all(loss >= 0)


def test_loss_includes_conduction_at_the_temperature_of_the_water(model):
    _, lossy = model.parts(50e6, 25.0, 0.4)
    _, pure = model.parts(50e6, 25.0)
    assert_allclose(lossy - pure, conduction_loss(0.4, 50e6), rtol=0.01)
    _, warm = model.parts(50e6, 40.0, 0.4)
    assert warm > 1.2 * lossy


def test_salt_never_raises_the_real_part_at_low_frequency(model):
    real, _ = model.parts(0.1 * GHZ, 20.0, np.linspace(0.0, 2.0, 30))
    assert np.all(np.diff(real) <= 0)


def test_nan_in_nan_out(model):
    assert np.isnan(model.static(np.nan))
    assert np.all(np.isnan(model.parts(GHZ, np.nan)))
    assert np.all(np.isnan(model.parts(GHZ, np.nan, 0.1)))
    assert np.isnan(model.parts(np.nan, 20.0, 0.1)[1])
    assert np.isnan(model.parts(GHZ, 20.0, np.nan)[1])


@pytest.mark.parametrize(
    ("frequency", "temperature", "conductivity", "shape"),
    [
        ((), (), (), ()),
        ((), (5,), (), (5,)),
        ((5,), (), (), (5,)),
        ((), (), (5,), (5,)),
        ((4, 1), (5,), (), (4, 5)),
        ((), (0,), (), (0,)),
        ((1,), (3,), (1,), (3,)),
        ((), (2, 3), (2, 3), (2, 3)),
    ],
)
def test_keeps_the_shape_of_what_it_is_given(model, frequency, temperature, conductivity, shape):
    for salt in (0.0, 0.1):
        real, loss = model.parts(
            np.full(frequency, GHZ), np.full(temperature, 20.0), np.full(conductivity, salt)
        )
        assert real.shape == loss.shape == shape
    assert model.static(np.full(temperature, 20.0)).shape == temperature


def test_no_warning_whatever_the_numbers(model):
    """Warnings are errors here: far outside there may be no number, but no noise either."""
    odd = np.array([-1e9, -273.15, -134.2, -45.0, 0.0, 1e9, np.inf, -np.inf, np.nan])
    model.static(odd)
    model.parts(odd[:, None, None], odd[:, None], odd)
    model.parts(0.0, odd)


@pytest.mark.parametrize("rows", [BLOCK - 1, BLOCK, BLOCK + 1, 3 * BLOCK + 5])
def test_long_columns_get_what_short_ones_get(model, rows):
    rng = np.random.default_rng(1)
    frequency, temperature = rng.uniform(0.1, 1, rows) * GHZ, rng.uniform(1, 39, rows)
    salt = rng.uniform(0, 1, rows)
    real, loss = model.parts(frequency, temperature, salt)
    for row in (0, BLOCK - 2, rows - 1):
        one = model.parts(frequency[row], temperature[row], salt[row])
        assert_allclose((real[row], loss[row]), one, rtol=1e-13)


def test_inputs_are_left_as_they_were(model):
    given = [np.full(9, GHZ), np.linspace(1, 30, 9), np.linspace(0, 1, 9)]
    before = [values.copy() for values in given]
    real, loss = model.parts(*given)
    real += 1
    loss += 1
    for values, was in zip(given, before, strict=True):
        assert_array_equal(values, was)


def test_default_is_registered_and_first():
    assert next(iter(WATER_MODELS)) == DEFAULT_WATER


def test_default_is_exactly_kaatze_without_salt():
    frequency, temperature = np.geomspace(1e6, 2e10, 60)[:, None], np.linspace(-4, 60, 65)
    expected = kaatze_1989.parts(frequency, temperature)
    default = WATER_MODELS[DEFAULT_WATER]
    assert_array_equal(default.parts(frequency, temperature), expected)
    assert_array_equal(default.parts(frequency, temperature, np.zeros(65)), expected)


def test_default_has_no_number_where_the_salt_is_not_known():
    real, _ = WATER_MODELS[DEFAULT_WATER].parts(GHZ, 20.0, [-0.1, 0.1, 11.0])
    assert_array_equal(np.isnan(real), [True, False, True])


def test_default_covers_a_year_in_the_field():
    """A gate of the service must not cut what the default model covers."""
    valid = WATER_MODELS[DEFAULT_WATER].validity
    assert not np.any(valid["temperature"].excludes([0.0, 60.0]))
    assert not np.any(valid["frequency"].excludes([1e6, 50e6, 1e9, 1e10]))


def test_every_declaration_can_be_looked_up(model):
    assert model.equation
    assert model.title
    assert str(model.source.year) in model.key
    assert model.source.note, "says how its numbers were confirmed"
    for name in (*model.validity, *model.saline_validity):
        assert name in QUANTITIES
