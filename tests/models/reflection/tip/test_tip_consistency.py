"""Standards that are not what they are taken for are found out."""

import numpy as np
import pytest

from models.reflection.sweep_flags import BIT, keys_of
from models.reflection.tip.estimate import TipQuery, estimate_permittivity
from models.reflection.tip.layers import reading
from models.reflection.tip.media import MEDIA
from models.reflection.tip.sample import Sample
from tests.models.reflection.sweep_records import (
    TIP,
    debye,
    noise,
    standard,
    through_port,
    tip_reflection,
)

FREQUENCY = np.linspace(0.1e9, 5e9, 50)
SPREAD = 5e-4
FIVE = ("short", "air", "water25", "methanol25", "ethanol25")
SOIL = debye(FREQUENCY)


def found(names=FIVE, *, stated=True, sample=SOIL, **replaced):
    """replaced: what a standard really is, a permittivity or a reflection at the aperture."""
    generator, standards = np.random.default_rng(8), []
    for name in names:
        is_short = name == "short"
        known = None if is_short else standard(name, None, FREQUENCY).known.permittivity
        true = -np.ones_like(FREQUENCY) if is_short else tip_reflection(known, FREQUENCY)
        true = replaced.get(name, true)
        read = through_port(true, FREQUENCY) + noise(generator, FREQUENCY.size, SPREAD)
        standards.append(standard(name, read, FREQUENCY, exact=False))
    read = through_port(tip_reflection(sample, FREQUENCY), FREQUENCY)
    query = TipQuery(
        frequency=FREQUENCY, standards=tuple(standards),
        standard_spread=np.full((len(names), FREQUENCY.size), SPREAD) if stated else None,
        samples=(Sample(read=read + noise(generator, FREQUENCY.size, SPREAD)),),
    )  # fmt: skip
    return estimate_permittivity(query)


def finding(answer, key):
    return next(f for f in answer.estimate.findings[0] if f.key == key)


ACETONE = tip_reflection(MEDIA["acetone"].known(FREQUENCY, 25.0).permittivity, FREQUENCY)


@pytest.mark.parametrize("stated", [True, False])
@pytest.mark.parametrize("names", [FIVE, ("short", "air", "water25", "ethanol25")])
def test_an_ethanol_that_is_acetone_is_named(names, stated):
    answer = found(names, stated=stated, ethanol25=ACETONE)
    assert not finding(answer, "standards-inconsistent").holds
    by_name = {d.name: d for d in answer.departures}
    assert by_name["ethanol25"].looks_like == "acetone"
    assert [d.name for d in answer.departures if d.looks_like] == ["ethanol25"]


def test_the_others_agree_once_a_bad_short_is_left_out():
    answer = found(short=np.full(FREQUENCY.size, -0.9 + 0j))
    without = {d.name: d.chi_square for d in answer.departures}
    assert min(without, key=without.get) == "short"
    assert without["short"] < 3.0
    assert sorted(without.values())[1] > 3 * without["short"]


@pytest.mark.parametrize("stated", [True, False])
def test_good_standards_agree(stated):
    answer = found(stated=stated)
    assert finding(answer, "standards-inconsistent").holds
    assert all(d.looks_like is None for d in answer.departures)
    assert all(d.size < 3 * d.size_u for d in answer.departures)


def test_bands_widen_where_standards_contradict():
    good, bad = found(), found(ethanol25=ACETONE)
    assert np.median(bad.estimate.band.real / good.estimate.band.real) > 5
    inconsistent = BIT["standards-inconsistent"]
    assert np.all(bad.estimate.flags & inconsistent)
    assert not np.any(good.estimate.flags & inconsistent)


def test_standards_that_look_alike_are_flagged_at_low_frequency():
    answer = found()
    flags = answer.estimate.flags[0]
    close = (flags & BIT["standards-too-close"]) != 0
    assert not close[10:].any()
    wide = finding(answer, "standards-too-close")
    assert wide.limit == 0.05
    assert (wide.frequencies is None) == wide.holds


def test_a_medium_that_gives_energy_is_flagged():
    answer = found(sample=20 + 2j * np.ones_like(FREQUENCY))
    flagged = [keys_of(int(mask)) for mask in answer.estimate.flags[0]]
    assert sum("negative-loss" in keys for keys in flagged) > 40
    assert np.isfinite(answer.estimate.permittivity).all()


def test_the_range_of_a_standard_is_kept_in_sight():
    flags = found().estimate.flags[0]
    outside = (flags & BIT["outside-standard-range"]) != 0
    assert not outside.any()


@pytest.mark.parametrize(
    ("changes", "key", "holds"),
    [({"grain_size": 0.5e-3}, "grain-size", False), ({"grain_size": 10e-6}, "grain-size", True),
     ({"thickness": 1e-3}, "sample-thickness", False),
     ({"thickness": 10e-3}, "sample-thickness", True), ({}, "air-gap", False)],
)  # fmt: skip
def test_practice_is_told_with_its_number(changes, key, holds):
    read = through_port(tip_reflection(SOIL, FREQUENCY), FREQUENCY)
    standards = []
    for name in FIVE[:4]:
        known = standard(name, None, FREQUENCY).known
        true = tip_reflection(known.permittivity, FREQUENCY) if known else -1 + 0j * FREQUENCY
        standards.append(standard(name, through_port(true, FREQUENCY), FREQUENCY))
    query = TipQuery(frequency=FREQUENCY, standards=tuple(standards), geometry=TIP,
                     samples=(Sample(read=read, **changes),))  # fmt: skip
    told = [f for f in estimate_permittivity(query).estimate.findings[0] if f.key == key]
    assert all(f.holds for f in told) == holds
    assert np.isfinite(told[0].value)


def test_a_stated_air_gap_is_taken_out():
    through_film = reading(TIP, 1.0, 10e-6, SOIL) * SOIL / reading(TIP, SOIL, 1.0, SOIL)
    standards = []
    for name in FIVE[:3]:
        known = standard(name, None, FREQUENCY).known
        true = tip_reflection(known.permittivity, FREQUENCY) if known else -1 + 0j * FREQUENCY
        standards.append(standard(name, through_port(true, FREQUENCY), FREQUENCY))
    read = through_port(tip_reflection(through_film, FREQUENCY), FREQUENCY)
    query = TipQuery(frequency=FREQUENCY, standards=tuple(standards), geometry=TIP,
                     model="radiating",
                     samples=(Sample(read=read, gap=10e-6, gap_u=1e-6),))  # fmt: skip
    answer = estimate_permittivity(query).estimate
    np.testing.assert_allclose(answer.permittivity[0], SOIL, rtol=1e-5)
    assert np.all(answer.band.real_shared > 0.01 * SOIL.real)
