"""Inversion of the whole trace: accuracy, bands, misfit, layers, and what it needs."""

import numpy as np
import pytest

from models.errors import ParameterError
from models.flags import BIT, slugs_of
from models.numerics.least_squares import least_squares
from models.reflection.tdr.bench import Calibration, Description, Record, guess, prepare
from models.reflection.tdr.calibration import rise_of
from models.reflection.tdr.invert_traces import by_whole_trace
from models.reflection.tdr.probe import Cable, Head
from tests.models.reflection.tdr_records import (
    apparent,
    calibrated,
    noisy,
    record,
    soil,
    truth,
)

NAMES = ["long_dry_sand", "long_moist_loam", "long_wet_loam", "long_saline_loam",
         "long_moist_loam_coarse", "short_wet_loam"]  # fmt: skip
HEAD = Head(150 / np.sqrt(3), 0.04 * np.sqrt(3) / 299792458.0)


@pytest.mark.parametrize("name", NAMES)
def test_permittivity_is_that_of_the_record_end_reflection_or_not(name):
    bench, known = calibrated(name.partition("_")[0])
    found = by_whole_trace(record(name), bench, known)
    value, u = (found.columns[f"apparent_permittivity{s}"][0] for s in ("", "_u"))
    assert value == pytest.approx(truth(name)[0], rel=0.01)
    assert abs(value - truth(name)[0]) < 3.5 * u
    assert found.columns["bulk_conductivity"][0] == pytest.approx(truth(name)[1], rel=0.01)
    assert 0.8 < found.figures["reduced_chi_square"][0] < 1.2
    assert slugs_of(int(found.flags[0])) == ()


@pytest.mark.parametrize("kind", ["long", "short"])
def test_calibration_traces_tell_the_line(kind):
    bench, known = calibrated(kind)
    line = known()
    assert line.reduced_chi_square == pytest.approx(1.0, abs=0.15)
    assert line.system.rise_time == pytest.approx(150e-12, rel=0.03)
    assert line.system.head.impedance == pytest.approx(HEAD.impedance, rel=0.01)
    assert line.system.head.delay == pytest.approx(HEAD.delay, rel=0.01)
    assert line.system.cable.delay == pytest.approx(3.0 / (0.66 * 299792458.0), rel=1e-3)
    assert line.system.rods.length == pytest.approx(bench.length, rel=1e-3)
    assert line.system.rods.impedance == pytest.approx(bench.probe.impedance, rel=2e-3)


def test_a_model_that_is_too_simple_says_so_and_a_richer_one_is_found():
    bench, known = calibrated("long")
    clay = soil(0.35, 0.05, 0.5, clay=((10, 40e6), (4, 300e6)))
    drawn = Record(noisy([(clay, 1.0)], 0.0015, 1, seed=2))
    simple = by_whole_trace(drawn, bench, known, terms=1)
    assert simple.flags[0] & BIT["model-too-simple"]
    assert simple.figures["reduced_chi_square"][0] > 2.0
    found = by_whole_trace(drawn, bench, known)
    value, u = (found.columns[f"apparent_permittivity{s}"][0] for s in ("", "_u"))
    assert value == pytest.approx(apparent(clay), rel=0.02)
    assert abs(value - apparent(clay)) < 3.5 * u
    assert not found.flags[0] & BIT["model-too-simple"]
    apart = abs(simple.columns["apparent_permittivity"][0] / apparent(clay) - 1)
    assert apart > abs(value / apparent(clay) - 1)


def test_rods_that_are_partly_inserted():
    bench, known = calibrated("long")
    medium = soil(0.25, 0.02)
    air = (lambda s: 1.0006 + 0 * s, 1.0 / 3.0)
    drawn = Record(noisy([air, (medium, 2.0 / 3.0)], 0.0015, 1, seed=3))
    found = by_whole_trace(drawn, bench, known, inserted=0.2)
    assert found.columns["apparent_permittivity"][0] == pytest.approx(apparent(medium), rel=0.01)
    assert found.columns["bulk_conductivity"][0] == pytest.approx(0.02, rel=0.02)
    wrong = by_whole_trace(drawn, bench, known)
    assert wrong.flags[0] & BIT["model-too-simple"]


