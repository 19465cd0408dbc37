"""Bands of permittivity hold the truth of soils, probes and cables at random, not only of noise."""

from functools import lru_cache

import numpy as np
import pytest

from models.reflection.tdr.bench import Calibration, Description, Record, prepare
from models.reflection.tdr.invert_traces import by_whole_trace, system_behind
from models.reflection.tdr.measure import by_travel_time
from tests.models.reflection.tdr_population import (
    KINDS,
    calibrated_setup,
    drawn,
    fewest,
    most,
    setup_at_random,
    soil_at_random,
)
from tests.models.reflection.tdr_records import apparent, calibrated, noisy, soil

LONG = 8.0
"""m of cable."""
DRAWS = 16
"""Of noise, for each of five seeds."""
SHORT_RODS = {"length": 0.10, "rods": 185.629, "window": 2.5, "points": 400}
CLAY = soil(0.35, 0.05, 0.5, clay=((10, 40e6), (4, 300e6)))


def inside(found, medium, frequency=None):
    columns = {name: float(values[0]) for name, values in found.columns.items()}
    value, u = columns["apparent_permittivity"], columns["apparent_permittivity_u"]
    if np.isnan(value):
        return None
    return abs(value - apparent(medium, frequency or columns["frequency"])) < 1.96 * u


@lru_cache(maxsize=1)
def timed():
    """(kind, metres of cable, whether the band holds the truth) of 200 probes in three soils."""
    rng = np.random.default_rng(2026)
    told = []
    for _ in range(200):
        setup, bench = calibrated_setup(rng)
        for kind in KINDS:
            medium, _ = soil_at_random(rng, kind)
            found = by_travel_time(drawn(medium, setup, rng), bench, lambda: None)
            told.append((kind, setup.cable_length, inside(found, medium)))
    return told


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("long", [False, True])
def test_travel_time_knows_its_error_in_every_soil_and_on_every_cable(kind, long):
    """At the effective frequency; the systematic error is drawn with the probe, not the noise."""
    held = [ok for k, metres, ok in timed() if k == kind and (metres > LONG) == long]
    answered = [ok for ok in held if ok is not None]
    assert len(answered) > 0.85 * len(held)
    assert sum(answered) >= fewest(len(answered))


def test_bands_of_travel_time_are_no_wider_than_they_must_be():
    answered = [ok for _, _, ok in timed() if ok is not None]
    assert fewest(len(answered), 0.94) <= sum(answered) <= most(len(answered))


def test_one_gigahertz_is_covered_where_the_soil_does_not_relax():
    rng = np.random.default_rng(5)
    held = []
    for _ in range(60):
        setup, bench = calibrated_setup(rng)
        medium, _ = soil_at_random(rng, "sand")
        found = by_travel_time(drawn(medium, setup, rng), bench, lambda: None)
        held.append(inside(found, medium, 1e9))
    assert sum(ok is True for ok in held) >= fewest(len(held))


def test_dispersion_widens_the_band_and_the_rise_shows_why():
    bench, _ = calibrated("long")
    widths = []
    for medium in (soil(0.35, 0.05, 0.5), CLAY):
        found = by_travel_time(Record(noisy([(medium, 1.0)], 0.0015, 1, seed=1)), bench, None)
        told = {**found.columns, **found.figures}
        widths.append(told["apparent_permittivity_u"][0] / told["apparent_permittivity"][0])
        slow = told["rise_time"][0] > told["expected_rise_time"][0]
        assert slow == (medium is CLAY)
    assert widths[1] > 3 * widths[0]


@pytest.mark.parametrize("head_known", [True, False])
def test_uncalibrated_probes_know_their_error_too(head_known):
    rng = np.random.default_rng(17)
    held = []
    for _ in range(60):
        setup = setup_at_random(rng)
        head = {"head": setup.filled_head} if head_known else {}
        bench = prepare(Description(length=setup.length, **head), Calibration())
        for kind in KINDS:
            medium, _ = soil_at_random(rng, kind)
            found = by_travel_time(drawn(medium, setup, rng), bench, lambda: None)
            held.append(inside(found, medium))
    answered = [ok for ok in held if ok is not None]
    assert len(answered) > 0.75 * len(held)
    assert sum(answered) >= fewest(len(answered))


def test_a_whole_trace_knows_its_error_over_soils_probes_and_cables():
    rng = np.random.default_rng(7)
    held, levels = [], []
    for _ in range(16):
        setup, bench = calibrated_setup(rng)
        known = system_behind(bench)
        for kind in (*KINDS, "clay"):
            medium, sigma = soil_at_random(rng, kind)
            found = by_whole_trace(drawn(medium, setup, rng), bench, known)
            held.append(inside(found, medium))
            level, u = (found.columns[f"bulk_conductivity{s}"][0] for s in ("", "_u"))
            levels.append(abs(level - sigma) < 1.96 * u)
    answered = [ok for ok in held if ok is not None]
    assert len(answered) > 0.95 * len(held)
    assert fewest(len(answered)) <= sum(answered) <= most(len(answered))
    assert sum(levels) >= fewest(len(levels), 0.92)


@pytest.mark.parametrize(("kind", "medium", "sigma", "noise"), [
    ("short", soil(0.25, 0.04), 0.04, 0.004), ("short", CLAY, 0.05, 0.01),
    ("long", soil(0.08, 0.003), 0.003, 0.01), ("long", CLAY, 0.05, 0.01),
], ids=["loam", "clay-short-rods", "sand", "clay"])  # fmt: skip
def test_noise_alone_is_covered_whatever_the_seed(kind, medium, sigma, noise):
    """Draws of noise over one trace, its noise stated; five seeds together."""
    bench, known = calibrated(kind)
    options = SHORT_RODS if kind == "short" else {"points": 512}
    held, levels = [], []
    for seed in range(5):
        drawn_again = Record(noisy([(medium, 1.0)], noise, DRAWS, seed, **options))
        found = by_whole_trace(drawn_again, bench, known).columns
        apart = np.abs(found["apparent_permittivity"] - apparent(medium))
        held.extend(apart < 1.96 * found["apparent_permittivity_u"])
        away = np.abs(found["bulk_conductivity"] - sigma)
        levels.extend(away < 1.96 * found["bulk_conductivity_u"])
    assert sum(levels) >= fewest(len(levels))
    assert fewest(len(held)) <= sum(held) <= most(len(held), 0.98)
