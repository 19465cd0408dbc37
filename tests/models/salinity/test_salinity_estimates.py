"""What is estimated from texture and clay, and the saturated paste extract."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_less

from models.errors import UnknownName
from models.salinity.saturation_extract import (
    from_saturated,
    paste_water_content,
    to_extract,
    to_pore_water,
    to_saturated,
)
from models.salinity.texture_defaults import (
    CLASSES,
    clay_line,
    estimates,
    saturation_line,
    saturation_percentage,
    surface_conductivity,
    surface_spread,
)
from models.soil import TEXTURES
from tests.published import table

DECISIEMENS, PERCENT = 0.1, 0.01
ROUNDING = 1 + 1e-9  # a value that was rounded exactly half a digit away
WITHOUT_TABLE = {"silt", "sandy-clay"}


def agrees(computed, printed):
    assert_array_less(np.abs(computed - printed.values), printed.tolerance * ROUNDING)


def test_clay_gives_saturation_percentage_and_surface_conductivity():
    printed = table("texture_conduction")
    clay = printed["clay"].values
    agrees(saturation_percentage(clay) / PERCENT, printed["saturation_percentage"])
    agrees(surface_conductivity(clay) / DECISIEMENS, printed["surface_conductivity"])


def test_two_published_lines_of_surface_conductivity():
    printed = table("surface_conductivity_lines")
    clay = printed["clay"].values
    agrees(clay_line(clay) / DECISIEMENS, printed["by_clay"])
    agrees(saturation_line(saturation_percentage(clay)) / DECISIEMENS, printed["by_saturation"])


def test_surface_conductivity_is_the_mean_of_both_in_heavy_clay():
    clay = np.array([0.45, 0.60])
    mean = (clay_line(clay) + saturation_line(saturation_percentage(clay))) / 2
    assert_allclose(surface_conductivity(clay), mean, rtol=1e-14)
    assert_allclose(surface_conductivity(0.60) / DECISIEMENS, (1.359 + 0.950) / 2, atol=1e-3)


def test_surface_conductivity_has_no_step_and_never_vanishes():
    clay = np.linspace(0, 1, 10_001)
    surface = surface_conductivity(clay)
    assert np.all(surface > 0)
    assert np.all(np.diff(surface) >= 0)
    assert np.max(np.diff(surface)) < 3e-5
    assert_allclose(surface_spread([0.0, 0.35, 0.36, 0.6]), [0.1, 0.1, 0.25, 0.25])
    assert np.isnan(surface_conductivity(np.nan))
    assert np.isnan(surface_spread(np.nan))


def test_every_texture_class_says_how_it_conducts():
    assert set(CLASSES) == set(TEXTURES)
    assert all(own.source.note for own in CLASSES.values())


def test_exponents_of_archie_are_the_middle_of_their_ranges():
    printed = table("texture_archie_exponents")
    low, high = printed["low"].values, printed["high"].values
    listed = ("sand", "loamy-sand", "sandy-loam", "loam", "silt-loam", "sandy-clay-loam",
              "clay-loam", "silty-clay-loam", "silty-clay", "clay", "peat")  # fmt: skip
    assert set(listed) == set(CLASSES) - WITHOUT_TABLE
    assert_allclose([CLASSES[key].cementation for key in listed], (low + high) / 2)
    rectangle = (high - low) / np.sqrt(12)
    assert_allclose([CLASSES[key].cementation_u for key in listed], rectangle, atol=0.006)


def test_transmission_of_classes():
    printed = table("texture_transmission")
    listed = ("sand", "loamy-sand", "sandy-loam", "loam", "silt-loam", "sandy-clay-loam",
              "clay-loam", "silty-clay-loam", "silty-clay", "clay")  # fmt: skip
    pairs = np.array([CLASSES[key].transmission for key in listed])
    assert_allclose(pairs, np.stack([printed["slope"].values, printed["intercept"].values], 1))


def test_transmission_of_loams_spreads_as_much_as_three_loams_do():
    printed = table("pore_water_rhoades_1976_soils")
    for head, u in zip(("slope", "intercept"), CLASSES["loam"].transmission_u, strict=True):
        assert_allclose(u, np.std(printed[head].values[:3], ddof=1), atol=0.002)


def test_estimates_of_a_loam():
    found = estimates("loam", 0.20, 0.04)
    assert set(found) == {
        "cementation_exponent", "transmission_slope", "transmission_intercept",
        "surface_conductivity", "saturation_percentage",
    }  # fmt: skip
    surface, paste = found["surface_conductivity"], found["saturation_percentage"]
    assert_allclose(surface.value, 0.04391, rtol=1e-12)
    assert_allclose(surface.standard_uncertainty, np.hypot(0.1 * 0.04391, 0.23 * 0.04))
    assert_allclose(paste.value, 0.4245)
    assert_allclose(paste.standard_uncertainty, np.hypot(0.2 * 0.4245, 0.76 * 0.04))
    assert surface.origin == "clay"
    assert found["transmission_slope"].origin == "texture loam"


def test_estimates_of_what_is_known_only():
    assert estimates(None, None) == {}
    assert set(estimates(None, 0.1)) == {"surface_conductivity", "saturation_percentage"}
    assert set(estimates("peat", None)) == {"cementation_exponent"}
    with pytest.raises(UnknownName):
        estimates("mud", 0.1)


def test_extract_of_published_balances():
    printed = table("saturation_extract")
    extract = to_extract(
        DECISIEMENS * printed["pore_water"].values, water_content=printed["water_content"].values,
        saturation_percentage=printed["saturation_percentage"].values,
        bulk_density=printed["bulk_density"].values,
    )  # fmt: skip
    agrees(extract / DECISIEMENS, printed["extract"])
    assert_allclose(paste_water_content(0.45, 1350.0), 0.6075)


def test_at_half_the_water_of_the_paste_the_extract_is_half_as_salty():
    paste = {"saturation_percentage": 0.4245, "bulk_density": 1400.0}
    theta = 0.4245 * 1400 / 1000 / 2
    assert_allclose(to_extract(0.4, water_content=theta, **paste), 0.2, rtol=1e-14)


def test_extract_there_and_back():
    theta = np.linspace(0.05, 0.5, 50)[:, None]
    paste = {"saturation_percentage": np.linspace(0.2, 3, 40), "bulk_density": 1300.0}
    extract = to_extract(0.4, water_content=theta, **paste)
    assert_allclose(to_pore_water(extract, water_content=theta, **paste), 0.4, rtol=1e-14)


def test_no_salt_is_lost_on_the_way_to_the_extract():
    """Three layers hold 1.0112 kg/m2 at 640 mg/L per dS/m, whichever water it is counted in."""
    theta, pore_water = np.array([0.25, 0.30, 0.28]), np.array([3.0, 5.0, 7.0])
    depth = np.array([0.2, 0.3, 0.5])
    paste = {"saturation_percentage": [0.35, 0.42, 0.6], "bulk_density": [1450.0, 1400.0, 1380.0]}
    extract = to_extract(DECISIEMENS * pore_water, water_content=theta, **paste)
    water = paste_water_content(**paste)
    salt = 0.640 * water * extract / DECISIEMENS * depth
    assert_allclose(salt, [0.096, 0.288, 0.6272], rtol=1e-12)
    assert_allclose(salt.sum(), 1.0112, rtol=1e-12)


def test_dilution_of_a_worked_example():
    """A public text: water content 0.1, pore water 0.7 dS/m, density 1.5: 0.162 dS/m saturated.

    It lies between the porosity as the text rounds it and the porosity itself.
    """
    rounded = to_saturated(0.7, water_content=0.1, porosity=0.43)
    exact = to_saturated(0.7, water_content=0.1, porosity=1 - 1.5 / 2.65)
    assert_allclose(rounded, 0.16279, atol=5e-6)
    assert_allclose(exact, 0.16130, atol=5e-6)
    assert exact < 0.162 < rounded
    assert_allclose(from_saturated(rounded, water_content=0.1, porosity=0.43), 0.7, rtol=1e-14)


def test_no_water_no_extract_and_no_warning():
    odd = np.array([-1.0, 0.0, np.nan, np.inf])
    paste = {"saturation_percentage": 0.4, "bulk_density": 1400.0}
    for function in (to_extract, to_pore_water):
        assert np.all(np.isnan(function(0.4, water_content=odd[:3], **paste)))
        function(odd, water_content=0.3, **paste)
        function(0.4, water_content=odd, saturation_percentage=0.0, bulk_density=odd[:, None])
    for function in (to_saturated, from_saturated):
        assert np.all(np.isnan(function(0.4, water_content=odd[:3], porosity=0.4)))
        assert np.shape(function(np.full((2, 3), 0.4), water_content=0.3, porosity=0.4)) == (2, 3)
