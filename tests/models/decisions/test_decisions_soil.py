"""Soil state and density in place: identities, round trips, bands, and what is refused."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from uncertainties import ufloat
from uncertainties.umath import sqrt

from models.decisions import one_step, soil_state, two_step
from models.decisions.in_place_density import KINDS, at_20_degrees


def test_the_phase_relations():
    """w 0.15, dry density 1.60, Gs 2.65: exact identities, reckoned apart."""
    found = soil_state(0.24, 1600.0, 2650.0, largest_dry_density=1750.0)
    expected = {
        "gravimetric_water_content": 0.15, "porosity": 0.39622642, "void_ratio": 0.65625,
        "degree_of_saturation": 0.60571429, "total_density": 1840.0, "air_content": 0.15622642,
        "zero_air_density": 1896.24329, "compaction": 1600 / 1750,
    }  # fmt: skip
    for name, value in expected.items():
        assert_allclose(getattr(found, name).value, value, rtol=4e-8)
    assert not found.contradicts[0]


def test_uncertainties_of_the_state_are_those_of_linear_propagation():
    theta, dry, solid = ufloat(0.24, 0.01), ufloat(1600, 20), ufloat(2650, 15)
    found = soil_state((0.24, 0.01), (1600.0, 20.0), (2650.0, 15.0))
    expected = {
        "gravimetric_water_content": theta * 1000 / dry,
        "porosity": 1 - dry / solid,
        "void_ratio": solid / dry - 1,
        "degree_of_saturation": theta / (1 - dry / solid),
        "air_content": 1 - dry / solid - theta,
        "total_density": dry + theta * 1000,
        "zero_air_density": solid / (1 + theta * solid / dry),
    }
    for name, value in expected.items():
        assert_allclose(getattr(found, name).standard_uncertainty, value.std_dev, rtol=2e-3)


def test_more_water_than_pores_is_said_and_not_cut():
    found = soil_state(np.array([0.45, 0.30]), 1600.0, 2650.0)
    assert found.contradicts.tolist() == [True, False]
    assert found.degree_of_saturation.value[0] > 1.0
    assert found.air_content.value[0] < 0.0


def test_denser_than_its_solids_has_no_state():
    found = soil_state(0.2, 2700.0, 2650.0)
    assert np.isnan(found.porosity.value[0])
    assert np.isnan(found.degree_of_saturation.value[0])


def test_nothing_measured_gives_nothing():
    found = soil_state((np.array([np.nan, 0.2]), 0.01), 1600.0, 2650.0)
    assert np.isnan(found.gravimetric_water_content.value).tolist() == [True, False]


MOULD, FIELD = 14.68805625, 13.53651264


def test_two_steps_there_and_back():
    """a 1.0, b 8.5, w 0.14, dry density 1.75 in the mould, 1.68 in place; reckoned apart."""
    found = two_step(FIELD, MOULD, 1995.0, a=1.0, b=8.5)
    assert_allclose(found.gravimetric_water_content.value, 0.14, atol=1e-8)
    assert_allclose(found.dry_density.value, 1680.0, rtol=1e-8)
    assert_allclose(found.water_content.value, 0.2352, rtol=1e-7)
    assert_allclose(found.total_density.value, 1680 * 1.14, rtol=1e-8)


def test_uncertainties_of_two_steps_are_those_of_linear_propagation():
    field, mould, total = ufloat(FIELD, 0.1), ufloat(MOULD, 0.1), ufloat(1.995, 0.01)
    a, b = ufloat(1.0, 0.02), ufloat(8.5, 0.1)
    wetness = (sqrt(mould) - a * total) / (b * total - sqrt(mould))
    dry = sqrt(field / mould) * total / (1 + wetness)
    found = two_step((FIELD, 0.1), (MOULD, 0.1), (1995.0, 10.0), a=(1.0, 0.02), b=(8.5, 0.1))
    for answer, value in ((found.gravimetric_water_content, wetness),
                          (found.dry_density, 1000 * dry), (found.water_content, wetness * dry),
                          (found.total_density, 1000 * dry * (1 + wetness))):  # fmt: skip
        assert_allclose(answer.standard_uncertainty, value.std_dev, rtol=5e-3)


def test_one_step_there_and_back():
    """c 0.1, d 1.2: sqrt(sigma_b) 1/1.68 = 0.1 + 1.2 x 0.14; reckoned apart."""
    answer = one_step(FIELD, 0.20271606, a=1.0, b=8.5, c=0.1, d=1.2)
    assert_allclose(answer.found.gravimetric_water_content.value, 0.14, atol=1e-6)
    assert_allclose(answer.found.dry_density.value, 1680.0, rtol=1e-6)
    assert not answer.too_alike[0]


def test_two_equations_that_are_nearly_one_are_refused():
    """a d - b c = 1.2 - 0.85, told apart with u 0.01 and not with 0.03 on c."""
    sure, unsure = (
        one_step(FIELD, 0.20271606, a=1.0, b=8.5, c=(0.1, u), d=(1.2, 0.01)) for u in (0.01, 0.03)
    )
    assert [sure.too_alike[0], unsure.too_alike[0]] == [False, True]
    assert np.isnan(unsure.found.dry_density.value[0])
    assert np.isfinite(sure.found.dry_density.value[0])


def test_the_condition_number_does_not_depend_on_the_unit_of_conductivity():
    one = one_step(FIELD, 0.20271606, a=1.0, b=8.5, c=0.1, d=1.2)
    other = one_step(FIELD, 20.271606, a=1.0, b=8.5, c=1.0, d=12.0)
    assert_allclose(one.condition_number, other.condition_number)
    assert_allclose(other.found.dry_density.value, 1680.0, rtol=1e-6)
    worse = one_step(FIELD, 0.2, a=1.0, b=8.5, c=0.1, d=0.86)
    assert worse.condition_number[0] > 5 * one.condition_number[0]


def test_equations_of_nothing_are_alike():
    found = one_step(FIELD, 0.2, a=1.0, b=8.5, c=0.0, d=0.0)
    assert found.too_alike[0]
    assert np.isinf(found.condition_number[0])


def test_what_no_soil_can_show_has_no_number():
    found = two_step(np.array([FIELD, FIELD]), np.array([300.0, MOULD]), 1995.0, a=1.0, b=8.5)
    assert np.isnan(found.dry_density.value).tolist() == [True, False]


@pytest.mark.parametrize(("kind", "factors"), [
    ("cohesionless", [0.976, 0.985, 1.0, 1.015, 1.030]),
    ("cohesive", [1.080, 1.050, 1.0, 0.950, 0.900]),
])  # fmt: skip
def test_permittivity_brought_to_20_degrees(kind, factors):
    """At 4, 10, 20, 30 and 40 Cel; computed from the equations, which are from memory."""
    found = at_20_degrees(10.0, np.array([4.0, 10, 20, 30, 40]), kind)
    assert_allclose(found, 10 * np.array(factors))
    assert np.isnan(at_20_degrees(10.0, np.array([3.9, 40.1, np.nan]), kind)).all()
    assert kind in KINDS
