"""Rhoades et al. (1989): one positive root, its limits, and what is estimated from clay."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_less

from models.salinity.rhoades_1989 import RHOADES_1989, to_bulk, to_pore_water
from tests.models.salinity.pore_water_soils import loam
from tests.published import table

DECISIEMENS = 0.1  # S/m
ROWS = 3000


@pytest.fixture(scope="module")
def soils():
    """Volume fractions and surface conductivities at random, with some water that moves."""
    random = np.random.default_rng(89)
    theta = random.uniform(0.05, 0.55, ROWS)
    return {
        "water_content": theta,
        "clay": 0.2, "bulk_density": 1400.0, "particle_density": 2650.0,
        "solid_content": random.uniform(0.3, 0.7, ROWS),
        "immobile_share": random.uniform(0.3, 0.95, ROWS),
        "surface_conductivity": random.uniform(0.001, 0.15, ROWS),
    }  # fmt: skip


def fractions(soil):
    """The equation's letters: solids A, immobile B and mobile water C, surface S."""
    immobile = soil["immobile_share"] * soil["water_content"]
    mobile = soil["water_content"] - immobile
    return soil["solid_content"], immobile, mobile, soil["surface_conductivity"]


def agrees(computed, printed):
    assert_array_less(np.abs(computed - printed.values), printed.tolerance)


@pytest.mark.parametrize("direction", ["", "_inverse"])
def test_reproduces_its_values(direction):
    printed = table(f"pore_water_rhoades_1989{direction}")
    row = {name: column.values for name, column in printed.items()}
    clay_only = {"clay": 0.20, "bulk_density": 1400.0, "particle_density": 2650.0}
    explicit = clay_only | {
        "solid_content": row["solid_content"],
        "immobile_share": row["immobile"] / row["water_content"],
        "surface_conductivity": DECISIEMENS * row["surface"],
    }
    given, wanted = ("bulk", "pore_water") if direction else ("pore_water", "bulk")
    function = to_pore_water if direction else to_bulk
    measured, theta = DECISIEMENS * row[given], row["water_content"]
    answer = function(measured, water_content=theta, **clay_only)
    agrees(answer / DECISIEMENS, printed[wanted])
    by_fractions = function(measured, water_content=theta, **explicit)
    assert_allclose(by_fractions, answer, rtol=3e-8)  # the fractions are rounded to eight digits


def test_exactly_one_root_is_positive_and_it_is_the_answer(soils):
    bulk = np.random.default_rng(90).uniform(0.001, 0.5, ROWS)
    a, b, c, s = fractions(soils)
    answers = to_pore_water(bulk, **soils)
    quadratic = np.stack([
        a * c, (a + b) ** 2 * s + b * c * s - a * bulk, -b * s * bulk,
    ], axis=1)  # fmt: skip
    for coefficients, answer in zip(quadratic, answers, strict=True):
        roots = np.roots(coefficients)
        assert np.all(np.isreal(roots))
        positive = roots[roots > 0]
        assert positive.size == 1
        assert_allclose(answer, positive[0], rtol=1e-9)
    assert_allclose(to_bulk(answers, **soils), bulk, rtol=6e-13)


def test_there_and_back_over_every_salinity(soils):
    pore_water = np.geomspace(1e-6, 100, ROWS)
    assert_allclose(to_pore_water(to_bulk(pore_water, **soils), **soils), pore_water, rtol=1e-11)


def test_saline_water_conducts_through_the_mobile_part_alone(soils):
    a, b, c, s = fractions(soils)
    low, high = 1e5, 2e5
    slope = (to_bulk(high, **soils) - to_bulk(low, **soils)) / (high - low)
    assert_allclose(slope, c, rtol=1e-8)
    assert_allclose(to_bulk(1e4, **soils) - 1e4 * c, (a + b) ** 2 * s / a, rtol=1e-4)


def test_fresh_water_conducts_through_both_parts(soils):
    a, b, c, _ = fractions(soils)
    assert_allclose(to_bulk(1e-9, **soils) / 1e-9, (a + b) ** 2 / b + c, rtol=1e-5)


def test_sensitivity_to_bulk_conductivity(soils):
    a, b, c, s = fractions(soils)
    bulk, step = 0.1, 1e-6
    x = to_pore_water(bulk, **soils)
    linear = (a + b) ** 2 * s + b * c * s - a * bulk
    wide = to_pore_water(bulk + step, **soils) - to_pore_water(bulk - step, **soils)
    assert_allclose(wide / (2 * step), (a * x + b * s) / (2 * a * c * x + linear), rtol=1e-5)


def test_no_conduction_no_salt(soils):
    assert np.all(to_pore_water(0.0, **soils) == 0)
    assert np.all(to_bulk(0.0, **soils) == 0)


def test_soil_without_mobile_water_conducts_only_so_well():
    """Below 0.0305 m3/m3 every drop is immobile: no salt takes bulk conductivity further."""
    soil = loam("rhoades-1989", water_content=0.025)
    solid = 1400 / 2650
    ceiling = (solid + 0.025) ** 2 * 0.04391 / solid
    assert_allclose(to_bulk(1e9, **soil), ceiling, rtol=1e-6)
    salty = np.array([0.01, 0.3])
    assert_allclose(to_pore_water(to_bulk(salty, **soil), **soil), salty, rtol=1e-11)
    assert np.isnan(to_pore_water(ceiling * 1.001, **soil))


def test_all_water_is_immobile_up_to_its_threshold_and_no_more_than_there_is():
    dry, moist = loam("rhoades-1989", water_content=0.0304), loam("rhoades-1989",
                                                                  water_content=0.0306)  # fmt: skip
    assert_allclose(to_bulk(2e9, **dry), to_bulk(1e9, **dry), rtol=1e-6)
    assert to_bulk(2e9, **moist) > 1.9 * to_bulk(1e9, **moist)


def test_clean_sand_has_some_surface_still():
    """The clay line is below zero under 0.9 % clay."""
    soil = loam("rhoades-1989", clay=0.0)
    assert 0 < to_pore_water(0.01, **soil) < 1
    assert RHOADES_1989.validity["clay"].low == 0.0
