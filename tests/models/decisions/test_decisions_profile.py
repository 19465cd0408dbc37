"""Profiles, salt, classes and defaults of decisions: sums done apart, propagation, tables."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from uncertainties import ufloat

from models.decisions import allen_table_19 as limits
from models.decisions import leaching
from models.decisions.outcome import within
from models.decisions.profile import (
    SALT_OF_CONDUCTIVITY,
    SALT_OF_CONDUCTIVITY_U,
    Sensors,
    profile_of,
    salt_of,
)
from models.decisions.salinity_class import SOIL_SCHEMES, WATER_SCHEME, class_probabilities
from models.decisions.terms import TERMS
from models.decisions.yield_response import curved_response
from models.errors import ParameterError, UnknownName
from models.soil import TEXTURES
from models.units import UNITS

NO = np.full(3, np.nan)


def sensors(**more):
    given = {"depth": [0.1, 0.3, 0.7], "water_content": [0.25, 0.30, 0.28],
             "water_content_u": np.zeros(3), "water_content_shared": np.zeros(3),
             "pore_water_conductivity": [0.3, 0.5, 0.7],
             "pore_water_conductivity_u": np.zeros(3), "temperature": NO, **more}  # fmt: skip
    return Sensors(**{name: np.asarray(values, float) for name, values in given.items()})


def test_layers_of_sensors_in_any_order():
    order = [2, 0, 1]
    one = profile_of(sensors(), 1.0, rule="layer", extended=True)
    turned = Sensors(**{name: getattr(sensors(), name)[order] for name in Sensors.__slots__})
    other = profile_of(turned, 1.0, rule="layer", extended=True)
    assert_allclose(one.thickness, [0.2, 0.3, 0.5])
    assert_allclose(other.thickness, one.thickness)
    assert one.water_content == pytest.approx(0.28)
    assert other.water_content == one.water_content


def test_a_profile_ends_at_its_deepest_sensor_unless_told_to_go_on():
    short = profile_of(sensors(), 1.0, rule="layer", extended=False)
    assert (short.reached, short.coverage_fraction) == (0.7, 0.7)
    assert_allclose(short.storage(probability=0.95).value, 0.05 + 0.09 + 0.056)
    enough = profile_of(sensors(), 0.6, rule="trapezoid", extended=False)
    assert enough.coverage_fraction == 1.0


def test_a_sensor_at_the_surface_alone_has_no_depth_to_speak_for():
    single = {name: getattr(sensors(), name)[:1] for name in Sensors.__slots__}
    top = Sensors(**{**single, "depth": np.zeros(1)})
    alone = profile_of(top, 0.5, rule="layer", extended=False)
    assert alone.reached == 0.0
    assert np.isnan(alone.water_content)
    assert profile_of(top, 0.5, rule="layer", extended=True).water_content == pytest.approx(0.25)


def test_the_uncertainty_of_a_mean_has_two_parts():
    u, shared = np.array([0.02, 0.025, 0.03]), np.array([0.01, 0.015, 0.02])
    found = profile_of(sensors(water_content_u=u, water_content_shared=shared), 1.0,
                       rule="layer", extended=True)  # fmt: skip
    weights = np.array([0.2, 0.3, 0.5])
    apart = np.sum(weights**2 * (u**2 - shared**2))
    assert found.water_content_u == pytest.approx(np.sqrt(apart + np.sum(weights * shared) ** 2))


def test_the_uncertainty_of_salt_is_that_of_linear_propagation():
    """Oracle: a common error of the water contents, one of the conductivities, one of the rule."""
    shared, own = np.array([0.01, 0.015, 0.02]), np.array([0.005, 0.01, 0.01])
    salt_u = np.array([0.03, 0.04, 0.05])
    given = sensors(water_content_u=np.hypot(shared, own), water_content_shared=shared,
                    pore_water_conductivity_u=salt_u)  # fmt: skip
    found = salt_of(profile_of(given, 1.0, rule="layer", extended=True), probability=0.95)
    common, salt = ufloat(0, 1), ufloat(0, 1)
    rule = ufloat(SALT_OF_CONDUCTIVITY, SALT_OF_CONDUCTIVITY_U)
    thickness = (0.2, 0.3, 0.5)
    water = [theta + common * float(s) + ufloat(0, o)
             for theta, s, o in zip((0.25, 0.30, 0.28), shared, own, strict=True)]  # fmt: skip
    conductivity = [c + salt * float(u) for c, u in zip((0.3, 0.5, 0.7), salt_u, strict=True)]
    carried = sum(w * c * d for w, c, d in zip(water, conductivity, thickness, strict=True))
    whole = sum(w * d for w, d in zip(water, thickness, strict=True))
    assert found.storage.value[0] == pytest.approx(1.0112)
    assert found.storage.standard_uncertainty[0] == pytest.approx(
        (rule * carried).std_dev, rel=1e-3
    )
    mean = carried / whole
    assert found.conductivity.value[0] == pytest.approx(0.564286, abs=5e-7)
    assert found.conductivity.standard_uncertainty[0] == pytest.approx(mean.std_dev, rel=1e-3)


def test_what_does_not_count_does_no_harm():
    deep = sensors(water_content=[0.25, 0.3, np.nan], temperature=[5, 4, -2],
                   pore_water_conductivity=[0.3, 0.5, np.nan])  # fmt: skip
    found = profile_of(deep, 0.3, rule="trapezoid", extended=False)
    assert np.isfinite(found.water_content)
    assert not found.frozen
    assert np.isfinite(salt_of(found, probability=0.95).storage.value[0])
    assert profile_of(deep, 1.0, rule="layer", extended=True).frozen


def test_a_profile_that_cannot_be_is_refused():
    with pytest.raises(ParameterError, match="one depth"):
        profile_of(sensors(depth=[0.1, 0.1, 0.3]), 1.0, rule="layer", extended=True)
    with pytest.raises(UnknownName, match="trapezoid"):
        profile_of(sensors(), 1.0, rule="mean", extended=True)


def test_defaults_by_texture_are_the_middle_of_a_printed_range():
    """FAO-56 (1998), Table 19, from a secondary copy: silt loam .22-.36 and .09-.21."""
    value, u = limits.field_capacity("silt-loam")
    assert (value, u) == (pytest.approx(0.29), pytest.approx(0.14 / 12**0.5))
    value, u = limits.wilting_point("silt-loam")
    assert (value, u) == (pytest.approx(0.15), pytest.approx(0.12 / 12**0.5))


@pytest.mark.parametrize("texture", limits.CLASSES)
def test_a_class_holds_water_between_its_limits(texture):
    """Middle of the printed available range, mm/m; that of the difference, from memory."""
    printed = {"sand": 75, "loamy-sand": 85, "sandy-loam": 120, "loam": 130, "silt-loam": 140,
               "silt": 150, "silty-clay-loam": 130, "silty-clay": 130, "clay": 140}  # fmt: skip
    assert texture in TEXTURES
    between = limits.field_capacity(texture)[0] - limits.wilting_point(texture)[0]
    assert between * 1000 == pytest.approx(printed[texture], abs=20)


@pytest.mark.parametrize("scheme", [*SOIL_SCHEMES.values(), WATER_SCHEME], ids=lambda s: s.key)
def test_the_probabilities_of_a_scheme_are_whole(scheme):
    assert len(scheme.classes) == len(scheme.edges) + 1
    assert list(scheme.edges) == sorted(scheme.edges)
    shares = class_probabilities(np.array([0.3, 0.3, np.nan]), np.array([0.1, 0.0, 0.1]), scheme)
    assert_allclose(shares[:2].sum(axis=1), 1.0)
    assert np.all(shares[:2] >= 0)
    assert np.isnan(shares[2]).all()


def test_water_to_apply_is_that_of_draws():
    """Oracle: draws of all three; the requirement is 0.25."""
    rng = np.random.default_rng(4)
    n = 200_000
    used, water, extract = (
        rng.normal(0.5, 0.02, n),
        rng.normal(0.2, 0.01, n),
        rng.normal(0.2, 0.01, n),
    )
    draws = used / (1 - water / (5 * extract - water))
    found = leaching.water_for((0.5, 0.02), (0.2, 0.01), (0.2, 0.01))
    assert_allclose(found.value, 0.5 / 0.75)
    assert_allclose(found.standard_uncertainty, draws.std(), rtol=0.02)


def test_salt_after_long_use_is_that_of_draws():
    rng = np.random.default_rng(6)
    n = 200_000
    water, share = rng.normal(0.1, 0.005, n), rng.normal(0.3, 0.02, n)
    bottom = water / share
    found = leaching.after_long_use((0.1, 0.005), np.nan, (0.3, 0.02))
    assert_allclose(found.soil_water[-1].value, 0.1 / 0.3)
    assert_allclose(found.soil_water[-1].standard_uncertainty, bottom.std(), rtol=0.03)
    assert_allclose(found.factor.value, 1.0386, atol=5e-5)  # computed apart


def test_the_band_of_the_curve_is_that_of_draws():
    rng = np.random.default_rng(8)
    n = 200_000
    c, a, b = rng.normal(6, 0.3, n), rng.normal(2.5, 0.3, n), rng.normal(0.099, 0.01, n)
    half, s = 0.988 * (0.5 / b + a) - 0.252, 1.52 * b
    draws = 1 / (1 + (c / half) ** np.exp(s * half))
    found = curved_response((0.6, 0.03), threshold=(0.25, 0.03), slope=(0.99, 0.1))
    assert_allclose(found.standard_uncertainty, draws.std(), rtol=0.03)
    assert_allclose([found.lower[0], found.upper[0]], np.quantile(draws, [0.025, 0.975]), atol=0.01)


@pytest.mark.parametrize("term", TERMS.values(), ids=lambda term: term.name)
def test_a_term_has_a_unit_a_meaning_and_lookalikes_of_its_kind(term):
    assert term.meaning
    assert term.unit in UNITS
    assert {UNITS[code].dimension for code in term.lookalikes} <= {term.dimension, "ratio"}


def test_an_interval_of_nothing_is_nothing():
    found = within(np.array([np.nan]), np.array([np.nan]), low=0.0)
    assert np.isnan([found.value, found.standard_uncertainty, found.lower, found.upper]).all()
