"""Conductivity and what is dissolved: sodium chloride, and the practical salinity scale."""

import gsw
import numpy as np
from numpy.testing import assert_allclose, assert_array_equal, assert_array_less

from models.conductivity.practical_salinity_1978 import SALINITY, salinity
from models.conductivity.sodium_chloride import (
    CONCENTRATION,
    CONDUCTIVITY_25,
    concentration,
    conductivity_25,
)
from tests.published import table

DECISIEMENS = 0.1  # S/m
ROUNDING = 1 + 1e-9  # a value that was rounded exactly half a digit away


def agrees(computed, printed):
    assert_array_less(np.abs(computed - printed.values), printed.tolerance * ROUNDING)


def test_sodium_chloride_within_an_eighth_of_a_percent_of_measurements():
    """Half of the rows are from memory; the file says which."""
    printed = table("sodium_chloride_conductivity")
    c = printed["concentration"].values
    measured = c * printed["molar_conductivity"].values
    assert_allclose(conductivity_25(c) / DECISIEMENS, measured, rtol=1.25e-3)


def test_sodium_chloride_fit():
    printed = table("sodium_chloride_fit")
    agrees(
        conductivity_25(printed["concentration"].values) / DECISIEMENS, printed["conductivity_25"]
    )


def test_sodium_chloride_inverse():
    printed = table("sodium_chloride_inverse")
    agrees(concentration(printed["conductivity_25"].values * DECISIEMENS), printed["concentration"])
    printed = table("salt_decrement")
    agrees(concentration(printed["conductivity_25"].values * DECISIEMENS), printed["concentration"])


def test_there_and_back_is_the_identity():
    c = np.concatenate([np.geomspace(1e-12, 1e-4, 200), np.linspace(1e-4, 1.2, 2001)])
    assert_allclose(concentration(conductivity_25(c)), c, rtol=1e-12)
    sigma = np.geomspace(1e-12, CONDUCTIVITY_25.high, 2001)
    assert_allclose(conductivity_25(concentration(sigma)), sigma, rtol=1e-12)


def test_more_salt_conducts_better():
    assert np.all(np.diff(conductivity_25(np.linspace(0, CONCENTRATION.high, 500))) > 0)


def test_dilute_salt_conducts_like_its_ions():
    """126.45 S cm2/mol at infinite dilution (50.10 and 76.35 for the ions)."""
    assert_allclose(conductivity_25(1e-10) / 1e-10 / DECISIEMENS, 50.10 + 76.35, rtol=1e-5)


def test_pure_water_is_exactly_without_salt():
    assert concentration(0.0) == 0.0
    assert conductivity_25(0.0) == 0.0
    assert salinity(0.0) == 0.0


def test_outside_its_range_there_is_no_number():
    assert_array_equal(np.isnan(conductivity_25([-0.1, 0.0, 1.2, 1.3])), [1, 0, 0, 1])
    beyond = CONDUCTIVITY_25.high * 1.001
    assert_array_equal(np.isnan(concentration([-0.1, 0.0, 9.9, beyond])), [1, 0, 0, 1])
    assert np.isnan(salinity(-0.1))


def test_practical_salinity_at_printed_conductivities():
    printed = table("salt_decrement")
    computed = salinity(printed["conductivity_25"].values * DECISIEMENS)
    # Below 2 other implementations scale the extension to meet the main polynomial.
    assert_allclose(computed, printed["salinity"].values, rtol=1e-4, atol=5.1e-5)


def test_practical_salinity_against_an_independent_implementation():
    sigma = np.geomspace(1e-3, 6.2, 400)
    assert_allclose(salinity(sigma), gsw.SP_from_C(10 * sigma, 25.0, 0.0), rtol=8e-5)


def test_practical_salinity_has_no_step_and_rises():
    assert np.all(np.diff(salinity(np.linspace(0.0, 6.2, 5001))) > 0)
    change = np.diff(salinity(np.linspace(0.05, 6.2, 5001)))
    assert np.max(np.abs(np.diff(change))) < 1e-2 * np.mean(change)
    assert_allclose(salinity(6.2), SALINITY.high, atol=0.5)


def test_nan_in_nan_out_shape_kept_and_no_warning():
    odd = np.array([-1e9, -1.0, 0.0, 1e9, np.inf, -np.inf, np.nan])
    for function in (conductivity_25, concentration, salinity):
        assert np.isnan(function(np.nan))
        assert function(np.full((2, 3), 0.1)).shape == (2, 3)
        assert np.shape(function(0.1)) == ()
        function(odd)
