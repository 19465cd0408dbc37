"""The worked examples of JCGM 100, annex H, from the engine itself."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.errors import ParameterError
from models.uncertainty.first_order import (
    Input,
    effective_degrees_of_freedom,
    expanded_factor,
    propagate,
)
from models.uncertainty.joint import propagate_jointly
from models.uncertainty.second_order import propagate_to_second_order
from tests.published import table

ROOT_3 = np.sqrt(3.0)


def length(standard, difference, expansion_difference, deviation, expansion, difference_in_t):
    """H.1, equation H.3: end gauge compared with a standard, nm."""
    return (
        standard
        + difference
        - standard * (expansion_difference * deviation + expansion * difference_in_t)
    )


END_GAUGE = [
    Input("standard", 50_000_623.0, 25.0),
    Input("difference", 215.0, 9.7),
    Input("expansion_difference", 0.0, 1e-6 / ROOT_3),
    Input("deviation", -0.1, 0.41),
    Input("expansion", 11.5e-6, 2e-6 / ROOT_3),
    Input("difference_in_t", 0.0, 0.05 / ROOT_3),
]
DEGREES = {"standard": 18, "difference": 25.6, "expansion_difference": 50, "difference_in_t": 2}


def near(found, printed):
    assert_allclose(np.squeeze(found), printed.values[0], atol=printed.tolerance[0] * (1 + 1e-9))


def test_end_gauge_first_order():
    printed = table("jcgm_100_end_gauge")
    value = length(*(np.array([each.value]) for each in END_GAUGE))
    found = propagate(length, END_GAUGE, value)
    combined = np.sqrt(found.per_reading)
    near(combined, printed["combined"])
    degrees = effective_degrees_of_freedom(found.contributions, DEGREES)
    near(np.floor(degrees), printed["degrees_of_freedom"])
    factor = expanded_factor(0.99, degrees)
    near(factor, printed["factor"])
    near(factor * np.rint(combined), printed["expanded"])


def test_end_gauge_second_order():
    value = length(*(np.array([each.value]) for each in END_GAUGE))
    found = propagate_to_second_order(length, END_GAUGE, value)
    near(found.standard_uncertainty, table("jcgm_100_end_gauge")["second_order"])
    # Its two terms: products of expansion and temperature, 11.89 and 1.74 nm.
    standard = END_GAUGE[0].value
    terms = [standard * 0.41 * 1e-6 / ROOT_3, standard * 2e-6 / ROOT_3 * 0.05 / ROOT_3]
    assert_allclose(found.second, np.sum(np.square(terms)), rtol=1e-6)


def test_rounded_combined_uncertainty_does_not_reach_the_degrees_of_freedom():
    """With 32 in place of the sum of its components one finds 17, and a factor too small."""
    value = length(*(np.array([each.value]) for each in END_GAUGE))
    found = propagate(length, END_GAUGE, value)
    degrees = effective_degrees_of_freedom(found.contributions, DEGREES)
    assert_allclose(degrees, 16.763, atol=5e-4)


def test_degrees_of_freedom_of_one_input_are_its_own_and_must_be_positive():
    one = {"x": np.array([3.0, 0.0])}
    assert_allclose(effective_degrees_of_freedom(one, {"x": 7.0}), [7.0, np.inf])
    assert np.isinf(effective_degrees_of_freedom(one, {})).all()
    with pytest.raises(ParameterError, match="positive"):
        effective_degrees_of_freedom(one, {"x": 0.0})


def test_factor_falls_to_that_of_the_normal_distribution():
    """Student's t at 95 %: JCGM 100, table G.2."""
    found = expanded_factor(0.95, [1, 2.9, 9, 20, np.inf])
    assert_allclose(found, [12.71, 4.30, 2.26, 2.09, 1.96], atol=5e-3)


def impedance(voltage, current, phase):
    """H.2, equation H.7."""
    size = voltage / current
    return size * np.cos(phase), size * np.sin(phase), size


def observed():
    data = table("jcgm_100_impedance_data")
    columns = np.stack(
        [data["voltage"].values, data["current"].values * 1e-3, data["phase"].values]
    )
    means = dict(zip(("voltage", "current", "phase"), columns.mean(axis=1), strict=True))
    return means, np.cov(columns) / columns.shape[1]


def test_impedance_from_simultaneous_observations():
    printed = table("jcgm_100_impedance")
    found = propagate_jointly(impedance, *observed())
    for output, name in enumerate(("resistance", "reactance", "impedance")):
        near(found.value[0, output], printed[name])
        # H.2 gives 0.295 for 0.2956: all its digits but the last, which the observations decide.
        assert_allclose(
            found.standard_uncertainty[0, output], printed[f"{name}_u"].values[0], atol=1e-3
        )
    for (one, other), name in {(0, 1): "r_rx", (0, 2): "r_rz", (1, 2): "r_xz"}.items():
        near(found.correlation[0, one, other], printed[name])


def test_complex_impedance_is_its_two_parts_with_their_covariance():
    means, covariance = observed()

    def whole(voltage, current, phase):
        return voltage / current * np.exp(1j * phase)

    found = propagate_jointly(whole, means, covariance)
    parts = propagate_jointly(impedance, means, covariance)
    assert_allclose(found.covariance, parts.covariance[:, :2, :2], rtol=1e-9)


def test_thermometer_line_and_its_correction_at_30():
    printed = table("jcgm_100_thermometer")
    data = table("jcgm_100_thermometer_data")
    coefficients, covariance = np.polyfit(
        data["reading"].values - 20.0, data["correction"].values, 1, cov=True
    )
    at = {"slope": coefficients[0], "intercept": coefficients[1], "reading": 30.0}
    given = np.zeros((3, 3))
    given[:2, :2] = covariance
    found = propagate_jointly(
        lambda slope, intercept, reading: (intercept, slope, intercept + slope * (reading - 20.0)),
        at,
        given,
    )
    for output, name in enumerate(("intercept", "slope", "at_30")):
        near(found.value[0, output], printed[name])
        near(found.standard_uncertainty[0, output], printed[f"{name}_u"])
    near(found.correlation[0, 0, 1], printed["correlation"])
