"""Conductivity from late levels: the printed numbers, the cable in series, noise, and limits."""

import numpy as np
import pytest

from models.reflection.tdr.bench import Calibration, Description, Record, prepare
from models.reflection.tdr.circuit import circuit
from models.reflection.tdr.late_level import (
    Circuit,
    Known,
    bulk_conductivity,
    late_level,
    level_after,
    resistance,
)
from models.reflection.tdr.measure import by_travel_time
from models.reflection.tdr.probe import Rods
from models.reflection.tdr.record import traces
from tests.models.reflection.tdr_records import calibrated, record, truth
from tests.published import table

CONSTANT = Known(Rods(0.30, 178.631).constant)
NAMES = ["long_moist_loam", "long_wet_loam", "long_saline_loam", "long_tap_water",
         "long_dry_sand", "short_wet_loam"]  # fmt: skip


def test_levels_become_the_printed_conductivities():
    known = table("tdr_conductivity")
    levels, ohms, printed = (known[name] for name in ("level", "series_resistance", "conductivity"))
    for level, rs, sigma, within in zip(levels.values, ohms.values, printed.values,
                                        printed.tolerance, strict=True):  # fmt: skip
        found = bulk_conductivity(np.array([level]), np.zeros(1), Circuit(CONSTANT, Known(rs)))
        assert found.value[0] == pytest.approx(sigma, abs=2 * within)


@pytest.mark.parametrize("name", NAMES)
def test_conductivity_is_that_of_the_record(name):
    bench, known = calibrated(name.partition("_")[0])
    found = by_travel_time(record(name), bench, known).columns
    value, u = found["bulk_conductivity"][0], found["bulk_conductivity_u"][0]
    assert value == pytest.approx(truth(name)[1], rel=0.01)
    assert abs(value - truth(name)[1]) < 3 * u


@pytest.mark.parametrize("kind", ["long", "short"])
def test_calibration_traces_tell_the_probe_constant(kind):
    bench, known = calibrated(kind)
    silent = prepare(Description(length=bench.length), bench.calibration)
    told = circuit(silent, 7e-7, known())
    stated = circuit(bench, 7e-7, None)
    assert told.constant.value == pytest.approx(stated.constant.value, rel=2e-3)
    assert circuit(silent, 7e-7, None) is None


def test_a_cable_that_is_left_out_reads_low():
    """Without its resistance the conductivity of 0.2 S/m reads about 3 % low."""
    bench, _ = calibrated("long")
    level = late_level(record("long_saline_loam").late)
    open_level = Known(*level_after(bench.calibration.air.late, float(level.from_time[0])))
    plain = bulk_conductivity(level.value, level.standard_uncertainty,
                              Circuit(CONSTANT, Known(0.0), open_level))  # fmt: skip
    assert plain.value[0] / 0.2 - 1 == pytest.approx(-0.029, abs=0.003)


def test_an_assumed_cable_is_in_the_band():
    bench = prepare(Description(length=0.3, impedance=178.631, offset=4.6e-10), Calibration())
    found = by_travel_time(record("long_saline_loam"), bench, lambda: None).columns
    apart = abs(found["bulk_conductivity"][0] - 0.2)
    assert apart < 2 * found["bulk_conductivity_u"][0]
    assert found["bulk_conductivity_u_shared"][0] > 0.9 * found["bulk_conductivity_u"][0]


def test_noise_above_an_open_line_is_no_conduction_not_a_negative_one():
    found = bulk_conductivity(np.array([1.002, 0.998]), np.full(2, 1e-3),
                              Circuit(CONSTANT, Known(0.2)))  # fmt: skip
    assert found.value[0] == 0.0
    assert found.value[1] > 0.0
    assert np.all(found.standard_uncertainty > 0.0)


def test_less_resistance_than_the_cable_is_no_number():
    found = bulk_conductivity(np.array([-0.999]), np.array([1e-4]), Circuit(CONSTANT, Known(0.5)))
    assert np.isnan(found.value[0])
    assert np.isnan(found.standard_uncertainty[0])


def test_the_scale_of_the_instrument_is_taken_from_air():
    assert resistance(-0.2, 0.98, 50.0) == pytest.approx(50 * (1.6 / 1.98) / (2 - 1.6 / 1.98))
    assert resistance(0.0, 1.0, 50.0) == 50.0


def test_a_level_that_drifts_is_read_from_its_settled_end():
    at = np.arange(400.0)
    rho = np.where(at < 250, 0.5 - 0.002 * (250 - at), 0.5)
    noise = np.random.default_rng(0).normal(0, 1e-4, (3, 400))
    level = late_level(traces(0.0, 1e-9, rho + noise))
    assert level.settled.all()
    assert level.value == pytest.approx([0.5] * 3, abs=1e-3)
    falling = late_level(traces(0.0, 1e-9, 0.9 - 2e-3 * at + noise[0]))
    assert not falling.settled[0]
    assert falling.standard_uncertainty[0] > 0.01


def test_the_band_holds_the_truth_with_stated_noise():
    """200 draws of noise over the late levels of one record."""
    rng = np.random.default_rng(5)
    noise, points = 3e-3, 64
    sigma, rs = 0.04, 0.22
    ohms = CONSTANT.value / sigma + rs
    level = (ohms - 50.0) / (ohms + 50.0)
    drawn = traces(6.7e-7, 5e-9, level + rng.normal(0, noise, (200, points)), noise)
    late = late_level(drawn)
    found = bulk_conductivity(late.value, late.standard_uncertainty, Circuit(CONSTANT, Known(rs)))
    inside = np.abs(found.value - sigma) < 1.96 * found.standard_uncertainty
    assert 0.93 <= inside.mean() <= 0.97


def test_a_trace_alone_gives_what_its_end_shows():
    bench, known = calibrated("long")
    found = by_travel_time(Record(record("long_tap_water").trace), bench, known)
    assert found.columns["bulk_conductivity"][0] == pytest.approx(0.05, rel=0.15)
