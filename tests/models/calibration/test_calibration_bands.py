"""Bands hold what they say: by Student's distribution, by simulation, by shared errors."""

import numpy as np
import pytest
from scipy.stats import t as student

from models.calibration import FORMS, Pairs, Shared, calibrate
from models.calibration.scatter import Scatter
from tests.models.calibration.soils import cubic_law, exact, measured, root_law

CALIBRATIONS, READINGS = 120, 60


def held(form, law, count, errors, *, stated, seed):
    """Share of new truths within the 95 % prediction band of many simulated calibrations."""
    draw, inside = np.random.default_rng(seed), []
    for _ in range(CALIBRATIONS):
        found = calibrate(measured(law, count, errors, draw, stated=stated), FORMS[form])
        true = draw.uniform(4.0, 32.0, READINGS)
        water = law(true) + errors[2] * draw.standard_normal(READINGS)
        read = true + errors[0] * draw.standard_normal(READINGS)
        u = np.full(READINGS, errors[0] if stated else 0.0)
        band = found.band(read, u, 0.95)
        inside.append(np.abs(band.water_content - water) <= band.prediction_half_width)
    return np.mean(inside)


@pytest.mark.parametrize(
    ("form", "law", "count", "errors", "stated"),
    [
        ("square-root", root_law, 6, (0.3, 0.01, 0.04), True),
        ("square-root", root_law, 10, (0.3, 0.01, 0.02), True),
        ("square-root", root_law, 20, (0.3, 0.01, 0.01), True),
        ("square-root", root_law, 40, (0.8, 0.01, 0.02), True),
        ("polynomial-3", cubic_law, 15, (0.3, 0.005, 0.02), True),
        ("square-root", root_law, 6, (0.0, 0.0, 0.02), False),
        ("square-root", root_law, 15, (0.3, 0.0, 0.02), False),
        ("polynomial-3", cubic_law, 12, (0.0, 0.0, 0.015), False),
    ],
)
def test_a_prediction_band_holds_new_truths_of_a_soil_that_scatters(
    form, law, count, errors, stated
):
    share = held(form, law, count, errors, stated=stated, seed=count)
    assert 0.925 < share < 0.975


@pytest.mark.parametrize("count", [10, 30])
def test_a_band_holds_more_where_nothing_but_stated_uncertainty_is_there(count):
    """Whether the soil adds scatter cannot be known from few pairs: the band leaves room for it."""
    share = held("square-root", root_law, count, (0.3, 0.01, 0.0), stated=True, seed=count)
    assert share > 0.95


def test_a_band_without_uncertainties_is_that_of_student():
    draw = np.random.default_rng(7)
    pairs = measured(root_law, 9, (0.0, 0.0, 0.02), draw, stated=False)
    found = calibrate(pairs, FORMS["square-root"])
    x, y, at = np.sqrt(pairs.permittivity), pairs.water_content, np.array([5.0, 20.0, 40.0])
    line = np.polyfit(x, y, 1)
    s = np.sqrt(np.sum((y - np.polyval(line, x)) ** 2) / 7)
    leverage = 1 / 9 + (np.sqrt(at) - x.mean()) ** 2 / np.sum((x - x.mean()) ** 2)
    factor = student.ppf(0.95, 7)  # 90 %

    band = found.band(at, np.zeros(3), 0.9)
    assert band.curve_half_width == pytest.approx(factor * s * np.sqrt(leverage))
    assert band.prediction_half_width == pytest.approx(factor * s * np.sqrt(1 + leverage))
    assert band.curve_ends[0] == pytest.approx(np.polyval(line, np.sqrt(at)) - factor * s
                                               * np.sqrt(leverage))  # fmt: skip


def test_an_open_variance_beside_a_known_one_nears_student_as_the_known_one_vanishes():
    open_variance = Scatter(8.0, 8, stated=False)
    exact_width = open_variance.half_width(np.array([2.0]), np.zeros(1), 0.95)
    near = open_variance.half_width(np.array([2.0]), np.array([1e-9]), 0.95)
    assert exact_width == pytest.approx(student.ppf(0.975, 8) * np.sqrt(2.0))
    assert near == pytest.approx(exact_width, rel=0.02)


