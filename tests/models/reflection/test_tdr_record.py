"""What a record says: axes, conventions, and every way to get them wrong."""

import numpy as np
import pytest
from scipy.constants import speed_of_light

from models.errors import ParameterError
from models.reflection.tdr.probe import Rods, three_rod_impedance, two_rod_impedance
from models.reflection.tdr.record import even_axis, from_distance, traces, window_axis
from tests.models.reflection.tdr_population import AIR, CABLES, Setup, drawn
from tests.published import table

QUIET = np.zeros(64)


def test_a_window_of_n_points_has_n_minus_one_steps_and_time_goes_there_and_back():
    start, step = window_axis(3.0, 5.0, 251)
    assert start == pytest.approx(2 * 3.0 / speed_of_light)
    assert step == pytest.approx(2 * 5.0 / 250 / speed_of_light)
    assert step == pytest.approx(0.1334e-9, abs=1e-13)  # 2 cm apparent


def test_the_velocity_factor_counts_once():
    plain, slow = window_axis(3.0, 5.0, 251), window_axis(3.0, 5.0, 251, 0.66)
    assert slow[1] == pytest.approx(plain[1] / 0.66)
    assert from_distance(np.linspace(3.0, 8.0, 251), 0.66) == pytest.approx(slow)


def test_one_trace_and_many_have_one_shape():
    one, many = traces(0.0, 1e-11, QUIET), traces(0.0, 1e-11, np.tile(QUIET, (3, 1)), 0.01)
    assert (one.count, one.points, many.count) == (1, 64, 3)
    assert one.end == pytest.approx(63e-11)
    assert many.stated_noise == pytest.approx([0.01] * 3)
    assert np.isnan(one.stated_noise).all()


@pytest.mark.parametrize(
    ("make", "sentence"),
    [
        (lambda: traces(0.0, 1e-11, np.zeros(8)), "at least 16 points, found 8"),
        (lambda: traces(0.0, 1e-11, np.where(QUIET == 0, 74.0, 0.0)), "found 74"),
        (lambda: traces(0.0, 1e-11, np.append(QUIET, np.nan)), "point 64 is not a finite"),
        (lambda: traces(0.0, 3e-20, QUIET), "found 3e-08 ps"),
        (lambda: traces(0.0, 1e-5, QUIET), "the last at 630 us"),
        (lambda: from_distance([1.0, 2.0, 1.5]), "point 2 does not"),
        (lambda: from_distance([1.0, 1.0, 1.0]), "point 1 does not"),
        (lambda: even_axis([0.0, 1.0, 5.0, 6.0], "axis"), "even steps"),
        (lambda: even_axis([0.0], "axis"), "go up"),
    ],
)
def test_what_is_no_record_is_refused_by_name(make, sentence):
    with pytest.raises(ParameterError, match=sentence):
        make()


def test_a_low_loss_cable_rings_above_one_and_is_a_record():
    """In air, 3 m of it: the open end of a head of 150 Ohm comes back with 1.3."""
    rng = np.random.default_rng(0)
    setup = Setup(0.2, 190.0, (180.0, 2.5, 0.04), CABLES["low_loss"], 3.0, 1.3e-10, 1e-3, 2048)
    trace = drawn(AIR, setup, rng).trace
    assert 1.25 < trace.rho.max() < 1.45


def test_rod_impedance_from_geometry():
    known = table("tdr_rod_impedance")
    for radius, spacing, impedance in zip(*(c.values for c in known.values()), strict=True):
        found = three_rod_impedance(spacing / 1e3, 2 * radius / 1e3)
        assert found == pytest.approx(impedance, abs=0.005)


def test_two_rods_are_half_as_far_from_the_plane_between_them():
    """Z = (eta0 / pi) arcosh(s / d): the reference of s / d = cosh(1) is eta0 / pi."""
    found = two_rod_impedance(np.cosh(1.0) * 0.01, 0.01)
    assert found == pytest.approx(376.730313 / np.pi, rel=1e-7)


def test_probe_constant_of_rods():
    assert Rods(0.30, 178.631).constant == pytest.approx(1.580538, abs=6e-7)
