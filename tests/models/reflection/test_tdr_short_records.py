"""Conductivity from records that end soon after the end reflection."""

from dataclasses import replace

import numpy as np
import pytest

from models.flags import BIT
from models.reflection.tdr.bench import Record, prepare
from models.reflection.tdr.measure import by_travel_time
from tests.models.reflection.tdr_population import (
    KINDS,
    calibrated_setup,
    drawn,
    fewest,
    soil_at_random,
)
from tests.models.reflection.tdr_records import calibrated, record, truth

NAMES = ["long_moist_loam", "long_moist_loam_coarse", "long_wet_loam",
         "long_saline_loam", "long_tap_water", "long_water", "long_dry_sand",
         "short_wet_loam", "short_water"]  # fmt: skip


def without(bench, names):
    """The bench without long records of some calibration traces."""
    calibration = bench.calibration
    cut = {name: Record(getattr(calibration, name).trace) for name in names}
    return prepare(bench.probe, replace(calibration, **cut))


def apart(found, name):
    """From the truth, in standard uncertainties."""
    away = found.columns["bulk_conductivity"][0] - truth(name)[1]
    return abs(away) / found.columns["bulk_conductivity_u"][0]


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("bare", [(), ("air", "water", "short")], ids=["long", "bare"])
def test_the_band_of_a_trace_alone_holds_the_truth(name, bare):
    bench = without(calibrated(name.partition("_")[0])[0], bare)
    assert apart(by_travel_time(Record(record(name).trace), bench, None), name) < 1.96


@pytest.mark.parametrize("name", NAMES)
def test_bare_calibration_traces_widen_the_band_of_long_records(name):
    bench = without(calibrated(name.partition("_")[0])[0], ("air", "water", "short"))
    assert apart(by_travel_time(record(name), bench, None), name) < 1.96


@pytest.mark.parametrize("name", NAMES[:6])
def test_the_band_holds_where_no_short_was_made(name):
    bench, _ = calibrated("long")
    silent = prepare(bench.probe, replace(bench.calibration, short=None))
    assert apart(by_travel_time(Record(record(name).trace), silent, None), name) < 1.96


def test_a_record_that_ends_before_its_reflections_have_died_away_is_flagged():
    bench, _ = calibrated("long")
    for name in ("long_water", "long_tap_water"):
        found = by_travel_time(Record(record(name).trace), bench, None)
        assert found.flags[0] & BIT["record-too-short"], name
        assert not by_travel_time(record(name), bench, None).flags[0] & BIT["record-too-short"]


def test_a_trace_cut_soon_after_its_end_is_flagged_and_wider():
    bench, _ = calibrated("long")
    trace = record("long_moist_loam").trace
    kept = round(0.39 * trace.points)
    cut = by_travel_time(Record(replace(trace, rho=trace.rho[:, :kept])), bench, None)
    whole = by_travel_time(Record(trace), bench, None)
    assert cut.flags[0] & BIT["record-too-short"]
    assert apart(cut, "long_moist_loam") < 1.96
    name = "bulk_conductivity_u"
    assert cut.columns[name][0] > 2 * whole.columns[name][0]
    assert cut.columns["apparent_permittivity"][0] == pytest.approx(
        whole.columns["apparent_permittivity"][0], rel=0.01
    )


def test_traces_alone_know_their_conductivity_over_soils_probes_and_cables():
    """No long record anywhere, cables of 3 to 30 m; and none is taken for another line's."""
    rng = np.random.default_rng(11)
    held = []
    for _ in range(40):
        setup, bench = calibrated_setup(rng)
        for kind in KINDS:
            medium, sigma = soil_at_random(rng, kind)
            found = by_travel_time(drawn(medium, setup, rng), bench, lambda: None)
            value, u = (found.columns[f"bulk_conductivity{end}"][0] for end in ("", "_u"))
            held.append(abs(value - sigma) < 1.96 * u)
            assert not found.begins.strange.any()
    assert sum(held) >= fewest(len(held))
