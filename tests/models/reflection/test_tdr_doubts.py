"""Traces sent as what they are not: another axis, another scale, no steps, another probe."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.constants import speed_of_light

from models.errors import ParameterError
from models.flags import BIT
from models.reflection.tdr.agreement import begins_of
from models.reflection.tdr.bench import (
    Calibration,
    Description,
    Record,
    identified,
    prepare,
)
from models.reflection.tdr.circuit import contradicting_constant, stated_constant
from models.reflection.tdr.doubts.axis import in_nanoseconds
from models.reflection.tdr.doubts.clipping import clipped
from models.reflection.tdr.doubts.levels import doubts
from models.reflection.tdr.invert_traces import system_behind
from models.reflection.tdr.measure import by_travel_time
from models.reflection.tdr.record import traces
from tests.models.reflection.tdr_population import KINDS, calibrated_setup, drawn, soil_at_random
from tests.models.reflection.tdr_records import calibrated, record, truth

LOAM = record("long_moist_loam")
BENCH, KNOWN = calibrated("long")
BARE = prepare(BENCH.probe, Calibration())
PLACE = np.arange(2048.0)
STEPLESS = {
    **{f"sine of {period}": 0.5 * np.sin(2 * np.pi * PLACE / period)
       for period in (120, 300, 900, 3000)},
    "swelling sine": 0.5 * np.sin(PLACE / 60) * np.sin(PLACE / 700),
    "noisy sine": 0.3 * np.sin(PLACE / 60)
    + np.random.default_rng(4).normal(0, 0.02, PLACE.size),
    "ramp": PLACE / 2048,
    "triangles": 0.5 * np.abs((PLACE / 300) % 2 - 1),
    "parabola": np.square(PLACE / 2048 - 0.5),
    "decay": np.exp(-PLACE / 400),
    "ringing": 0.5 * np.exp(-PLACE / 100) * np.sin(PLACE / 40),
}  # fmt: skip


@pytest.mark.parametrize("name", STEPLESS)
@pytest.mark.parametrize("offset", [None, 4.6e-10])
def test_what_holds_no_steps_has_no_number_but_a_flag(name, offset):
    given = Record(traces(LOAM.trace.start, LOAM.trace.step, STEPLESS[name]))
    bench = prepare(replace(BENCH.probe, offset=offset), Calibration())
    found = by_travel_time(given, bench, None)
    assert found.begins.stepless[0]
    assert found.flags[0] & BIT["no-end-reflection"]
    for column in ("apparent_permittivity", "bulk_conductivity"):
        assert np.isnan(found.columns[column][0])


def until_the_end(given, setup, medium):
    """A trace that stops 0.6 ns after the end reflection."""
    index = np.sqrt(medium(2j * np.pi * 1e9)).real
    arrival = 2 * setup.cable_length / (setup.cable[0] * speed_of_light)
    way = 2 * setup.filled_head.delay + 2 * setup.length * index / speed_of_light
    last = int((arrival + way + 0.6e-9 - given.trace.start) / given.trace.step)
    return replace(given.trace, rho=given.trace.rho[:, : max(last, 64)])


def test_no_probe_cable_or_soil_is_doubted_without_need():
    rng = np.random.default_rng(21)
    for _ in range(30):
        setup, bench = calibrated_setup(rng)
        bare = prepare(bench.probe, Calibration())
        assert contradicting_constant(bench, system_behind(bench)()) is None
        for kind in KINDS:
            medium, _ = soil_at_random(rng, kind)
            given = drawn(medium, setup, rng)
            begins = begins_of(given.trace, None)
            assert not (begins.stepless & np.isfinite(begins.time)).any()
            cut = begins_of(until_the_end(given, setup, medium), None)
            assert not (cut.stepless & np.isfinite(cut.time)).any()
            assert not list(doubts(bench, begins))
            assert not in_nanoseconds(given, bare).any()


def scaled(given, factor, shift=0.0):
    late = None if given.late is None else replace(given.late, rho=shift + factor * given.late.rho)
    return Record(replace(given.trace, rho=shift + factor * given.trace.rho), late)


@pytest.mark.parametrize(("factor", "refused"), [(0.31, True), (0.6, True), (0.8, False)])
def test_an_air_trace_far_from_one_is_told_with_its_level(factor, refused):
    calibration = replace(BENCH.calibration, short=None, water=None,
                          air=scaled(BENCH.calibration.air, factor))  # fmt: skip
    if refused:
        with pytest.raises(ParameterError, match=rf"level of \+{factor}.*send level"):
            prepare(BENCH.probe, calibration)
        return
    bench = prepare(BENCH.probe, calibration)
    (told,) = doubts(bench, begins_of(scaled(LOAM, factor).trace, bench.begin))
    assert "ends at +0.8" in told
    right = prepare(BENCH.probe, replace(calibration, air=BENCH.calibration.air))
    assert not list(doubts(right, begins_of(LOAM.trace, right.begin)))


def test_volts_of_half_a_step_lie_too_high_before_the_first_reflection():
    """0.5 (1 + rho): an open line ends at +1 as it should, and the cable lies at 0.5."""
    begins = begins_of(scaled(LOAM, 0.5, 0.5).trace, None)
    (told,) = doubts(BARE, begins)
    assert "1 traces lie at +0.5" in told
    described = Description(length=0.3, cable=replace(BENCH.probe.cable, impedance=150.0))
    # (150 - 50) / (150 + 50) = 0.5
    assert not list(doubts(prepare(described, Calibration()), begins))


@pytest.mark.parametrize("impedance", [17.86, 120.0, 250.0])
def test_a_probe_impedance_that_the_calibration_contradicts_widens_the_band(impedance):
    bench = replace(BENCH, probe=replace(BENCH.probe, impedance=impedance))
    found = by_travel_time(LOAM, bench, KNOWN)
    value, u = (found.columns[f"bulk_conductivity{end}"][0] for end in ("", "_u"))
    true, as_described = truth("long_moist_loam")[1], impedance / 178.631
    assert value == pytest.approx(true * as_described, rel=0.01)
    assert abs(value - true) < 1.96 * u
    shown = contradicting_constant(bench, KNOWN())
    assert shown.value / stated_constant(bench).value == pytest.approx(1 / as_described, rel=0.01)


@pytest.mark.parametrize("impedance", [170.0, 178.631, 190.0])
def test_a_probe_impedance_about_that_of_the_calibration_is_taken_at_its_word(impedance):
    bench = replace(BENCH, probe=replace(BENCH.probe, impedance=impedance))
    assert contradicting_constant(bench, KNOWN()) is None
    alone = by_travel_time(LOAM, bench, None).columns["bulk_conductivity_u"]
    assert by_travel_time(LOAM, bench, KNOWN).columns["bulk_conductivity_u"] == alone


EVERY = ("moist_loam", "wet_loam", "water", "moist_loam_coarse", "tap_water", "saline_loam")


@pytest.mark.parametrize("name", EVERY)
def test_a_long_record_of_the_same_medium_is_no_matter(name):
    assert not by_travel_time(record(f"long_{name}"), BENCH, KNOWN).contradicted[0]


@pytest.mark.parametrize("name", ["moist_loam", "moist_loam_coarse", "wet_loam"])
def test_a_long_record_of_a_saline_soil_is_told(name):
    mixed = Record(record(f"long_{name}").trace, record("long_saline_loam").late)
    assert by_travel_time(mixed, BENCH, KNOWN).contradicted[0]


def test_a_trace_that_was_cut_off_is_told_and_others_are_not():
    cut = replace(LOAM.trace, rho=np.clip(LOAM.trace.rho, -0.2, 0.3))
    assert clipped(cut).tolist() == [True]
    for name in EVERY:
        trace = record(f"long_{name}").trace
        assert not clipped(trace)[0]
        assert not clipped(replace(trace, rho=np.round(trace.rho, 1)))[0]
        assert not clipped(replace(trace, rho=np.ones_like(trace.rho)))[0]


@pytest.mark.parametrize("step", [0.01, 0.02])
def test_bands_hold_what_coarse_steps_take_away(step):
    """Levels written down in steps: noise is hidden in them, and means do not lessen them."""
    steps = {}
    for name in ("moist_loam", "wet_loam", "saline_loam"):
        own = record(f"long_{name}")
        coarse = Record(*(replace(one, rho=step * np.round(one.rho / step))
                          for one in (own.trace, own.late)))  # fmt: skip
        found = by_travel_time(coarse, BENCH, KNOWN)
        value, u = (found.columns[f"bulk_conductivity{end}"][0] for end in ("", "_u"))
        steps[name] = abs(value - truth(f"long_{name}")[1]) / u
    assert max(steps.values()) < 3


NAMES = ("moist_loam", "wet_loam", "water", "moist_loam_coarse")
METRE_IN_NS = 2e9 / speed_of_light
"""Two-way nanoseconds along a metre of air."""


@pytest.mark.parametrize("name", NAMES)
def test_nanoseconds_taken_as_metres_are_suspected(name):
    trace = record(f"long_{name}").trace
    sent = Record(replace(trace, start=METRE_IN_NS * trace.start, step=METRE_IN_NS * trace.step))
    assert np.isnan(by_travel_time(sent, BARE, None).columns["apparent_permittivity"][0])
    assert in_nanoseconds(sent, BARE).tolist() == [True]


@pytest.mark.parametrize("name", [*NAMES, "saline_loam", "dry_sand", "air", "short"])
def test_metres_are_not_taken_for_nanoseconds(name):
    assert in_nanoseconds(record(f"long_{name}"), BARE).tolist() == [False]


def test_an_air_trace_in_steps_too_coarse_for_its_begin_leaves_that_of_water():
    """Its first reflection drowns in the steps: the line is sought from that of water."""
    air = record("long_air").trace
    coarse = Record(replace(air, rho=np.round(4 * air.rho) / 4))
    bench = replace(BENCH, calibration=replace(BENCH.calibration, air=coarse))
    found = identified(bench)
    assert np.isfinite(found.values).all()
    flat = Record(replace(air, rho=np.zeros_like(air.rho)))
    silent = replace(BENCH.calibration, air=flat, water=flat)
    with pytest.raises(ParameterError, match="neither the air nor the water trace"):
        identified(replace(BENCH, calibration=silent))
