"""Lines with and without errors in both variables against printed examples of the literature."""

import numpy as np
import pytest

from models.calibration import FORMS, calibrate
from models.calibration.regression import fit
from tests.models.calibration.soils import exact
from tests.published import table

LINE = FORMS["polynomial-1"]


def rows(name, case=None):
    columns = table(name)
    if case is None:
        return {heading: column.values for heading, column in columns.items()}
    chosen = columns["case"].values == case
    return {heading: column.values[chosen] for heading, column in columns.items()}


def agrees(found, name, heading, row=0, digits=1.001):
    """To half a unit of the last printed digit, or so many of them."""
    printed = table(name)[heading]
    assert found == pytest.approx(printed.values[row], abs=digits * printed.tolerance[row])


def test_york_line_through_pearson_data():
    data = rows("pearson_york")
    found = fit(LINE, data["x"], data["y"], data["x_weight"] ** -0.5, data["y_weight"] ** -0.5)

    agrees(found.coefficients[0], "pearson_york_line", "intercept")
    agrees(found.coefficients[1], "pearson_york_line", "slope")
    agrees(found.chi_square / 8, "pearson_york_line", "reduced_chi_square")


@pytest.mark.parametrize("case", [1, 2, 3])
def test_lines_of_iso_28037(case):
    data = rows("iso_28037", case)
    found = fit(LINE, data["x"], data["y"], data["x_u"], data["y_u"])
    covariance = found.plain(found.reduced_covariance)

    told = {"intercept": found.coefficients[0], "slope": found.coefficients[1],
            "intercept_u": covariance[0, 0] ** 0.5, "slope_u": covariance[1, 1] ** 0.5,
            "covariance": covariance[0, 1], "chi_square": found.chi_square}  # fmt: skip
    for heading, value in told.items():
        agrees(value, "iso_28037_lines", heading, case - 1)


def test_line_of_iso_28037_without_uncertainties():
    data = rows("iso_28037", 4)
    found = calibrate(exact(data["x"], data["y"]), LINE)
    # the standard takes n - 2 degrees of freedom for s, as here
    agrees(found.coefficients[0], "iso_28037_annex_e", "intercept")
    agrees(found.coefficients_u[0], "iso_28037_annex_e", "intercept_u")
    agrees(found.coefficients[1], "iso_28037_annex_e", "slope")
    agrees(found.coefficients_u[1], "iso_28037_annex_e", "slope_u")
    agrees(found.covariance[0, 1], "iso_28037_annex_e", "covariance")


def test_natrella_line_with_its_bands():
    data, name = rows("natrella_5_4"), "natrella_5_4_line"
    found = calibrate(exact(data["x"], data["y"]), LINE)

    # the handbook cuts its last digit off, and reckoned from a line of eight digits
    agrees(found.coefficients[0], name, "intercept")
    agrees(found.coefficients[1], name, "slope")
    agrees(found.covariance[0, 0], name, "intercept_variance", digits=3)
    agrees(found.covariance[1, 1], name, "slope_variance", digits=3)
    agrees(found.residual_deviation, name, "standard_deviation", digits=3)
    at = np.array([1200.0, 750.0])
    band = found.band(at, np.zeros(2), 0.95)
    agrees(band.curve_u[0] ** 2, name, "mean_variance_at_1200")
    agrees(band.prediction_u[1] ** 2, name, "new_variance_at_750")


def test_thermometer_of_the_gum():
    data = rows("jcgm_100_thermometer_data")
    found = calibrate(exact(data["reading"] - 20.0, data["correction"]), LINE)
    band = found.band(np.array([10.0]), np.zeros(1), 0.95)
    r = found.covariance[0, 1] / np.prod(found.coefficients_u)

    told = {"intercept": found.coefficients[0], "intercept_u": found.coefficients_u[0],
            "slope": found.coefficients[1], "slope_u": found.coefficients_u[1], "correlation": r,
            "at_30": band.water_content[0], "at_30_u": band.curve_u[0]}  # fmt: skip
    for heading, value in told.items():
        agrees(value, "jcgm_100_thermometer", heading)
