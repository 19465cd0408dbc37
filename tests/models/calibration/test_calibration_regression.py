"""Curves with errors in both variables against general-purpose minimisers."""

import numpy as np
import pytest
from scipy.optimize import curve_fit, least_squares

from models.calibration import FORMS, Pairs, calibrate
from models.calibration.left_out import leave_out
from models.calibration.regression import fit
from tests.models.calibration.soils import cubic_law, exact, measured, root_law

EVERY = pytest.mark.parametrize("form", FORMS.values(), ids=list(FORMS))


def curve(form, permittivity, coefficients):
    return sum(c * form.variable(permittivity) ** k for k, c in enumerate(coefficients))


@pytest.fixture
def draw():
    return np.random.default_rng(20)


@EVERY
def test_a_curve_with_errors_in_both_is_the_nearest_one(form, draw):
    pairs = measured(cubic_law, 16, (0.8, 0.02, 0.0), draw)
    found = fit(form, pairs.permittivity, pairs.water_content, pairs.permittivity_u,
                pairs.water_content_u)  # fmt: skip

    def misses(unknown):
        coefficients, true = unknown[: form.size], unknown[form.size :]
        return np.concatenate(
            [
                (pairs.permittivity - true) / pairs.permittivity_u,
                (pairs.water_content - curve(form, true, coefficients)) / pairs.water_content_u,
            ]
        )

    start = np.concatenate([found.coefficients * 1.05, pairs.permittivity])
    nearest = least_squares(misses, start, x_scale="jac", xtol=1e-14, ftol=1e-14, gtol=1e-14)

    assert found.chi_square == pytest.approx(2 * nearest.cost, rel=1e-6)
    assert found.coefficients == pytest.approx(nearest.x[: form.size], rel=2e-4, abs=1e-8)


@EVERY
def test_a_curve_without_permittivity_errors_is_that_of_curve_fit(form, draw):
    pairs = measured(cubic_law, 14, (0.0, 0.02, 0.0), draw)
    u = np.linspace(0.01, 0.03, 14)
    found = fit(form, pairs.permittivity, pairs.water_content, np.zeros(14), u)
    expected, covariance = curve_fit(
        lambda x, *c: curve(form, x, c), pairs.permittivity, pairs.water_content,
        p0=np.zeros(form.size), sigma=u, absolute_sigma=True,
    )  # fmt: skip

    assert found.coefficients == pytest.approx(expected, rel=1e-5)
    assert found.plain(found.reduced_covariance) == pytest.approx(covariance, rel=1e-4)


def test_noise_of_the_permittivity_does_not_flatten_the_curve():
    draw, slopes, flat = np.random.default_rng(3), [], []
    for _ in range(200):
        pairs = measured(root_law, 20, (1.5, 0.005, 0.0), draw)
        slopes.append(calibrate(pairs, FORMS["square-root"]).coefficients[1])
        flat.append(np.polyfit(np.sqrt(pairs.permittivity), pairs.water_content, 1)[0])

    assert np.mean(slopes) == pytest.approx(0.11, rel=0.01)
    assert np.mean(flat) < 0.107


def test_scatter_of_the_soil_is_not_laid_on_the_permittivity():
    draw = np.random.default_rng(4)
    slopes = [
        calibrate(measured(root_law, 25, (1.0, 0.005, 0.03), draw, low=4, high=14),
                  FORMS["square-root"]).coefficients[1]
        for _ in range(150)
    ]  # fmt: skip
    assert np.mean(slopes) == pytest.approx(0.11, rel=0.03)


@EVERY
def test_leaving_out_is_fitting_again_without(form, draw):
    pairs = measured(cubic_law, 12, (0.0, 0.02, 0.0), draw, stated=False)
    x, y = form.variable(pairs.permittivity), pairs.water_content
    again = [
        y[k] - np.polyval(np.polyfit(np.delete(x, k), np.delete(y, k), form.size - 1), x[k])
        for k in range(12)
    ]
    assert leave_out(form, pairs).errors == pytest.approx(again, rel=1e-6)


def test_replicates_are_left_out_as_a_level(draw):
    level = np.repeat(np.arange(5), 3)
    x = np.repeat([4.0, 8.0, 14.0, 22.0, 30.0], 3) + 0.3 * draw.standard_normal(15)
    y = root_law(x) + np.repeat(0.02 * draw.standard_normal(5), 3)
    pairs = Pairs(x, np.zeros(15), y, np.zeros(15), level)
    found = calibrate(pairs, FORMS["square-root"])
    kept = level != 2
    line = np.polyfit(np.sqrt(x[kept]), y[kept], 1)

    assert found.left_out.errors[6:9] == pytest.approx(y[6:9] - np.polyval(line, np.sqrt(x[6:9])))
    one_by_one = calibrate(exact(x, y), FORMS["square-root"])
    assert found.left_out.error > one_by_one.left_out.error


def test_a_cubic_is_fitted_to_the_digits_of_its_points():
    x = np.linspace(3.0, 60.0, 12)
    found = calibrate(exact(x, cubic_law(x)), FORMS["polynomial-3"])
    assert found.coefficients == pytest.approx([-0.053, 2.92e-2, -5.5e-4, 4.3e-6], rel=1e-7)
