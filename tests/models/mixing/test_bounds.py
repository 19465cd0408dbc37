"""What no lossless mixture can leave."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_less

from models.mixing.phases import soil_phases
from models.mixing.physical import (
    bruggeman,
    crim,
    de_loor_1968,
    maxwell_garnett,
    power_law,
    sihvola,
)
from models.mixing.physical.bounds import hashin_shtrikman, wiener
from tests.published import table

SOIL = {"porosity": 0.45, "solid_permittivity": 4.7, "water_permittivity": 80.361814}
WET = np.linspace(0.01, 0.45, 89)
DISCS = {"bound_water_content": 0.0, "bound_water_permittivity": 35.0}
SPHERES = {"aspect_ratio": 1.0}

WITHIN = {
    "crim": lambda theta: crim.to_permittivity(theta, **SOIL),
    "power 0.46": lambda theta: power_law.to_permittivity(theta, exponent=0.46, **SOIL),
    "power 0.65": lambda theta: power_law.to_permittivity(theta, exponent=0.65, **SOIL),
    "bruggeman": lambda theta: bruggeman.to_permittivity(theta, **SOIL),
    "coherent potential": lambda theta: sihvola.to_permittivity(theta, nu=3.0, **SOIL),
    "discs": lambda theta: de_loor_1968.to_permittivity(theta, **DISCS, **SOIL),
    "in solids": lambda theta: maxwell_garnett.to_permittivity(
        theta, host="solid", **SPHERES, **SOIL
    ),
    "needles": lambda theta: maxwell_garnett.to_permittivity(
        theta, host="solid", aspect_ratio=10.0, **SOIL
    ),
}


def phases(theta, porosity=0.45):
    return soil_phases(np.asarray(theta), porosity, 4.7, 80.361814)


def test_bounds_reproduce_their_values():
    printed = table("mixing_geometries")
    theta = printed["water_content"].values
    for name, bounds in (("wiener", wiener), ("hashin_shtrikman", hashin_shtrikman)):
        for end, computed in zip(("lower", "upper"), bounds(phases(theta)), strict=True):
            expected = printed[f"{name}_{end}"]
            assert_array_less(np.abs(computed - expected.values), expected.tolerance)


def test_truly_dry_soil_has_tighter_bounds_than_soil_with_a_trace_of_water():
    assert_allclose(hashin_shtrikman(phases(0.0)), (2.309, 2.754), rtol=0, atol=5e-4)
    around_wet = 1 / (0.55 / (4.7 + 160.723628) + 0.45 / (1.0 + 160.723628)) - 160.723628
    assert_allclose(hashin_shtrikman(phases(1e-9))[1], around_wet, rtol=1e-6)
    assert around_wet > 3.0


def test_what_is_known_of_the_geometry_tightens_the_bounds():
    loose, tight = wiener(phases(WET)), hashin_shtrikman(phases(WET))
    assert np.all(loose[0] < tight[0])
    assert np.all(tight[0] < tight[1])
    assert np.all(tight[1] < loose[1])


def test_a_single_phase_leaves_no_choice():
    for bounds in (wiener, hashin_shtrikman):
        assert_allclose(bounds(((0.0, 4.7), (1.0, 80.0), (0.0, 1.0))), (80.0, 80.0), rtol=1e-14)


def test_more_water_than_pores_has_no_bounds():
    assert np.all(np.isnan(hashin_shtrikman(phases([0.5, np.nan]))))


@pytest.mark.parametrize("model", WITHIN.values(), ids=WITHIN)
def test_isotropic_models_stay_within_the_bounds(model):
    lower, upper = hashin_shtrikman(phases(WET))
    assert_array_less(lower, model(WET))
    assert np.all(model(WET) < upper * (1 + 1e-12))


@pytest.mark.parametrize("theta", [0.01, 0.1, 0.25, 0.4])
def test_spheres_in_the_extreme_phases_are_the_bounds_themselves(theta):
    in_air, in_water = (
        maxwell_garnett.to_permittivity(theta, host=host, **SPHERES, **SOIL)
        for host in ("air", "water")
    )
    assert_allclose((in_air, in_water), hashin_shtrikman(phases(theta)), rtol=1e-13)


def test_power_law_of_exponent_one_and_minus_one_are_layers():
    across, along = (power_law.mixture(phases(WET), exponent) for exponent in (-1.0, 1.0))
    assert_allclose((across, along), wiener(phases(WET)), rtol=1e-13)
