"""What a tip reads of layers, against a finite-volume solution of the static field."""

import numpy as np
import pytest

from models.reflection.tip.aperture import Geometry
from models.reflection.tip.layers import (
    backing_error,
    gap_error,
    reading,
    sensing_depth,
    without_gap,
)
from tests.models.reflection.sweep_records import TIP

WIDER = Geometry(1.5e-3, 5.0e-3)
SOLVER = 0.015
"""What the finite-volume solution itself is good to."""


@pytest.mark.parametrize(
    ("tip", "micrometres", "change"),
    [(TIP, 5, -0.236), (TIP, 10, -0.356), (TIP, 20, -0.498), (TIP, 50, -0.68), (TIP, 100, -0.79),
     (WIDER, 5, -0.103), (WIDER, 10, -0.168), (WIDER, 20, -0.265), (WIDER, 50, -0.439),
     (WIDER, 100, -0.583)],
)  # fmt: skip
def test_a_film_of_air_hides_as_much_as_the_field_solution_says(tip, micrometres, change):
    found = gap_error(tip, 20.0, micrometres * 1e-6)[0]
    assert found == pytest.approx(change, abs=SOLVER)


@pytest.mark.parametrize(
    ("widths", "behind", "change"),
    [(0.5, np.inf, 0.367), (0.5, 1.0, -0.227), (1.0, np.inf, 0.104), (1.0, 1.0, -0.061),
     (1.5, np.inf, 0.044), (1.5, 1.0, -0.019), (2.0, np.inf, 0.024), (2.0, 1.0, -0.006)],
)  # fmt: skip
def test_what_lies_behind_a_thin_sample_is_seen_as_in_the_field_solution(widths, behind, change):
    thick = reading(TIP, 20.0, 1.0, 20.0).real
    thin = reading(TIP, 20.0, widths * TIP.width, behind).real
    assert float(thin[0] / thick[0] - 1) == pytest.approx(change, abs=SOLVER)


def test_a_tip_sees_about_two_and_a_half_widths_deep():
    for eps in (5.0, 20.0, 60.0):
        assert 1.5 < sensing_depth(TIP, 0.025, eps) / TIP.width < 2.1
        assert 2.2 < sensing_depth(TIP, 0.01, eps) / TIP.width < 3.1


def test_depth_scales_with_the_aperture():
    double = Geometry(2 * TIP.inner, 2 * TIP.outer)
    assert sensing_depth(double) == pytest.approx(2 * sensing_depth(TIP), rel=1e-6)


def test_a_thick_sample_hides_what_is_behind_it():
    assert backing_error(TIP, 20.0, 8 * TIP.width) < 1e-3


def test_a_gap_is_taken_out_again():
    true = np.array([3.0, 8 - 1j, 20 - 4j, 45 - 12j])
    flat = reading(TIP, true, 1.0, true)
    read = reading(TIP, 1.0, 12e-6, true) * true / flat
    np.testing.assert_allclose(without_gap(TIP, read, 12e-6), true, rtol=1e-6)


def test_no_gap_changes_nothing():
    eps = np.array([5 - 1j, np.nan])
    np.testing.assert_array_equal(without_gap(TIP, eps, 0.0), eps)
    assert gap_error(TIP, 20.0, 1e-10)[0] == pytest.approx(0.0, abs=1e-3)
