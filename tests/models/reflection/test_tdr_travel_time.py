"""Permittivity from where the rods end: accuracy, refusal, bands, and what it may not depend on."""

import numpy as np
import pytest
from scipy.special import ndtr

from models.flags import BIT, slugs_of
from models.reflection.tdr.apparent import apparent_permittivity
from models.reflection.tdr.bench import Calibration, Description, Record, prepare
from models.reflection.tdr.calibration import water_index
from models.reflection.tdr.measure import by_travel_time
from models.reflection.tdr.probe import Head
from models.reflection.tdr.record import traces
from models.reflection.tdr.smoothing import following_widths, kernels
from models.reflection.tdr.travel_time import find, plain_timing
from tests.models.reflection.tdr_records import (
    apparent,
    calibrated,
    noisy,
    record,
    soil,
    truth,
    water,
)
from tests.published import table

ACCURACY = [("long_dry_sand", 0.02), ("long_moist_loam", 0.02), ("long_wet_loam", 0.02),
            ("long_tap_water", 0.02), ("long_moist_loam_coarse", 0.02),
            ("short_wet_loam", 0.05)]  # fmt: skip


@pytest.fixture(scope="module", params=["long", "short"])
def kind(request):
    return request.param


@pytest.mark.parametrize(("name", "within"), ACCURACY)
def test_permittivity_is_that_of_the_record(name, within):
    bench, known = calibrated(name.partition("_")[0])
    found = by_travel_time(record(name), bench, known)
    value, u = (found.columns[f"apparent_permittivity{s}"][0] for s in ("", "_u"))
    assert value == pytest.approx(truth(name)[0], rel=within)
    assert abs(value - truth(name)[0]) < 3 * u
    assert u < within * value
    assert slugs_of(int(found.flags[0])) == ()


def test_no_end_reflection_is_no_number_and_says_so():
    bench, known = calibrated("long")
    found = by_travel_time(record("long_saline_loam"), bench, known)
    assert np.isnan(found.columns["apparent_permittivity"][0])
    assert np.isnan(found.columns["frequency"][0])
    assert slugs_of(int(found.flags[0])) == ("no-end-reflection",)
    assert found.columns["bulk_conductivity"][0] == pytest.approx(0.2, rel=0.01)


@pytest.mark.parametrize("noise", [1e-4, 1.5e-3, 1e-2])
@pytest.mark.parametrize("medium", [soil(0.30, 0.2), soil(0.35, 0.5, 0.5), water, lambda s: water(s)
                                    + 1.28 / (s * 8.854e-12)], ids=str)  # fmt: skip
def test_the_largest_peak_of_noise_is_never_an_answer(medium, noise):
    """Whatever the noise, a conductive medium has no number or the right one."""
    bench, _ = calibrated("long")
    drawn = noisy([(medium, 1.0)], noise, 60, seed=7)
    found = apparent_permittivity(find(drawn, bench.timing), bench.timing)
    told = found.value[~np.isnan(found.value)]
    assert np.all(np.abs(told / apparent(medium) - 1) < 0.1)


def test_a_trace_of_noise_alone_has_no_number():
    bench, _ = calibrated("long")
    flat = traces(2.77e-8, 3.26e-11, np.random.default_rng(1).normal(0, 0.01, (100, 1024)))
    assert np.isnan(find(flat, bench.timing).end.steepest).all()


def test_times_on_rods_of_known_length():
    """A step that comes back after the printed time is the printed permittivity."""
    known = table("tdr_travel_time")
    timing = plain_timing(0.30, 0.0, 0.5e-9, 0.0)
    for ka, ns in zip(known["apparent_permittivity"].values, known["travel_time"].values,
                      strict=True):  # fmt: skip
        at = np.arange(4000) * 1e-11
        steps = 0.3 * (at > 4e-9) - 0.1 * (at > 4.5e-9) + 0.6 * (at > 4.5e-9 + ns * 1e-9)
        rho = np.convolve(steps, np.hanning(31) / np.hanning(31).sum(), mode="same")
        trace = traces(0.0, 1e-11, rho[:3900], 1e-5)
        found = apparent_permittivity(find(trace, timing), timing)
        assert found.value[0] == pytest.approx(ka, rel=4e-3)
        assert found.travel_time[0] == pytest.approx(ns * 1e-9, rel=2e-3)


