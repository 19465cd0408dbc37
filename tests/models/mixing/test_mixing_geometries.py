"""Identities between the mixing geometries, and the one physical root among several."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_less

from models.mixing.phases import soil_phases, spheres_in_medium, water_content_of_spheres
from models.mixing.physical import (
    bruggeman,
    de_loor_1968,
    hanai_bruggeman,
    maxwell_garnett,
    power_law,
    sihvola,
)
from tests.published import table

ROWS = 2000
FRACTIONS = np.linspace(0.0, 1.0, 41)


@pytest.fixture(scope="module")
def lossy():
    """Water content, porosity, solids and water at random, with up to 3 S/m from 1 MHz on."""
    random = np.random.default_rng(11)
    porosity = random.uniform(0.3, 0.7, ROWS)
    frequency = 10 ** random.uniform(6, np.log10(5e9), ROWS)
    conduction = random.uniform(0, 3, ROWS) * 1.7975104e10 / frequency  # 1 / (2 pi eps_0) = 1.8e10
    water = 80.0 - 1j * (conduction + random.uniform(0, 10, ROWS))
    solid = random.uniform(3, 8, ROWS) - 1j * random.uniform(0, 0.1, ROWS)
    return random.uniform(0.01, porosity), porosity, solid, water


def test_two_phases_reproduce_their_values():
    printed = table("mixing_two_phases")
    row = {name: column.values for name, column in printed.items()}
    expected = row.pop("permittivity")
    computed = sihvola.two_phases(**row)
    assert_array_less(np.abs(computed - expected), printed["permittivity"].tolerance)
    assert_allclose(
        sihvola.inclusion_fraction(computed, row["inclusion"], row["host"], row["nu"]),
        row["fraction"], rtol=1e-13,
    )  # fmt: skip


@pytest.mark.parametrize("other", [1.0, 4.7, 4.7 - 0.2j])
def test_sihvola_of_nu_two_is_bruggeman(other):
    water = 80.0 - 20j
    assert_allclose(
        sihvola.two_phases(FRACTIONS, water, other, 2.0),
        bruggeman.two_phases(FRACTIONS, water, other),
        rtol=1e-12,
    )


@pytest.mark.parametrize("nu", [0.0, 0.5, 2.0, 3.0])
def test_three_phases_of_which_one_is_missing_are_two(nu):
    expected = sihvola.two_phases(FRACTIONS, 80.0, 1.0, nu)
    computed = sihvola.to_permittivity(
        FRACTIONS, water_permittivity=80.0, porosity=1.0, solid_permittivity=4.7, nu=nu
    )
    assert_allclose(computed, expected, rtol=1e-12)


def test_bruggeman_of_one_phase_is_that_phase():
    for eps in (1.0, 4.7, 80.0):
        assert_allclose(bruggeman.real_mixture(((1.0, eps), (0.0, 30.0))), eps, rtol=1e-14)


def test_discs_in_saturated_soil_are_grains_in_water():
    """Stated as 31.904298 for porosity 0.45, solids 4.7, water 80.361814."""
    water, theta = 80.361814, 0.45
    discs = de_loor_1968.mixture(((theta, water), (0.0, 1.0)), 4.7)
    spheres = maxwell_garnett.mixture(((1 - theta, 4.7),), water)
    assert_allclose((discs, spheres), 31.904298, rtol=0, atol=5e-7)


def test_flat_inclusions_in_the_limit_are_the_discs_of_hashin_and_shtrikman():
    """Thin discs of water in solids reach the upper bound, which is grains in water."""
    flat = maxwell_garnett.mixture(((0.4, 80.0),), 4.7, 1e-9)
    assert_allclose(flat, maxwell_garnett.mixture(((0.6, 4.7),), 80.0), rtol=1e-6)


@pytest.mark.parametrize("porosity", [0.3, 0.45, 0.9])
def test_grains_that_conduct_nothing_leave_the_power_three_halves(porosity):
    assert_allclose(hanai_bruggeman.mixture(porosity, 1.0, 0.0).real, porosity**1.5, rtol=1e-12)


def test_water_alone_and_grains_alone_are_the_ends_of_saturated_soil():
    ends = hanai_bruggeman.mixture(np.array([0.0, 1.0]), 80.0 - 5j, 4.7)
    assert_allclose(ends, (4.7, 80.0 - 5j), rtol=1e-12)


def test_lossy_saturated_soil_loses_energy_and_satisfies_its_equation(lossy):
    _, porosity, solid, water = lossy
    eps = hanai_bruggeman.mixture(porosity, water, solid)
    assert np.all(eps.real > 0)
    assert np.all(eps.imag < 0)
    left = (solid - eps) / (solid - water) * (water / eps) ** (1 / 3)
    assert_allclose(left, porosity, rtol=1e-10)


def test_lossy_bruggeman_loses_energy_and_gives_the_water_content_back(lossy):
    theta, porosity, solid, water = lossy
    eps = bruggeman.complex_mixture(soil_phases(theta, porosity, solid, water))
    assert np.all(eps.real > 0)
    assert np.all(eps.imag < 0)
    back = water_content_of_spheres(eps, eps, porosity, solid, water)
    assert_allclose(back, theta, rtol=0, atol=1e-9)


def test_lossy_bruggeman_is_the_only_passive_root_of_its_cubic(lossy):
    for theta, phi, solid, water in zip(*(values[:60] for values in lossy), strict=True):
        phases = soil_phases(theta, phi, solid, water)
        cubic = np.polynomial.Polynomial([0.0])
        for i, (f, eps) in enumerate(phases):
            term = np.polynomial.Polynomial([f * eps, -f])
            for k, (_, other) in enumerate(phases):
                term = term if k == i else term * np.polynomial.Polynomial([other, 2.0])
            cubic = cubic + term
        passive = [r for r in cubic.roots() if r.real > 0 and r.imag <= 0]
        assert len(passive) == 1
        assert_allclose(bruggeman.complex_mixture(phases), passive[0], rtol=1e-8)


def test_two_ways_to_the_real_bruggeman_agree():
    phases = soil_phases(np.linspace(0.0, 0.45, 46), 0.45, 4.7, 80.0)
    assert_allclose(
        bruggeman.complex_mixture(phases).real, bruggeman.real_mixture(phases), rtol=1e-10
    )


def test_spheres_in_a_medium_are_maxwell_garnett_in_that_host():
    phases = soil_phases(0.25, 0.45, 4.7, 80.0 - 10j)
    for host in (1.0, 4.7, 80.0 - 10j):
        assert_allclose(
            spheres_in_medium(phases, host), maxwell_garnett.mixture(phases, host), rtol=1e-13
        )


def test_power_law_is_continuous_through_the_logarithmic_one():
    phases = soil_phases(0.25, 0.45, 4.7, 80.0)
    product = 4.7**0.55 * 80.0**0.25
    for exponent in (0.0, 1e-12, -1e-12):
        assert_allclose(power_law.mixture(phases, exponent), product, rtol=1e-11)


def test_an_array_of_exponents_may_hold_zero():
    soil = {"water_permittivity": 80.0, "porosity": 0.45, "solid_permittivity": 4.7}
    exponents = np.array([-1.0, 0.0, 0.5])
    eps = power_law.to_permittivity(0.25, exponent=exponents, **soil)
    assert np.all(np.diff(eps) > 0)
    assert_allclose(power_law.to_water_content(eps, exponent=exponents, **soil), 0.25, rtol=1e-13)
