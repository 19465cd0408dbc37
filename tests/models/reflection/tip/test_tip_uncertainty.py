"""Every derivative of a tip's permittivity is that of the whole calculation, done twice."""

from dataclasses import replace

import numpy as np
import pytest

from models.reflection.tip.aperture import Aperture
from models.reflection.tip.calibration import calibrate
from models.reflection.tip.estimate import TipQuery, estimate_permittivity
from models.reflection.tip.inversion import invert, of_noise, of_standards
from models.reflection.tip.media import Known
from models.reflection.tip.sample import Sample
from tests.models.reflection.sweep_records import TIP, standard, tip_sweep, truths

FREQUENCY, LOAM = tip_sweep("loam")
NAMES = ("short", "air", "water25", "methanol25", "ethanol25")
STANDARDS = [standard(n, tip_sweep(n)[1], FREQUENCY, exact=False) for n in NAMES]
SPREAD = np.full((len(NAMES), FREQUENCY.size), 1e-4)


def solved(standards, sample=LOAM, count=5, model="fitted"):
    found = calibrate(FREQUENCY, standards[:count], Aperture(model, TIP), SPREAD[:count])
    return found, invert(found, sample[None])


@pytest.mark.parametrize(("count", "model"), [(3, "radiating"), (5, "radiating"), (5, "fitted")])
def test_the_derivative_by_the_sample_is_that_of_the_calculation(count, model):
    step = 1e-6 * np.exp(0.7j)
    _, there = solved(STANDARDS, LOAM + step, count, model)
    _, back = solved(STANDARDS, LOAM - step, count, model)
    _, here = solved(STANDARDS, LOAM, count, model)
    change = (there.permittivity - back.permittivity) / (2 * step)
    np.testing.assert_allclose(change, here.by_sample, rtol=1e-5)


@pytest.mark.parametrize("place", range(3))
def test_the_derivative_by_a_standard_is_that_of_the_calculation(place):
    step, ends = 1e-6 * np.exp(0.7j), []
    for sign in (1, -1):
        moved = list(STANDARDS)
        moved[place] = replace(moved[place], read=moved[place].read + sign * step)
        ends.append(solved(moved, LOAM, 3, "radiating")[1].permittivity)
    _, here = solved(STANDARDS, LOAM, 3, "radiating")
    np.testing.assert_allclose(
        (ends[0] - ends[1]) / (2 * step), here.by_standard[:, :, place], rtol=1e-4
    )


def test_the_variance_by_standards_media_is_that_of_calibrating_with_others():
    calibration, here = solved(STANDARDS)
    variance = of_standards(calibration, here)
    total = np.zeros(FREQUENCY.size)
    for place, held in enumerate(STANDARDS):
        for variation in held.known.variations if held.known else ():
            ends = []
            for sign in (0.01, -0.01):
                moved = list(STANDARDS)
                eps = held.known.permittivity + sign * variation
                moved[place] = replace(held, known=Known(eps))
                ends.append(solved(moved)[1].permittivity[0])
            total += np.square(np.abs(ends[0] - ends[1]) / 0.02)
    np.testing.assert_allclose((variance.real + variance.loss)[0], total, rtol=0.02)


def test_the_variance_by_noise_is_that_of_many_draws():
    calibration, here = solved(STANDARDS[:4], count=4)
    spread = np.full((1, FREQUENCY.size), 1e-4)
    told = of_noise(calibration, here, spread)
    generator, found = np.random.default_rng(2), []
    for _ in range(150):
        drawn = [
            replace(s, read=s.read + 1e-4 * (generator.standard_normal(FREQUENCY.size)
                                             + 1j * generator.standard_normal(FREQUENCY.size)))
            for s in STANDARDS[:4]
        ]  # fmt: skip
        sample = LOAM + 1e-4 * (generator.standard_normal(FREQUENCY.size)
                                + 1j * generator.standard_normal(FREQUENCY.size))  # fmt: skip
        found.append(solved(drawn, sample, 4)[1].permittivity[0])
    seen = np.var([eps.real for eps in found], axis=0)
    np.testing.assert_allclose(np.mean(seen / told.real[0]), 1.0, atol=0.08)
    np.testing.assert_allclose(seen, told.real[0], rtol=0.5)


@pytest.mark.parametrize("geometry", [None, TIP])
@pytest.mark.parametrize("medium", ["loam", "drysand", "methanol25", "ethanol25", "saline25"])
def test_a_model_taken_for_three_standards_leaves_the_truth_in_its_band(medium, geometry):
    """The sweeps were made with an aperture that radiates; nobody said so."""
    frequency, read = tip_sweep(medium)
    standards = tuple(
        standard(name, tip_sweep(name)[1], frequency) for name in ("short", "air", "water25")
    )
    query = TipQuery(frequency=frequency, standards=standards, samples=(Sample(read=read),),
                     geometry=geometry)  # fmt: skip
    found = estimate_permittivity(query)
    truth = truths("tip")[medium][1]
    away = found.estimate.permittivity[0] - truth
    inside = np.abs(away.real) <= 1.96 * found.estimate.band.real[0]
    assert found.aperture_open
    assert inside.mean() >= 0.95
    assert (np.abs(away.imag) <= 1.96 * found.estimate.band.loss[0]).mean() >= 0.95
    said = estimate_permittivity(replace(query, model="capacitive"))
    assert not said.aperture_open
    assert said.estimate.band.real[0].max() < found.estimate.band.real[0].max()
