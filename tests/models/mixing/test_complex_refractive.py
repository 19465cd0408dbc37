"""Water content and pore-water conductivity from one complex permittivity."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_less
from scipy.constants import epsilon_0
from scipy.optimize import fsolve

from models.mixing.joint import to_complex_permittivity, to_water_content_and_conductivity
from models.mixing.physical import crim
from models.mixing.physical.complex_refractive import (
    COMPLEX_REFRACTIVE,
    to_permittivity,
    to_water_content,
)
from tests.published import table

ROWS = 10_000
CLAY_LOAM = {
    "water_permittivity": 80.0,
    "water_loss": 4.0,
    "porosity": 0.5,
    "solid_permittivity": 4.7,
    "solid_loss": 0.0,
}


@pytest.fixture(scope="module")
def lossy():
    """Soils at random: 50 MHz to 3 GHz, fresh to 10 dS/m, moist to saturated."""
    random = np.random.default_rng(20)
    porosity = random.uniform(0.3, 0.7, ROWS)
    known = {
        "water_permittivity": random.uniform(70, 87, ROWS) - 1j * random.uniform(0, 12, ROWS),
        "porosity": porosity,
        "solid_permittivity": random.uniform(3, 8, ROWS) - 1j * random.uniform(0, 0.05, ROWS),
    }
    theta = random.uniform(0.03, porosity)
    conductivity = random.uniform(0, 1, ROWS)
    return theta, conductivity, 10 ** random.uniform(np.log10(50e6), np.log10(3e9), ROWS), known


def stogryn_water(printed):
    turning = 1 + 1j * printed["frequency"].values * printed["two_pi_tau"].values
    return 4.9 + (printed["static"].values - 4.9) / turning


def known_of(printed):
    return {
        "water_permittivity": stogryn_water(printed),
        "porosity": printed["porosity"].values,
        "solid_permittivity": printed["solid_real"].values - 1j * printed["solid_loss"].values,
    }


def assert_as_printed(computed, column):
    assert_array_less(np.abs(computed - column.values), column.tolerance)


def test_complex_permittivity_reproduces_its_value():
    printed = table("complex_refractive")
    eps = to_complex_permittivity(
        printed["water_content"].values, printed["pore_water_conductivity"].values,
        printed["frequency"].values, **known_of(printed),
    )  # fmt: skip
    assert_as_printed(eps.real, printed["real"])
    assert_as_printed(-eps.imag, printed["loss"])


def test_joint_inversion_reproduces_its_value():
    printed = table("complex_refractive_inverse")
    theta, conductivity = to_water_content_and_conductivity(
        printed["real"].values - 1j * printed["loss"].values,
        printed["frequency"].values, **known_of(printed),
    )  # fmt: skip
    assert_as_printed(theta, printed["water_content"])
    assert_as_printed(conductivity, printed["pore_water_conductivity"])


def test_saline_soil_at_70_mhz_there_and_back():
    printed = table("complex_refractive_70_mhz")
    row = {name: column.values for name, column in printed.items()}
    known = {name: row[name] for name in ("porosity", "solid_permittivity")}
    eps = to_complex_permittivity(
        row["water_content"], row["pore_water_conductivity"], row["frequency"],
        water_permittivity=row["water_real"] - 1j * row["water_loss"], **known,
    )  # fmt: skip
    assert_as_printed(eps.real, printed["real"])
    assert_as_printed(-eps.imag, printed["loss"])
    theta = to_water_content(
        row["apparent"], loss=row["loss"], solid_loss=0.0, water_permittivity=row["water_real"],
        water_loss=row["water_loss"], **known,
    )  # fmt: skip
    assert_allclose(theta, row["water_content"], rtol=0, atol=1e-7)  # digits of the apparent one


def test_lossy_soils_there_and_back_and_never_on_another_root(lossy):
    theta, conductivity, frequency, known = lossy
    eps = to_complex_permittivity(theta, conductivity, frequency, **known)
    back, conducted = to_water_content_and_conductivity(eps, frequency, **known)
    assert_allclose(back, theta, rtol=1e-11)
    assert_allclose(conducted, conductivity, rtol=1e-9, atol=1e-11)


@pytest.mark.parametrize("exponent", [0.35, 0.46, 0.5, 0.65, 1.0])
def test_other_exponents_there_and_back(lossy, exponent):
    theta, conductivity, frequency, known = lossy
    frequency = np.maximum(frequency, 300e6)
    eps = to_complex_permittivity(theta, conductivity, frequency, exponent=exponent, **known)
    back, conducted = to_water_content_and_conductivity(eps, frequency, exponent=exponent, **known)
    assert_allclose(back, theta, rtol=1e-9)
    assert_allclose(conducted, conductivity, rtol=1e-6, atol=1e-8)


def test_joint_inversion_agrees_with_a_general_solver(lossy):
    theta, conductivity, frequency, known = lossy
    for row in range(8):
        water, phi, solid = (
            known[name][row] for name in ("water_permittivity", "porosity", "solid_permittivity")
        )
        omega_eps = 2 * np.pi * frequency[row] * epsilon_0

        def index(unknown, water=water, phi=phi, solid=solid, omega_eps=omega_eps):
            wet = np.sqrt(water - 1j * unknown[1] / omega_eps)
            return (1 - phi) * np.sqrt(solid) + unknown[0] * wet + phi - unknown[0]

        measured = index((theta[row], conductivity[row]))
        solved = fsolve(
            lambda x, f=index, y=measured: [(f(x) - y).real, (f(x) - y).imag], (0.2, 0.1),
            xtol=1e-13,
        )  # fmt: skip
        answer = to_water_content_and_conductivity(
            measured**2, frequency[row], water_permittivity=water, porosity=phi,
            solid_permittivity=solid,
        )  # fmt: skip
        assert_allclose(answer, solved, rtol=1e-7)


def test_no_number_where_no_soil_answers():
    known = {"water_permittivity": 80.0 - 4j, "porosity": 0.5, "solid_permittivity": 4.7}
    impossible = np.array([-1 - 20j, 1.5 - 0.1j, np.nan, complex(20, np.nan)])
    assert np.all(np.isnan(to_water_content_and_conductivity(impossible, 1e9, **known)))


def test_no_number_where_two_water_contents_answer():
    """(1 + m u)^2 = 80 in the real part has the roots u = 4 and 6: m^2 < 0 in the real part."""
    square, twice = -79 / 24, 790 / 24  # Vieta: q u^2 + 2 Re(m) u - 79 = 0
    real = twice / 2
    excess = real - 1j * np.sqrt(real**2 - square)
    wet = [((1 + excess * u) ** 2).real for u in (4, 6)]
    assert_allclose(wet, 80.0, rtol=1e-12)
    eps = (excess + 1.0) ** 2  # all pores
    theta, _ = to_water_content_and_conductivity(
        eps, 1e9, water_permittivity=80.0, porosity=1.0, solid_permittivity=4.7
    )
    assert np.isnan(theta)


def test_less_loss_than_pure_water_is_a_negative_conductivity_not_a_clipped_one():
    known = {"water_permittivity": 80.0 - 4j, "porosity": 0.5, "solid_permittivity": 4.7}
    eps = to_complex_permittivity(0.3, -0.05, 1e9, **known)
    assert_allclose(to_water_content_and_conductivity(eps, 1e9, **known), (0.3, -0.05), rtol=1e-10)


def test_measured_loss_keeps_salt_out_of_the_water_content():
    eps = to_complex_permittivity(
        0.3, 0.8, 100e6, water_permittivity=80.0 - 0.4j, porosity=0.5, solid_permittivity=4.7
    )
    apparent = np.sqrt(eps).real ** 2
    soil = CLAY_LOAM | {"water_loss": 0.4}
    assert_allclose(to_water_content(apparent, loss=-eps.imag, **soil), 0.3, rtol=1e-12)
    assert to_water_content(apparent, **soil) > 0.35


def test_without_a_loss_it_is_the_sum_of_indices_with_the_apparent_permittivity_of_water():
    apparent = np.linspace(2, 40, 50)
    expected = crim.to_water_content(
        apparent, porosity=0.5, solid_permittivity=4.7,
        water_permittivity=(np.hypot(80.0, 4.0) + 80.0) / 2,
    )  # fmt: skip
    assert_allclose(to_water_content(apparent, **CLAY_LOAM), expected, rtol=1e-12)


@pytest.mark.parametrize("loss", [0.0, 0.3, 2.0])
@pytest.mark.parametrize("solid_loss", [0.0, 0.05])
def test_with_a_loss_it_is_its_own_inverse(loss, solid_loss):
    theta = np.linspace(0.05, 0.5, 91)
    soil = CLAY_LOAM | {"loss": loss, "solid_loss": solid_loss}
    apparent = to_permittivity(theta, **soil)
    assert np.all(np.diff(apparent) > 0)
    assert_allclose(to_water_content(apparent, **soil), theta, rtol=1e-12)


def test_a_loss_that_water_cannot_carry_has_no_answer_in_either_direction():
    dry = to_permittivity([0.001, -0.1, 0.2], loss=5.0, **CLAY_LOAM)
    assert_array_less(0.0, dry[2])
    assert np.all(np.isnan(dry[:2]))
    assert np.isnan(to_water_content(2.0, loss=5.0, **CLAY_LOAM))


def test_range_of_validity_can_be_inverted_with_a_moderate_loss():
    ends = COMPLEX_REFRACTIVE.validity["water_content"]
    theta = np.array([ends.low, ends.high])
    apparent = to_permittivity(theta, loss=1.0, **CLAY_LOAM)
    assert_allclose(to_water_content(apparent, loss=1.0, **CLAY_LOAM), theta, rtol=1e-12)
