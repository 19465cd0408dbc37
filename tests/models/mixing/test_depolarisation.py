"""How a spheroid weakens the field within itself."""

import numpy as np
from numpy.testing import assert_allclose, assert_array_less
from scipy.integrate import quad

from models.mixing.physical.depolarisation import NEARLY_ROUND, depolarisation_factors
from tests.published import table


def test_depolarisation_factors_reproduce_the_exact_forms():
    printed = table("depolarisation")
    for computed, name in zip(
        depolarisation_factors(printed["aspect_ratio"].values), ("axial", "across"), strict=True
    ):
        assert_array_less(np.abs(computed - printed[name].values), printed[name].tolerance)


def test_a_sphere_has_three_equal_factors():
    assert_allclose(depolarisation_factors(1.0), 1 / 3, rtol=0, atol=1e-16)


def test_a_flat_disc_weakens_only_across_itself_and_a_long_needle_not_along():
    assert_allclose(depolarisation_factors(1e-7), (1.0, 0.0), atol=1e-6)
    assert_allclose(depolarisation_factors(1e7), (0.0, 0.5), atol=1e-6)


def test_factors_are_the_integral_they_are_defined_by():
    """N = r/2 times the integral of 1 / ((s + r^2)^(3/2) (s + 1)) over s from 0 (Stratton 1941)."""
    for ratio in (0.05, 0.5, 0.97, 0.975, 0.99, 1.0, 1.02, 1.026, 1.03, 3.0, 20.0):
        integral, _ = quad(
            lambda s, r=ratio: 1 / ((s + r**2) ** 1.5 * (s + 1)), 0, np.inf, epsabs=0, epsrel=1e-11
        )
        assert_allclose(depolarisation_factors(ratio)[0], ratio / 2 * integral, rtol=1e-9)


def test_series_and_closed_form_meet():
    for s in (NEARLY_ROUND, -NEARLY_ROUND):
        either_side = 1 / np.sqrt(1 - s * np.array([1 - 1e-12, 1 + 1e-12]))
        axial, _ = depolarisation_factors(either_side)
        assert_allclose(axial[0], axial[1], rtol=1e-12)


def test_longer_spheroids_weaken_less_along_their_axis():
    axial, across = depolarisation_factors(np.geomspace(1e-3, 1e3, 4001))
    assert np.all(np.diff(axial) < 0)
    assert_allclose(axial + 2 * across, 1.0, rtol=0, atol=1e-15)


def test_no_shape_no_factor():
    assert np.all(np.isnan(depolarisation_factors([np.nan, 0.0, -1.0])))