def test_stated_uncertainties_are_never_made_smaller():
    """Pairs on the curve to the digit: the curve still is no better known than they are."""
    x = np.linspace(4.0, 30.0, 12)
    pairs = Pairs(x, np.full(12, 0.3), root_law(x), np.full(12, 0.01))
    found = calibrate(pairs, FORMS["square-root"])
    slope = 0.055 / np.sqrt(x)
    weight = 1 / (0.01**2 + (0.3 * slope) ** 2)
    design = np.stack([np.ones(12), np.sqrt(x)], axis=1)
    assert found.covariance == pytest.approx(np.linalg.inv(design.T @ (weight[:, None] * design)))
    assert found.soil_scatter == 0.0


def test_next_to_no_stated_uncertainty_is_as_good_as_none():
    draw = np.random.default_rng(8)
    bare = measured(root_law, 10, (0.0, 0.0, 0.02), draw)
    tiny = Pairs(bare.permittivity, bare.permittivity_u, bare.water_content, np.full(10, 1e-7))
    none, some = (calibrate(pairs, FORMS["square-root"]) for pairs in (bare, tiny))
    at = np.array([6.0, 25.0])
    widths = [one.band(at, np.zeros(2), 0.95).prediction_half_width for one in (none, some)]

    assert some.coefficients == pytest.approx(none.coefficients)
    assert some.covariance == pytest.approx(none.covariance, rel=2e-3)
    assert widths[1] == pytest.approx(widths[0], rel=0.01)


def test_scatter_beyond_what_is_stated_is_found():
    draw = np.random.default_rng(11)
    found = [
        calibrate(measured(root_law, 20, (0.3, 0.01, 0.03), draw), FORMS["square-root"])
        for _ in range(60)
    ]
    assert np.mean([one.soil_scatter**2 for one in found]) == pytest.approx(0.03**2, rel=0.1)
    assert all(one.reduced_chi_square > 1 for one in found if one.soil_scatter > 0)


def test_one_density_for_all_scales_the_whole_curve():
    x = np.linspace(4.0, 30.0, 10)
    y, none = root_law(x), np.zeros(10)
    of_density = Shared("bulk_density", 0.03 * y, none)
    pairs = exact(x, y)
    found = calibrate(Pairs(x, none, y, none, None, (of_density,)), FORMS["square-root"])

    scaled = np.outer(found.coefficients, found.coefficients) * 0.03**2
    assert found.covariance == pytest.approx(scaled, rel=1e-6)
    assert calibrate(pairs, FORMS["square-root"]).covariance == pytest.approx(
        np.zeros((2, 2)), abs=1e-20
    )
    band = found.band(x, none, 0.95)
    assert band.prediction_half_width == pytest.approx(1.959964 * 0.03 * y, rel=1e-3)


def test_a_shared_error_of_the_permittivity_moves_all_pairs():
    """Against fitting again with every permittivity moved."""
    draw = np.random.default_rng(5)
    pairs = measured(root_law, 12, (0.3, 0.01, 0.0), draw)
    moved = Shared("apparent_permittivity", np.zeros(12), np.full(12, 0.2))
    own = calibrate(pairs, FORMS["square-root"])
    both = calibrate(
        Pairs(pairs.permittivity, pairs.permittivity_u, pairs.water_content,
              pairs.water_content_u, None, (moved,)),
        FORMS["square-root"],
    )  # fmt: skip
    ends = [
        calibrate(
            Pairs(pairs.permittivity + step, pairs.permittivity_u, pairs.water_content,
                  pairs.water_content_u),
            FORMS["square-root"],
        ).coefficients
        for step in (-0.1, 0.1)
    ]  # fmt: skip
    change = ends[1] - ends[0]
    assert both.covariance - own.covariance == pytest.approx(np.outer(change, change), rel=0.05)
