"""The aperture: its integral done by brute force, its limits, and the way back."""

import numpy as np
import pytest
from scipy.constants import speed_of_light

from models.errors import ParameterError
from models.reflection.tip.aperture import MODELS, Aperture, Geometry
from tests.models.reflection.sweep_records import TIP, WIDE, debye

MEDIA = np.array([1.0, 2.1, 12 - 1j, 33 - 14j, 78 - 20j, 40 - 60j])


def made(model):
    return Aperture(model, TIP, (1.5e-4, 2.7e-6) if model == "fitted" else (0.0, 0.0))


def summed(eps, frequency, points=110):
    """The integral of cos(phi) (exp(-jkR) - 1) / R over both radii and the angle, per M0."""
    nodes, weights = np.polynomial.legendre.leggauss(points)
    radius = 0.5 * (TIP.inner + TIP.outer) + 0.5 * TIP.width * nodes
    radial = 0.5 * TIP.width * weights
    angle, angular = 0.5 * np.pi * (nodes + 1), 0.5 * np.pi * weights
    a, b = radius[:, None, None], radius[:, None]
    distance = np.sqrt(a**2 + b**2 - 2 * a * b * np.cos(angle))
    k = 2 * np.pi * frequency * np.sqrt(eps) / speed_of_light
    kernel = np.cos(angle) * (np.exp(-1j * k * distance) - 1) / distance
    first = 4 * (TIP.inner + TIP.outer) * (_elliptic(TIP) - 1)
    return 1 + np.einsum("i,j,k,ijk", radial, radial, angular, kernel) / first


def _elliptic(tip):
    """Complete elliptic integral of the second kind of 4ab / (a + b)^2, by the trapezium rule."""
    angle = np.linspace(0, np.pi / 2, 20001)
    share = 4 * tip.inner * tip.outer / (tip.inner + tip.outer) ** 2
    return np.trapezoid(np.sqrt(1 - share * np.sin(angle) ** 2), angle)


@pytest.mark.parametrize(("eps", "frequency"), [(78 - 20j, 3e9), (25 - 2j, 6e9), (10.0, 1e9)])
def test_the_series_is_the_integral_over_the_aperture(eps, frequency):
    relative, _ = Aperture("aperture-field", TIP).admittance(np.array(eps), np.array(frequency))
    assert relative / eps == pytest.approx(summed(eps, frequency), rel=1e-5)


def test_capacitance_and_radiation_of_a_known_line():
    # a 3.6 mm line: C0 = 0.0227170 pF and G0 = 3.87231e-10 S at 1 GHz by Marcuvitz (1951)
    assert pytest.approx(0.0227170e-12, rel=2e-6) == TIP.capacitance
    one = np.array(1e9)
    g = Aperture("radiating", TIP).admittance(np.array(1.0 + 0j), one)[0] - 1
    assert g.imag == pytest.approx(-3.87231e-10 / (2 * np.pi * 1e9 * 0.0227170e-12), rel=1e-4)
    assert g.real == pytest.approx(0.0, abs=1e-15)


@pytest.mark.parametrize(("eps", "frequency", "share"), [(78.4, 1e9, 0.012), (78.4, 3e9, 0.09)])
def test_a_capacitance_and_radiation_fall_short_of_the_integral_in_water(eps, frequency, share):
    whole, _ = Aperture("aperture-field", TIP).admittance(np.array(eps + 0j), np.array(frequency))
    lumped, _ = Aperture("radiating", TIP).admittance(np.array(eps + 0j), np.array(frequency))
    assert 1 - abs(lumped) / abs(whole) == pytest.approx(share, abs=0.25 * share)


@pytest.mark.parametrize("model", MODELS)
def test_there_and_back_is_the_identity(model):
    for frequency in (1e8, 1e9, 3e9, 6e9):
        relative, _ = made(model).admittance(MEDIA, np.array(frequency))
        found = made(model).permittivity(relative, np.array(frequency))
        np.testing.assert_allclose(found, MEDIA, rtol=1e-9)


@pytest.mark.parametrize("model", MODELS)
def test_the_slope_is_that_of_the_admittance(model):
    step = 1e-5 * np.exp(0.4j)
    there, _ = made(model).admittance(MEDIA + step, np.array(3e9))
    back, _ = made(model).admittance(MEDIA - step, np.array(3e9))
    _, slope = made(model).admittance(MEDIA, np.array(3e9))
    np.testing.assert_allclose((there - back) / (2 * step), slope, rtol=1e-6)


@pytest.mark.parametrize("model", MODELS)
def test_every_model_is_a_capacitance_at_low_frequency(model):
    relative, _ = made(model).admittance(MEDIA, np.array(1e6))
    np.testing.assert_allclose(relative, MEDIA, rtol=1e-5)


def test_two_coefficients_stand_for_the_whole_series():
    eps = debye(WIDE, 78.4, 5.0, 8.3e-12, 0.0)
    whole, _ = Aperture("aperture-field", TIP).admittance(eps, WIDE)
    square, cube = -TIP.series[2:4] * (2 * np.pi * 1e9 / speed_of_light) ** np.array((2, 3))
    fitted, _ = Aperture("fitted", None, (square, cube)).admittance(eps, WIDE)
    np.testing.assert_allclose(fitted, whole, rtol=2e-3)


def test_nothing_is_said_of_an_aperture_that_is_not_small():
    wide = Aperture("aperture-field", Geometry(0.02, 0.05))
    assert np.isnan(wide.admittance(np.array(78.0 + 0j), np.array(6e9))[0])


@pytest.mark.parametrize("radii", [(2e-3, 1e-3), (0.0, 1e-3)])
def test_radii_that_are_none_are_refused(radii):
    with pytest.raises(ParameterError, match="below outer_radius"):
        Geometry(*radii)


def test_a_model_without_its_radii_is_refused():
    with pytest.raises(ParameterError, match="needs inner_radius"):
        Aperture("radiating")
