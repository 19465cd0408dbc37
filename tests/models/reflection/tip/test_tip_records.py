"""Simulated sweeps of a tip become the permittivities they were made from."""

import numpy as np
import pytest

from models.reflection.tip.estimate import TipQuery, estimate_permittivity
from models.reflection.tip.sample import Sample
from tests.models.reflection.sweep_records import TIP, standard, tip_sweep, truths

FREQUENCY, _ = tip_sweep("air")
TO_3_GHZ = FREQUENCY <= 3.0e9
TRUTH = truths("tip")
FOUR = ("short", "air", "water25", "methanol25")


def estimated(standards, samples, **changes):
    query = TipQuery(
        frequency=FREQUENCY,
        standards=tuple(standard(n, tip_sweep(n)[1], FREQUENCY) for n in standards),
        samples=tuple(Sample(read=tip_sweep(name)[1]) for name in samples),
        **changes,
    )
    return estimate_permittivity(query)


def departure(found, samples):
    eps = found.estimate.permittivity
    truth = np.stack([TRUTH[name][1] for name in samples])
    return np.abs(eps - truth)[:, TO_3_GHZ] / np.abs(truth)[:, TO_3_GHZ]


@pytest.mark.parametrize(
    "standards",
    [FOUR, ("short", "air", "water25", "ethanol25"), ("air", "water25", "methanol25", "ethanol25"),
     (*FOUR, "ethanol25")],
)  # fmt: skip
def test_four_standards_give_a_thousandth_to_3_ghz_without_knowing_the_aperture(standards):
    samples = ("loam", "drysand", "saline25")
    assert departure(estimated(standards, samples), samples).max() < 1e-3


def test_three_standards_give_a_thousandth_where_the_aperture_is_known():
    samples = ("loam", "drysand", "saline25", "methanol25", "ethanol25")
    found = estimated(FOUR[:3], samples, model="radiating", geometry=TIP)
    assert departure(found, samples).max() < 1e-3


def test_a_capacitance_alone_errs_where_the_aperture_radiates():
    errors = departure(estimated(FOUR[:3], ("loam",), model="capacitive"), ("loam",))[0]
    low, high = errors[0], errors[-1]
    assert low < 1e-3
    assert high == pytest.approx(0.045, abs=0.01)  # 4.5 % at 3 GHz for this loam


def test_samples_are_measured_together_as_one_by_one():
    together = estimated(FOUR, ("loam", "drysand")).estimate.permittivity
    for place, name in enumerate(("loam", "drysand")):
        alone = estimated(FOUR, (name,)).estimate.permittivity[0]
        np.testing.assert_allclose(together[place], alone, rtol=1e-12)


def test_sweeps_of_the_other_convention_are_conjugated_once_and_that_is_said():
    sweeps = {n: np.conj(tip_sweep(n)[1]) for n in (*FOUR, "loam")}
    query = TipQuery(
        frequency=FREQUENCY,
        standards=tuple(standard(n, sweeps[n], FREQUENCY) for n in FOUR),
        samples=(Sample(read=sweeps["loam"]),),
    )
    found = estimate_permittivity(query)
    assert found.estimate.conjugated
    assert departure(found, ("loam",)).max() < 1e-3
    assert not estimated(FOUR, ("loam",)).estimate.conjugated


def test_a_limit_of_the_caller_withholds_what_is_less_certain():
    spread = np.full((4, FREQUENCY.size), 5e-4)
    free = estimated(FOUR, ("loam",), standard_spread=spread)
    bound = estimated(FOUR, ("loam",), standard_spread=spread, largest_relative_uncertainty=0.005)
    relative = np.hypot(free.estimate.band.real, free.estimate.band.loss)
    beyond = (relative / np.abs(free.estimate.permittivity))[0] > 0.005
    assert beyond.any()
    assert not beyond.all()
    np.testing.assert_array_equal(np.isnan(bound.estimate.permittivity[0]), beyond)