def test_a_wetting_front_is_found_where_it_is():
    bench, known = calibrated("long")
    wet, dry = soil(0.35, 0.03), soil(0.10, 0.004)
    drawn = Record(noisy([(wet, 0.4), (dry, 0.6)], 0.0015, 1, seed=4))
    found = by_whole_trace(drawn, bench, known, sections=2)
    upper, lower = found.details[0]["sections"]
    assert upper["length"] == pytest.approx(0.12, abs=0.004)
    assert upper["apparent_permittivity"] == pytest.approx(apparent(wet), rel=0.02)
    assert lower["apparent_permittivity"] == pytest.approx(apparent(dry), rel=0.02)
    assert found.columns["apparent_permittivity"][0] == lower["apparent_permittivity"]


def test_parameters_come_with_their_covariance():
    bench, known = calibrated("long")
    found = by_whole_trace(record("long_moist_loam"), bench, known)
    detail = found.details[0]
    covariance = np.asarray(detail["covariance"])
    assert covariance.shape == (len(detail["parameters"]),) * 2
    assert np.allclose(covariance, covariance.T)
    assert np.all(np.linalg.eigvalsh(covariance) > -1e-9)
    last = detail["parameters"].index("ln_bulk_conductivity")
    u = found.columns["bulk_conductivity_u"][0] / found.columns["bulk_conductivity"][0]
    assert np.sqrt(covariance[last, last]) == pytest.approx(u)


def test_a_described_line_does_without_calibration():
    given = Description(length=0.3, impedance=178.631, head=HEAD,
                        cable=Cable(50.0, 0.0, 0.15, 3e-4), cable_length=3.0,
                        rise_time=150e-12)  # fmt: skip
    bench = prepare(given, Calibration())
    for name in ("long_moist_loam", "long_saline_loam"):
        found = by_whole_trace(record(name), bench, lambda: None)
        value, u = (found.columns[f"apparent_permittivity{s}"][0] for s in ("", "_u"))
        assert value == pytest.approx(truth(name)[0], rel=0.02)
        assert abs(value - truth(name)[0]) < 3 * u


def test_what_a_whole_trace_lacks_is_named():
    bench = prepare(Description(length=0.3, offset=4.6e-10), Calibration())
    with pytest.raises(ParameterError) as caught:
        by_whole_trace(record("long_moist_loam"), bench, lambda: None)
    assert {c.name for c in caught.value.complaints} == {"probe_impedance", "head", "cable"}


def test_a_search_starts_near_what_a_trace_shows():
    bench, _ = calibrated("long")
    arrival, rise = rise_of((record("long_air").trace,))
    start = guess(bench, arrival, rise)
    assert start.cable.delay == pytest.approx(3.0 / (0.66 * 299792458.0), rel=0.01)
    assert start.rise_time == pytest.approx(150e-12, rel=0.3)


def test_least_squares_finds_a_valley_that_bends():
    """Rosenbrock (1960), whose least is at (1, 1); and what is known beforehand counts."""

    def valley(v):
        residuals = np.array([10 * (v[1] - v[0] ** 2), 1 - v[0]])
        return residuals, np.array([[-20 * v[0], 10.0], [-1.0, 0.0]])

    start = np.array([-1.2, 1.0])
    free = least_squares(valley, start, start, np.zeros(2))
    assert free.values == pytest.approx([1.0, 1.0], abs=0.02)
    held = least_squares(valley, start, np.array([0.0, 0.0]), np.array([1e3, 0.0]))
    assert held.values[0] == pytest.approx(0.0, abs=1e-2)
    assert held.covariance(np.array([1e3, 0.0]))[0, 0] == pytest.approx(1e-6, rel=0.01)
