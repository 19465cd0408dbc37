"""The caller's own polynomial is used where it increases, and refused where it does not."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.errors import ParameterError
from models.mixing.empirical import topp_1980
from models.mixing.empirical.polynomial import POLYNOMIAL, complaints

TOPP = {"constant": -5.3e-2, "linear": 2.92e-2, "quadratic": -5.5e-4, "cubic": 4.3e-6}


def test_polynomial_with_the_cubic_of_topp_1980_is_topp_1980():
    permittivity = np.linspace(1.0, 81.0, 33)
    theta = POLYNOMIAL.to_water_content(permittivity, **TOPP)
    assert_allclose(theta, topp_1980.to_water_content(permittivity), rtol=1e-14)
    assert_allclose(POLYNOMIAL.to_permittivity(theta, **TOPP), permittivity, rtol=1e-12)


@pytest.mark.parametrize(
    "coefficients",
    [
        {"constant": -0.05, "linear": -0.01},
        {"constant": 0.0, "linear": 0.0},
        {"constant": 0.085, "linear": 1.92e-2, "quadratic": -0.95e-3},  # turns at 10
        {"constant": -0.05, "linear": 0.03, "quadratic": -7e-4, "cubic": 5e-6},  # dips inside
        {"constant": -0.05, "linear": 0.03, "cubic": -2e-6},  # turns at 71
    ],
)
@pytest.mark.parametrize("way", ["to_water_content", "to_permittivity"])
def test_polynomial_that_does_not_increase_is_refused(coefficients, way):
    with pytest.raises(ParameterError, match="polynomial: takes coefficients that let water"):
        getattr(POLYNOMIAL, way)(0.2, **coefficients)
    assert [c.name for c in complaints(**coefficients)] == ["linear"]


def test_polynomial_that_turns_beyond_water_has_no_number_beyond_the_turn():
    # Pepin (1992) for peat, and what it gives to the digits given: from memory
    peat = {"constant": 8.5e-2, "linear": 1.92e-2, "quadratic": -0.95e-4}  # turns at 101.05
    assert_allclose(POLYNOMIAL.to_water_content([5.0, 10.0, 20.0, 30.0], **peat),
                    [0.178625, 0.2675, 0.431, 0.5755], atol=1e-12)  # fmt: skip
    assert np.isnan(POLYNOMIAL.to_water_content([101.0, 102.0], **peat)).tolist() == [False, True]
    top = 8.5e-2 + 1.92e-2**2 / (4 * 0.95e-4)  # where it turns, by algebra
    assert np.isnan(POLYNOMIAL.to_permittivity([top - 1e-6, top + 1e-6], **peat)).tolist() == [
        False,
        True,
    ]


def test_polynomial_that_turns_below_air_has_no_number_below_the_turn():
    bent = {"constant": 0.0, "linear": 0.0, "quadratic": 1e-4}  # turns at 0
    assert POLYNOMIAL.to_permittivity(0.04, **bent) == pytest.approx(20.0, rel=1e-14)
    assert np.isnan(POLYNOMIAL.to_water_content(-20.0, **bent))
    assert np.isnan(POLYNOMIAL.to_permittivity(-0.01, **bent))


def test_polynomial_gives_no_number_for_the_rows_that_do_not_increase():
    theta = POLYNOMIAL.to_water_content(
        20.0, constant=-0.05, linear=np.array([0.02, -0.02, np.nan])
    )
    assert_allclose(theta, [0.35, np.nan, np.nan], rtol=1e-14)
