"""Ice and freezing: what a probe sees when the water goes."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from models.water import kaatze_1989, matzler_2006
from models.water.freezing import freezing_point, is_freezing, is_near_freezing


def test_ice_is_nearly_the_same_at_every_frequency_and_temperature():
    real, loss = matzler_2006.parts(np.geomspace(1e8, 1e10, 9)[:, None], np.linspace(-30, 0, 7))
    assert np.all((real > 3.15) & (real < 3.20))
    assert np.all(loss < 0.01)


def test_water_has_28_times_the_permittivity_of_ice():
    ice, _ = matzler_2006.parts(1e8, 0.0)
    assert_allclose(kaatze_1989.static_permittivity(0.0) / ice, 27.6, atol=0.05)


def test_ice_has_no_step_where_its_two_lines_meet():
    cold, warm = matzler_2006.parts(1e9, np.array([243.0 - 1e-9, 243.0]) - 273.15)[0]
    assert_allclose(cold, warm, atol=2e-4)


def test_ice_passes_nan_on_and_keeps_shape():
    assert np.all(np.isnan(matzler_2006.parts(1e9, np.nan)))
    assert np.isnan(matzler_2006.parts(np.nan, -5.0)[1])
    for part in matzler_2006.parts(np.full((4, 1), 1e9), np.full(3, -5.0)):
        assert part.shape == (4, 3)
    matzler_2006.parts(0.0, [-273.15, -400.0, 1e9])


@pytest.mark.parametrize(
    # 0.030 Cel per dS/m, from memory.
    ("conductivity", "expected"),
    [(0.0, 0.0), (0.1, -0.03), (1.0, -0.30), (4.0, -1.2)],
)
def test_freezing_point(conductivity, expected):
    assert_allclose(freezing_point(conductivity), expected, atol=1e-12)


def test_salty_water_stays_liquid_a_little_longer():
    temperature = np.array([-1.0, -0.2, 0.0, 0.5, 1.0, 1.01, np.nan])
    assert_array_equal(is_freezing(temperature), [1, 1, 1, 0, 0, 0, 0])
    assert_array_equal(is_near_freezing(temperature), [0, 0, 0, 1, 1, 0, 0])
    assert_array_equal(is_freezing(temperature, 1.0), [1, 0, 0, 0, 0, 0, 0])
    assert_array_equal(is_near_freezing(temperature, 1.0), [0, 1, 1, 1, 1, 0, 0])


def test_unknown_salt_is_neither():
    assert not is_freezing(-5.0, np.nan)
    assert not is_near_freezing(0.5, np.nan)