def test_effective_frequency_is_that_of_the_rise():
    """A step that rises within 250 ps stands for 1.399 GHz."""
    at = np.arange(3000) * 1e-11
    scaled = (at - 1.2e-8) / (250e-12 / 2.5631031)
    rho = 0.3 * ndtr((at - 4e-9) / 6e-11) - 0.1 * ndtr((at - 4.6e-9) / 6e-11) + 0.5 * ndtr(scaled)
    timing = plain_timing(0.30, 0.0, 0.6e-9, 0.0)
    found = apparent_permittivity(find(traces(0.0, 1e-11, rho, 1e-5), timing), timing)
    assert found.frequency[0] == pytest.approx(1.399e9, rel=0.1)


def test_a_row_depends_on_nothing_but_itself():
    bench, _ = calibrated("long")
    drawn = noisy([(soil(0.25, 0.03), 1.0)], 0.004, 40, seed=3)
    together = find(drawn, bench.timing).end
    for row in (0, 17, 39):
        alone = find(drawn.rows(np.array([row])), bench.timing).end
        assert alone.steepest[0] == together.steepest[row]
        assert alone.tangent[0] == together.tangent[row]


def test_the_band_holds_the_truth_of_soils_it_was_not_made_for(kind):
    """200 soils at random, each with its own noise."""
    bench, _ = calibrated(kind)
    rng = np.random.default_rng(11)
    options = {} if kind == "long" else {"length": 0.10, "rods": 185.629, "window": 2.5,
                                         "points": 512}  # fmt: skip
    inside = []
    for draw in range(200):
        theta = rng.uniform(0.03, 0.43)
        medium = soil(theta, 0.05 * rng.uniform(0, 1) * theta, 0.45, rng.normal(4.7, 0.4),
                      rng.uniform(5, 35))  # fmt: skip
        one = noisy([(medium, 1.0)], 1.5e-3, 1, seed=draw, **options)
        found = apparent_permittivity(find(one, bench.timing), bench.timing)
        apart = abs(found.value[0] - apparent(medium))
        inside.append(apart < 1.96 * found.standard_uncertainty[0])
    assert np.mean(inside) >= 0.93


def test_noise_does_to_times_what_it_is_said_to_do():
    bench, _ = calibrated("long")
    drawn = noisy([(soil(0.25, 0.03), 1.0)], 0.003, 300, seed=5)
    found = find(drawn, bench.timing)
    end, usual = found.end, found.width == np.median(found.width)
    for times, said in ((end.tangent, end.tangent_u), (end.steepest, end.steepest_u)):
        assert 0.6 < np.median(said[usual]) / np.std(times[usual]) < 1.5


def test_effective_lengths_are_near_the_rods_own(kind):
    bench, _ = calibrated(kind)
    for length in bench.timing.effective_length:
        assert length == pytest.approx(bench.length, rel=0.04)


def test_smoothing_follows_the_rise():
    at = np.arange(2048) * 1e-11
    for rise in (1.2e-10, 4e-10, 1.2e-9):
        rho = 0.8 * ndtr((at - 1e-8) / (rise / 2.563))
        width = following_widths(traces(0.0, 1e-11, rho, 1e-4))[0] * 1e-11
        assert 0.4 * rise < width < 2.5 * rise


@pytest.mark.parametrize("width", [5, 9, 17, 65])
def test_smoothing_leaves_cubics_alone(width):
    level, slope, *_ = kernels(width)
    x = np.arange(width) - width // 2
    for power in range(4):
        assert level @ x**power == pytest.approx(float(power == 0), abs=1e-8 * width**power)
        assert slope @ x**power == pytest.approx(float(power == 1), abs=1e-8 * width**power)


def test_without_calibration_the_head_or_the_trace_itself_says_where_rods_begin():
    head = Head(86.6, 0.04 * np.sqrt(3) / 299792458.0)
    for given in ({"head": head}, {"offset": 2 * head.delay}, {}):
        bench = prepare(Description(length=0.3, **given), Calibration())
        found = by_travel_time(record("long_moist_loam"), bench, lambda: None)
        value, u = (found.columns[f"apparent_permittivity{s}"][0] for s in ("", "_u"))
        assert value == pytest.approx(13.18, rel=0.05)
        assert abs(value - 13.18) < 3 * u


def test_water_of_a_calibration_is_that_of_its_temperature():
    for warmth in (5.0, 20.0, 40.0):
        there = apparent(lambda s, warmth=warmth: water(s, warmth))
        assert water_index(warmth)[0] ** 2 == pytest.approx(there, rel=2e-3)
    assert water_index(20.0, 1.0)[1] > 0.01


def test_a_record_that_is_cut_off_says_so():
    bench, known = calibrated("long")
    whole = record("long_wet_loam").trace
    cut = Record(traces(whole.start, whole.step, whole.rho[:, :370]))
    found = by_travel_time(cut, bench, known)
    assert found.flags[0] & BIT["record-too-short"]
