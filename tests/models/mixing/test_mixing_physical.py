"""Mixing models with a physics of their own reproduce their values and their identities."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_less

from models.mixing.physical import (
    PHYSICAL,
    de_loor_1968,
    dobson_1985,
    hanai_bruggeman,
    maxwell_garnett,
    mironov_2009,
    peplinski_1995,
    power_law,
    roth_1990,
)
from tests.published import table

RANDOM_SOILS = 3000
ROUNDED_VACUUM = 2.2e-5
"""What 8.854e-12 F/m for the vacuum permittivity does to a conduction loss."""
KEYS = (
    "power-law", "roth-1990", "crim", "complex-refractive", "mironov-2009", "maxwell-garnett",
    "bruggeman", "de-loor-1968", "sihvola", "hanai-bruggeman", "dobson-1985", "peplinski-1995",
)  # fmt: skip
VARIANTS = {
    "maxwell-garnett": (
        {"host": "solid"}, {"host": "air"}, {"host": "solid", "aspect_ratio": 0.05},
        {"host": "water", "aspect_ratio": 8.0},
    ),
    "sihvola": ({"nu": 0.0}, {"nu": 1.2}, {"nu": 3.0}),
    "power-law": ({"exponent": 0.0}, {"exponent": 1e-9}, {"exponent": -0.7}, {"exponent": 1.0}),
    "de-loor-1968": ({"bound_water_content": 0.03},),
    "complex-refractive": ({"loss": 0.2},),
}  # fmt: skip
CASES = [(m, extra) for m in PHYSICAL for extra in ({}, *VARIANTS.get(m.key, ()))]


@pytest.fixture(params=CASES, ids=lambda case: f"{case[0].key} {case[1] or ''}")
def soils(request):
    """A model, soils at random it may be asked about, and a water content of each."""
    model, extra = request.param
    random = np.random.default_rng(7)
    porosity = random.uniform(0.3, 0.8, RANDOM_SOILS)
    drawn = {
        "porosity": porosity,
        "solid_permittivity": random.uniform(2.5, 9.0, RANDOM_SOILS),
        "water_permittivity": random.uniform(60.0, 88.0, RANDOM_SOILS),
        "water_loss": random.uniform(0.0, 15.0, RANDOM_SOILS),
        "frequency": 10 ** random.uniform(8, 10, RANDOM_SOILS),
        "sand": random.uniform(0.05, 0.5, RANDOM_SOILS),
        "clay": random.uniform(0.05, 0.5, RANDOM_SOILS),
        "bulk_density": random.uniform(900.0, 1900.0, RANDOM_SOILS),
    }
    known = {p.name: drawn[p.name] for p in model.parameters if p.name in drawn}
    ends = model.validity["water_content"]
    theta = random.uniform(ends.low, np.minimum(ends.high, porosity))
    return model, theta, model.bind(known | extra)


def rows(name):
    printed = table(name)
    return printed, {heading: column.values for heading, column in printed.items()}


def assert_as_printed(computed, column, besides=0.0):
    half_a_digit = column.tolerance * (1 + 1e-6)  # a 5 may have been rounded either way
    assert_array_less(np.abs(computed - column.values), half_a_digit + besides)


def stogryn_water(row):
    return 4.9 + (row["static"] - 4.9) / (1 + 1j * row["frequency"] * row["two_pi_tau"])


def test_order_of_the_catalogue():
    assert tuple(model.key for model in PHYSICAL) == KEYS


def test_power_law_reproduces_its_values():
    printed, row = rows("mixing_power_law")
    theta, expected = row.pop("water_content"), row.pop("permittivity")
    assert_as_printed(power_law.to_permittivity(theta, **row), printed["permittivity"])
    printed, row = rows("mixing_power_law_inverse")
    del expected, row["water_content"]
    computed = power_law.to_water_content(row.pop("permittivity"), **row)
    assert_as_printed(computed, printed["water_content"])


def test_roth_1990_reproduces_its_values():
    printed, row = rows("roth_1990")
    computed = roth_1990.to_water_content(
        row["permittivity"], porosity=row["porosity"], solid_permittivity=3.9,
        water_permittivity=row["water_permittivity"],
    )  # fmt: skip
    assert_as_printed(computed, printed["water_content"])


@pytest.mark.parametrize(
    ("column", "key", "geometry"),
    [
        ("spheres_in_solid", "maxwell-garnett", {"host": "solid"}),
        ("spheres_in_air", "maxwell-garnett", {"host": "air"}),
        ("spheres_in_water", "maxwell-garnett", {"host": "water"}),
        ("discs_in_solid", "maxwell-garnett", {"host": "solid", "aspect_ratio": 0.1}),
        ("needles_in_solid", "maxwell-garnett", {"host": "solid", "aspect_ratio": 10.0}),
        ("bruggeman", "bruggeman", {}),
        ("bruggeman", "sihvola", {"nu": 2.0}),
        ("spheres_in_air", "sihvola", {"nu": 0.0}),
        ("de_loor", "de-loor-1968", {}),
    ],
)
def test_geometries_reproduce_their_values(column, key, geometry):
    printed, row = rows("mixing_geometries")
    model = PHYSICAL[KEYS.index(key)]
    soil = {n: row[n] for n in ("porosity", "solid_permittivity", "water_permittivity")}
    computed = model.to_permittivity(row["water_content"], **model.bind(soil | geometry))
    assert_as_printed(computed, printed[column])


@pytest.mark.parametrize(
    ("name", "column", "key", "geometry"),
    [
        ("mixing_geometries_inverse", "solid", "maxwell-garnett", {"host": "solid"}),
        ("mixing_geometries_inverse", "air", "maxwell-garnett", {"host": "air"}),
        ("mixing_geometries_inverse", "water", "maxwell-garnett", {"host": "water"}),
        ("mixing_effective_fields_inverse", "bruggeman", "bruggeman", {}),
        ("mixing_effective_fields_inverse", "de_loor", "de-loor-1968", {}),
    ],
)
def test_geometries_reproduce_their_water_contents(name, column, key, geometry):
    printed, row = rows(name)
    model = PHYSICAL[KEYS.index(key)]
    soil = {"porosity": 0.45, "solid_permittivity": 4.7, "water_permittivity": 80.361814}
    computed = model.to_water_content(row["permittivity"], **model.bind(soil | geometry))
    assert_as_printed(computed, printed[column])


def test_discs_of_bound_water_reproduce_their_value():
    printed, row = rows("mixing_bound_water")
    theta, bound = row["water_content"], row["bound_water_content"]
    discs = ((theta - bound, 80.361814), (bound, 35 - 15j), (0.45 - theta, 1.0))
    eps = de_loor_1968.mixture(discs, 4.7)
    assert_as_printed(eps.real, printed["real"])
    assert_as_printed(-eps.imag, printed["loss"])


def test_hanai_reproduces_its_values():
    printed, row = rows("hanai_1960")
    water = row["water_real"] - 1j * row["water_loss"]
    eps = hanai_bruggeman.mixture(row["host_fraction"], water, row["solid_permittivity"])
    assert_as_printed(eps.real, printed["real"])
    assert_as_printed(-eps.imag, printed["loss"])
    printed, row = rows("hanai_1960_inverse")
    del row["host_fraction"]
    computed = hanai_bruggeman.to_water_content(row.pop("permittivity"), **row)
    assert_as_printed(computed, printed["host_fraction"])


@pytest.mark.parametrize(
    ("name", "model"), [("dobson_1985", dobson_1985), ("peplinski_1995", peplinski_1995)]
)
def test_semi_empirical_models_reproduce_their_values(name, model):
    printed, row = rows(name)
    soil = {n: row[n] for n in ("sand", "clay", "bulk_density", "particle_density")}
    water = stogryn_water(row)
    eps = model.complex_permittivity(
        row["water_content"], row["frequency"], water_permittivity=water, **soil
    )
    assert_as_printed(eps.real, printed["real"])
    assert_as_printed(-eps.imag, printed["loss"])
    back = model.to_water_content(eps.real, water_permittivity=water.real, **soil)
    assert_allclose(back, row["water_content"], rtol=1e-12)


def test_sandy_soil_has_no_negative_conductivity():
    assert dobson_1985.effective_conductivity(0.9, 0.05, 1400.0) == 0.0
    assert peplinski_1995.effective_conductivity(0.95, 0.0, 1000.0) == 0.0
    eps = dobson_1985.complex_permittivity(
        0.2, 5e9, water_permittivity=73.9 - 20j, sand=0.9, clay=0.05, bulk_density=1400.0,
        particle_density=2650.0,
    )  # fmt: skip
    assert np.isfinite(eps)
    assert eps.imag < 0


def test_mironov_2009_reproduces_its_values():
    printed, row = rows("mironov_2009")
    soil = {"frequency": row["frequency"], "clay": row["clay"]}
    eps = mironov_2009.complex_permittivity(
        row["water_content"], row["frequency"], clay=row["clay"]
    )
    rounded = ROUNDED_VACUUM * row["loss"]
    assert_as_printed(eps.real, printed["real"], besides=rounded)
    assert_as_printed(-eps.imag, printed["loss"], besides=rounded)
    back = mironov_2009.water_content_from_real_part(eps.real, **soil)
    assert_allclose(back, row["water_content"], rtol=1e-12)


def test_mironov_2009_finds_water_content_from_the_index():
    printed, row = rows("mironov_2009_inverse")
    apparent = (np.hypot(row["real"], row["loss"]) + row["real"]) / 2
    theta = mironov_2009.to_water_content(apparent, frequency=row["frequency"], clay=row["clay"])
    assert_as_printed(theta, printed["water_content"], besides=ROUNDED_VACUUM * theta)


def test_two_fits_by_different_authors_agree():
    """Within 0.8 % of the real part, and 18.2 % of the loss."""
    _, row = rows("mironov_2013")
    eps = mironov_2009.complex_permittivity(row["water_content"], 1.4e9, clay=row["clay"])
    assert_allclose(eps.real, row["real"], rtol=0.008)
    assert_allclose(-eps.imag, row["loss"], rtol=0.182)


def test_every_inverse_is_exact_in_any_soil(soils):
    model, theta, known = soils
    there = model.to_permittivity(theta, **known)
    answered = np.isfinite(there)
    assert answered.all() or (model.key == "complex-refractive" and answered.mean() > 0.99)
    back = model.to_water_content(there, **known)
    assert_allclose(back[answered], theta[answered], rtol=0, atol=1e-12)
    assert np.all(np.isnan(back[~answered]))


def test_wetter_is_higher_in_any_soil(soils):
    model, theta, known = soils
    drier, wetter = (model.to_permittivity(theta * by, **known) for by in (1.0, 1.01))
    both = np.isfinite(drier) & np.isfinite(wetter)
    assert np.all(drier[both] < wetter[both])


def test_what_is_no_permittivity_is_no_number(soils):
    model, theta, known = soils
    for impossible in (np.nan, -5.0, -1e9):
        assert np.all(np.isnan(model.to_water_content(np.full_like(theta, impossible), **known)))
    assert np.all(np.isnan(model.to_permittivity(np.full_like(theta, np.nan), **known)))


def test_spheroids_of_ratio_one_are_spheres():
    phases = ((0.3, 80.0 - 10j), (0.25, 1.0))
    field = sum(f * (eps - 4.7) / (eps + 2 * 4.7) for f, eps in phases)
    expected = 4.7 * (1 + 2 * field) / (1 - field)
    assert_allclose(maxwell_garnett.mixture(phases, 4.7, 1.0), expected, rtol=1e-14)
