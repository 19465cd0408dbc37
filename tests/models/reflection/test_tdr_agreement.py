"""Calibration traces that contradict each other, and traces that are none of their probe."""

from dataclasses import replace

import numpy as np
import pytest

from models.errors import ParameterError
from models.flags import BIT, slugs_of
from models.reflection.tdr.bench import Record, prepare
from models.reflection.tdr.calibration import water_index
from models.reflection.tdr.invert_traces import by_whole_trace
from models.reflection.tdr.measure import by_travel_time
from models.reflection.tdr.record import traces
from tests.models.reflection.tdr_records import calibrated, record

BENCH, KNOWN = calibrated("long")
LOAM = record("long_moist_loam")


def upside_down(given):
    return None if given is None else replace(given, rho=-given.rho)


def like(given, rho):
    """A trace on the axis of another."""
    return replace(given, rho=np.atleast_2d(rho))


@pytest.mark.parametrize(
    ("changes", "sentence", "place"),
    [
        ({"short": "long_air"}, "open end; shorted rods end near -1", "short"),
        ({"short": "long_water"}, "open end", "short"),
        ({"short": "long_moist_loam"}, "no short", "short"),
        ({"short": "long_air", "air": None, "water": None}, "open end", "short"),
        ({"air": "long_short", "short": "long_air"}, "this is a short", "air"),
        ({"water": "long_moist_loam"}, "an effective length of 0.0", "water"),
        ({"water": "long_air"}, "no later in the water trace", "water"),
        ({"water": "long_dry_sand"}, "no later in the water trace", "water"),
    ],
)
def test_calibration_traces_that_contradict_each_other_are_refused(changes, sentence, place):
    mistaken = replace(
        BENCH.calibration,
        **{name: None if other is None else record(other) for name, other in changes.items()},
    )
    with pytest.raises(ParameterError) as caught:
        prepare(BENCH.probe, mistaken)
    assert sentence in str(caught.value)
    assert ("calibration", place) in [complaint.place for complaint in caught.value.complaints]


def test_rods_of_another_length_than_air_and_water_say_are_refused():
    for length in (0.14, 0.65):
        with pytest.raises(ParameterError, match=r"effective length|no end reflection"):
            prepare(replace(BENCH.probe, length=length), BENCH.calibration)


NOISE = np.random.default_rng(1)
POINTS = LOAM.trace.points
STRANGE = {
    "upside down": Record(upside_down(LOAM.trace), upside_down(LOAM.late)),
    "noise": Record(like(LOAM.trace, NOISE.normal(0, 0.1, POINTS))),
    "strong noise": Record(like(LOAM.trace, NOISE.normal(0, 0.3, POINTS))),
    "nothing": Record(like(LOAM.trace, np.zeros(POINTS))),
    "sine": Record(like(LOAM.trace, 0.5 * np.sin(np.arange(POINTS) / 60))),
    "reversed in time": Record(like(LOAM.trace, LOAM.trace.rho[:, ::-1])),
    "one added": Record(replace(LOAM.trace, rho=LOAM.trace.rho + 1)),
    "one-way time": Record(replace(LOAM.trace, start=LOAM.trace.start / 2,
                                   step=LOAM.trace.step / 2)),
    "velocity factor": Record(replace(LOAM.trace, start=LOAM.trace.start / 0.66,
                                      step=LOAM.trace.step / 0.66)),
}  # fmt: skip


@pytest.mark.parametrize("name", STRANGE)
@pytest.mark.parametrize("method", [by_travel_time, by_whole_trace])
def test_what_is_no_trace_of_the_line_has_no_number_but_a_flag(name, method):
    found = method(STRANGE[name], BENCH, KNOWN)
    assert "no-end-reflection" in slugs_of(int(found.flags[0]))
    assert found.begins.strange[0]
    assert np.isnan(found.columns["apparent_permittivity"][0])
    assert np.isnan(found.columns["bulk_conductivity"][0])


@pytest.mark.parametrize("method", [by_travel_time, by_whole_trace])
@pytest.mark.parametrize("late", [True, False])
def test_a_short_is_no_soil(method, late):
    shorted = record("long_short")
    found = method(shorted if late else Record(shorted.trace), BENCH, KNOWN)
    assert np.isnan(found.columns["apparent_permittivity"][0])
    assert np.isnan(found.columns["bulk_conductivity"][0])
    assert found.flags[0] & BIT["no-end-reflection"]
    assert found.flags[0] & BIT["out-of-gate:bulk_conductivity"]


def test_an_open_line_that_is_not_in_air_has_no_permittivity_below_one():
    bare = record("long_air").trace
    level = bare.rho[0, : POINTS // 40].mean()
    step = np.where(np.arange(POINTS) < np.argmax(bare.rho[0] > 0.3), level, 1.0)
    noisy = step + np.random.default_rng(2).normal(0, 1e-3, POINTS)
    found = by_whole_trace(Record(like(bare, noisy)), BENCH, KNOWN)
    value = found.columns["apparent_permittivity"][0]
    assert np.isnan(value) or value >= 0.7


def test_a_trace_among_strange_ones_keeps_its_numbers():
    alone = by_travel_time(Record(LOAM.trace), BENCH, KNOWN)
    rho = np.concatenate([STRANGE["noise"].trace.rho, LOAM.trace.rho, -LOAM.trace.rho])
    together = by_travel_time(Record(traces(LOAM.trace.start, LOAM.trace.step, rho)), BENCH, KNOWN)
    assert together.begins.strange.tolist() == [True, False, True]
    for name, values in alone.columns.items():
        assert together.columns[name][1] == pytest.approx(values[0], rel=1e-9), name


def test_the_formula_of_water_is_not_exact():
    """Kaatze (1989) holds to 0.05 in the static permittivity: 0.003 in the index of water."""
    assert water_index(20.0)[1] > 1e-3
    assert water_index(20.0, 0.5)[1] > water_index(20.0)[1]
