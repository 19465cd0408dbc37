"""Factors to 25 Cel against printed tables, sea water, and standards they are not meant for."""

import gsw
import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_less

from models.conductivity import DEFAULT_COMPENSATION, TEMPERATURE_COMPENSATIONS
from models.conductivity.corwin_lesch_2005 import printed_factor
from tests.published import table

DEFAULT = TEMPERATURE_COMPENSATIONS[DEFAULT_COMPENSATION]
ROUNDING = 1 + 1e-9  # a value that was rounded exactly half a digit away


def agrees(computed, printed):
    assert_array_less(np.abs(computed - printed.values), printed.tolerance * ROUNDING)


def test_iso_7888_reproduces_every_printed_digit():
    printed = table("conductivity_factor_iso_7888")
    factor = TEMPERATURE_COMPENSATIONS["iso-7888"].factor(printed["temperature"].values)
    assert_allclose(factor, printed["factor"].values, rtol=1e-14)


def test_iso_7888_is_smooth_between_the_printed_degrees():
    """A cubic in the exponent, fitted to the table apart from this package to 0.06 %."""
    temperature = np.arange(0.0, 36.0, 0.1)
    x = temperature - 25
    fitted = np.exp(x * (-2.10140e-2 + x * (1.53979e-4 - 1.87559e-6 * x)))
    factor = TEMPERATURE_COMPENSATIONS["iso-7888"].factor(temperature)
    assert_allclose(factor, fitted, rtol=1e-3)


def test_corwin_lesch_2005():
    printed = table("conductivity_factor_formulas")
    temperature = printed["temperature"].values
    agrees(printed_factor(temperature), printed["corwin-lesch-2005-as-printed"])
    agrees(DEFAULT.factor(temperature), printed["corwin-lesch-2005"])


def test_corwin_lesch_2005_as_printed_is_not_quite_1_at_25_degrees():
    assert_allclose(printed_factor(25.0), 0.999437, atol=5e-7)


@pytest.mark.parametrize("coefficient", [0.0191, 0.02])
def test_linear(coefficient):
    printed = table("conductivity_factor_formulas")
    factor = TEMPERATURE_COMPENSATIONS["linear"].factor(
        printed["temperature"].values, coefficient=coefficient
    )
    agrees(factor, printed[f"linear-{coefficient}"])


def test_default_agrees_with_the_table_for_soil_solutions():
    """USDA Handbook 60 (1954), table 15, from memory."""
    printed = table("conductivity_factor_handbook_60")
    temperature = printed["temperature"].values
    used = (temperature >= 5) & (temperature <= 40)
    assert_allclose(DEFAULT.factor(temperature[used]), printed["factor"].values[used], rtol=0.0030)


@pytest.mark.parametrize("salinity", [1.0, 5.0])
def test_default_agrees_with_diluted_sea_water(salinity):
    temperature = np.arange(5.0, 41.0)
    at_25, at_t = (gsw.C_from_SP(salinity, t, 0.0) for t in (25.0, temperature))
    assert_allclose(DEFAULT.factor(temperature), at_25 / at_t, rtol=0.0052)


def test_potassium_chloride_standards_are_not_soil_water():
    """Their factor at 5 Cel is 2 % lower: nobody should tune the soil formula to them."""
    printed = table("potassium_chloride_standards")
    cold, reference = (np.flatnonzero(printed["temperature"].values == t)[0] for t in (5, 25))
    for strength in ("hundredth", "tenth"):
        standard = printed[strength].values
        ratio = standard[reference] / standard[cold] / DEFAULT.factor(5.0)
        assert 0.965 < ratio < 0.985


def test_sea_water_is_not_soil_water():
    """Undiluted, its factor at 5 Cel is 1.6 % lower."""
    factor = gsw.C_from_SP(35.0, 25.0, 0.0) / gsw.C_from_SP(35.0, 5.0, 0.0)
    assert_allclose(factor / DEFAULT.factor(5.0), 0.984, atol=0.002)
