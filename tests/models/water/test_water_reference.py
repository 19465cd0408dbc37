"""Models of water against international references for fresh and sea water."""

import gsw
import numpy as np
import pytest
from iapws import IAPWS95
from iapws._iapws import _Dielectric
from numpy.testing import assert_allclose

from models.water import (
    DEFAULT_WATER,
    WATER_MODELS,
    freezing,
    iapws_1997,
    meissner_wentz_2012,
    stogryn_1995,
)

TEMPERATURE = np.arange(0.0, 61.0, 5.0)
PRESSURE = 0.101325  # MPa


@pytest.fixture(scope="module")
def water():
    """States of water by IAPWS-95."""
    return [IAPWS95(T=float(t) + 273.15, P=PRESSURE) for t in TEMPERATURE]


@pytest.fixture(scope="module")
def reference(water):
    """Static permittivity by IAPWS R8-97."""
    return np.array([_Dielectric(state.rho, state.T) for state in water])


@pytest.mark.parametrize("key", WATER_MODELS)
def test_static_departure_is_what_is_declared(key, reference):
    model = WATER_MODELS[key]
    departure = np.max(np.abs(model.static(TEMPERATURE) - reference))
    assert departure <= model.static_departure
    assert departure >= 0.4 * model.static_departure, "declared far too wide"


@pytest.mark.parametrize("key", WATER_MODELS)
def test_static_uncertainty_covers_the_reference_where_the_model_is_valid(key, reference):
    model = WATER_MODELS[key]
    away = np.abs(model.static(TEMPERATURE) - reference)
    inside = ~model.validity["temperature"].excludes(TEMPERATURE)
    assert np.all(away[inside] <= 2 * model.static_uncertainty)


def test_default_stays_within_three_hundredths_of_the_reference(reference):
    assert np.max(np.abs(WATER_MODELS[DEFAULT_WATER].static(TEMPERATURE) - reference)) < 0.03


def test_density_by_kell_1975(water):
    density = [state.rho for state in water]
    assert_allclose(iapws_1997.density(TEMPERATURE), density, rtol=5e-6)


def test_iapws_1997_over_liquid_and_steam():
    density = np.array([1100.0, 998.2, 958.0, 600.0, 50.0, 0.5])
    temperature = np.array([-20.0, 20.0, 100.0, 350.0, 400.0, 500.0])
    expected = [_Dielectric(rho, t + 273.15) for rho, t in zip(density, temperature, strict=True)]
    assert_allclose(iapws_1997.static_permittivity_at(density, temperature), expected, rtol=1e-12)


def test_two_branches_of_meissner_wentz_2012_meet_at_30_degrees():
    """With the sign that the paper prints, the first relaxation frequency would jump by 6 %."""
    below, above = (
        np.array(meissner_wentz_2012.relaxations(10e9, t, 35.0)) for t in (30.0, 30.0 + 1e-9)
    )
    assert_allclose(above, below, rtol=1e-5)


def test_sea_water_conductivity_against_the_practical_salinity_scale():
    salinity, temperature = np.meshgrid([5.0, 10.0, 20.0, 35.0], [0.0, 10.0, 20.0, 30.0])
    expected = gsw.C_from_SP(salinity, temperature, 0.0) / 10  # mS/cm to S/m
    assert_allclose(stogryn_1995.conductivity(salinity, temperature), expected, rtol=1e-3)


def test_freezing_point_against_diluted_sea_water():
    """From memory on our side: within a tenth of the reference, or two hundredths of a degree."""
    conductivity = np.array([0.1, 0.5, 1.0, 2.0])
    salinity = gsw.SP_from_C(10 * conductivity, 25.0, 0.0)
    absolute = gsw.SA_from_SP(salinity, 0.0, 0.0, 0.0)
    expected = gsw.t_freezing(absolute, 0.0, 0.0)
    assert_allclose(freezing.freezing_point(conductivity), expected, rtol=0.1, atol=0.02)


def test_default_falls_as_fast_with_temperature_as_the_reference(reference):
    slope = np.gradient(reference, TEMPERATURE)
    ours = np.gradient(WATER_MODELS[DEFAULT_WATER].static(TEMPERATURE), TEMPERATURE)
    assert_allclose(ours, slope, rtol=0.01)
