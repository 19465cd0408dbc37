"""Standards that were mistaken for one another, and sweeps that are none, are never silent."""

from itertools import combinations

import numpy as np
import pytest

from models.errors import ParameterError
from models.reflection.estimates import Band
from models.reflection.plausible import judge
from models.reflection.sweep_flags import keys_of
from models.reflection.tip.estimate import TipQuery, estimate_permittivity
from models.reflection.tip.sample import Sample
from tests.models.reflection.sweep_records import debye, noise, standard, tip_sweep

FREQUENCY, LOAM = tip_sweep("loam")
THREE = ("short", "air", "water25")
FOUR = (*THREE, "methanol25")
READ = {name: tip_sweep(name)[1] for name in FOUR}
SERIOUS = {"port-not-passive", "standards-inconsistent", "above-water", "rises-with-frequency",
           "below-vacuum", "reflection-above-one"}  # fmt: skip


def asked(names, read, sample):
    standards = tuple(standard(n, r, FREQUENCY, exact=False)
                      for n, r in zip(names, read, strict=True))  # fmt: skip
    return estimate_permittivity(
        TipQuery(frequency=FREQUENCY, standards=standards, samples=(Sample(read=sample),))
    ).estimate


def flags_of(estimate):
    return {key for mask in estimate.flags[0] for key in keys_of(int(mask))}


def broken(estimate):
    return {f.key for f in estimate.findings[0] if not f.holds}


@pytest.mark.parametrize("names", [THREE, FOUR], ids=["three", "four"])
def test_good_standards_raise_no_doubt(names):
    for sample in (LOAM, tip_sweep("saline25")[1], tip_sweep("drysand")[1]):
        found = asked(names, [READ[n] for n in names], sample)
        assert not found.conjugated
        assert not broken(found) & {"port-not-passive", "standards-inconsistent", "above-water",
                                    "rises-with-frequency"}  # fmt: skip


@pytest.mark.parametrize("names", [THREE, FOUR], ids=["three", "four"])
def test_any_two_standards_exchanged_are_noticed_with_a_number(names):
    for one, other in combinations(range(len(names)), 2):
        read = [READ[name] for name in names]
        read[one], read[other] = read[other], read[one]
        found = asked(names, read, LOAM)
        assert flags_of(found) & {"port-not-passive", "standards-inconsistent"}
        told = [f for f in found.findings[0] if f.key in SERIOUS and not f.holds]
        assert told
        assert all(np.isfinite(f.value) and f.value > f.limit for f in told)


SWEEPS = {
    "of size 5": 5.0 * np.exp(1j * np.angle(LOAM)),
    "of 5": np.full(LOAM.size, 5.0 + 0j),
    "at random": noise(np.random.default_rng(4), LOAM.size, 0.5),
    "small at random": noise(np.random.default_rng(5), LOAM.size, 0.1),
    "turned round": LOAM[::-1],
}


@pytest.mark.parametrize("sample", SWEEPS.values(), ids=SWEEPS)
@pytest.mark.parametrize("names", [THREE, FOUR], ids=["three", "four"])
def test_a_sample_that_is_no_sweep_is_noticed_with_a_number(names, sample):
    found = asked(names, [READ[n] for n in names], sample)
    assert flags_of(found) & {"rises-with-frequency", "reflection-above-one", "above-water"}
    told = [f for f in found.findings[0] if f.key in SERIOUS and not f.holds]
    assert told
    assert all(f.value > f.limit for f in told)


def test_one_sweep_for_two_standards_is_refused_by_name():
    with pytest.raises(ParameterError) as caught:
        asked(THREE, [READ["short"], READ["air"], READ["air"]], LOAM)
    (complaint,) = caught.value.complaints
    assert complaint.place == ("standards", "2")
    assert "water25" in complaint.detail
    assert "exactly like air" in complaint.detail


def test_standards_that_are_nearly_one_are_too_close_and_never_hold():
    almost = READ["air"] + 1e-6
    found = asked(THREE, [READ["short"], READ["air"], almost], LOAM)
    (close,) = [f for f in found.findings[0] if f.key == "standards-too-close"]
    assert not close.holds
    assert close.value > 1.0


def plain(eps, u=0.0):
    width = np.full((1, eps.size), u)
    flags = np.zeros((1, eps.size), dtype=np.uint64)
    (told,) = judge(np.linspace(0.15e9, 6e9, eps.size), eps[None], Band(*[width] * 4), flags)
    return {key for mask in flags[0] for key in keys_of(int(mask))}, told


def test_soils_and_liquids_relax_and_stay_below_water():
    f = np.linspace(0.15e9, 6e9, 60)
    for eps in (debye(f), debye(f, 78.4, 5.2, 8.3e-12, 1.0), debye(f, 40, 12, 1e-9, 0.2)):
        flags, told = plain(eps)
        assert not flags
        assert all(f.holds for f in told)


def test_noise_is_no_rise_where_it_is_known_and_small_where_it_is_not():
    f = np.linspace(0.15e9, 6e9, 200)
    scattered = debye(f) + noise(np.random.default_rng(1), f.size, 0.6)
    assert "rises-with-frequency" not in plain(scattered, 0.6)[0]
    assert "rises-with-frequency" not in plain(scattered)[0]


def test_a_real_part_that_rises_is_told_where_it_does():
    f = np.linspace(0.15e9, 6e9, 60)
    falling = debye(f, 40, 12, 1e-10).real
    flags, told = plain(falling[::-1] - 0.5j)
    assert flags == {"rises-with-frequency"}
    (rise,) = [finding for finding in told if not finding.holds]
    assert rise.value == pytest.approx(1 - falling[-1] / falling[0], rel=0.05)
