"""Every model of water and of ice reproduces tables computed from its source by somebody else."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_less

from models.water import (
    WATER_MODELS,
    iapws_1997,
    kaatze_1989,
    matzler_2006,
    meissner_wentz_2012,
    peyman_2007,
    stogryn_1971,
    stogryn_1995,
)
from tests.published import table

GHZ = 1e9
ROUNDING = 1 + 1e-9  # a value that was rounded exactly half a digit away


def agrees(computed, printed):
    assert_array_less(np.abs(computed - printed.values), printed.tolerance * ROUNDING)


@pytest.mark.parametrize(
    "key",
    [
        "kaatze-1989",
        "turner-kneifel-cadeddu-2016",
        "wyman-ingalls-1938",
        "meissner-wentz-2012",
        "stogryn-1971",
    ],
)
def test_static_permittivity(key):
    printed = table("water_static")
    agrees(WATER_MODELS[key].static(printed["temperature"].values), printed[key])


@pytest.mark.parametrize(
    ("key", "module"), [("kaatze-1989", kaatze_1989), ("stogryn-1971", stogryn_1971)]
)
def test_relaxation_time(key, module):
    printed = table("water_relaxation_time")
    agrees(module.debye(printed["temperature"].values).relaxation_time * 1e12, printed[key])


@pytest.mark.parametrize(
    "key", ["kaatze-1989", "turner-kneifel-cadeddu-2016", "meissner-wentz-2012"]
)
def test_pure_water(key):
    printed = table("water_pure")
    real, loss = WATER_MODELS[key].parts(
        printed["gigahertz"].values * GHZ, printed["temperature"].values
    )
    agrees(real, printed[f"{key}-real"])
    agrees(loss, printed[f"{key}-loss"])


@pytest.mark.parametrize(
    ("name", "salt", "function"),
    [
        ("sodium_chloride_peyman_2007", "concentration", peyman_2007.solution_parts),
        ("sea_water_meissner_wentz_2012", "salinity", meissner_wentz_2012.sea_water_parts),
    ],
)
def test_salt_water(name, salt, function):
    printed = table(name)
    real, loss = function(
        printed["gigahertz"].values * GHZ, printed["temperature"].values, printed[salt].values
    )
    agrees(real, printed["real"])
    agrees(loss, printed["loss"])


def test_pore_water():
    printed = table("pore_water_peyman_2007")
    real, loss = WATER_MODELS["peyman-2007"].parts(
        printed["gigahertz"].values * GHZ,
        printed["temperature"].values,
        printed["conductivity_25"].values * 0.1,
    )
    agrees(real, printed["real"])
    agrees(loss, printed["loss"])


def test_iapws_1997_reproduces_the_check_values_of_the_release():
    printed = table("iapws_r8_97")
    computed = iapws_1997.static_permittivity_at(
        printed["density"].values, printed["kelvin"].values - 273.15
    )
    agrees(computed, printed["static_permittivity"])


def test_iapws_1997_at_atmospheric_pressure():
    printed = table("iapws_r8_97_atmospheric")
    computed = iapws_1997.static_permittivity(printed["temperature"].values)
    # The table has the density of IAPWS-95, which Kell (1975) misses by 4e-6.
    assert_allclose(computed, printed["static_permittivity"].values, rtol=0, atol=4e-4)


def test_conductivity_of_sea_water_by_stogryn_1995():
    printed = table("sea_water_conductivity")
    computed = stogryn_1995.conductivity(printed["salinity"].values, printed["temperature"].values)
    agrees(computed, printed["stogryn-1995"])


def test_stogryn_1995_gives_standard_sea_water_its_ratio():
    """1 at a salinity of 35 and 15 Cel; with 10004.75, as copies print, it would be 0.47."""
    at_15 = np.polynomial.polynomial.polyval(15.0, stogryn_1995.SALINITY_35)
    assert_allclose(stogryn_1995.conductivity(35.0, 15.0) / at_15, 1.0, atol=2e-5)


@pytest.mark.parametrize("gigahertz", ["0.1", "1", "10"])
def test_ice(gigahertz):
    printed = table("ice_matzler_2006")
    real, loss = matzler_2006.parts(float(gigahertz) * GHZ, printed["temperature"].values)
    agrees(real, printed["real"])
    agrees(loss, printed[f"loss_{gigahertz}"])


@pytest.mark.parametrize("key", ["peyman-2007", "meissner-wentz-2012"])
def test_drop_of_static_permittivity_by_salt(key):
    printed = table("salt_decrement")
    model = WATER_MODELS[key]
    real, _ = model.parts(1.0, 25.0, printed["conductivity_25"].values * 0.1)  # 1 Hz is static
    agrees(100 * (1 - real / model.static(25.0)), printed[key])
