"""Error terms of one port against scikit-rf, and cross-ratios against both."""

import numpy as np
import pytest
import skrf

from models.reflection.error_terms import fit
from models.reflection.tip import cross_ratio
from models.reflection.tip.aperture import Aperture
from models.reflection.tip.calibration import Standard, calibrate
from models.reflection.tip.inversion import invert
from models.reflection.tip.media import Known
from tests.models.reflection.sweep_records import (
    TIP,
    debye,
    noise,
    port,
    through_port,
    tip_reflection,
)

FREQUENCY = np.linspace(0.1e9, 6e9, 60)
WATER = debye(FREQUENCY, 78.4, 5.2, 8.3e-12, 0.0)
METHANOL = debye(FREQUENCY, 32.6, 5.6, 50e-12, 0.0)
ETHANOL = debye(FREQUENCY, 24.4, 4.5, 165e-12, 0.0)
AIR = np.ones_like(FREQUENCY) + 0j
SOIL = debye(FREQUENCY)


def networks(rows):
    axis = skrf.Frequency.from_f(FREQUENCY, unit="hz")
    return [skrf.Network(frequency=axis, s=row[:, None, None], z0=50.0) for row in rows]


def ideals(count):
    known = [-AIR, *(tip_reflection(eps, FREQUENCY) for eps in (AIR, WATER, METHANOL, ETHANOL))]
    return np.stack(known[:count])


@pytest.mark.parametrize("count", [3, 4, 5])
def test_error_terms_are_those_of_scikit_rf(count):
    true = ideals(count)
    read = through_port(true, FREQUENCY)
    oracle = skrf.calibration.OnePort(networks(read), networks(true))
    oracle.run()
    found = fit(read, true, np.ones(read.shape)).terms
    for name, terms in (("directivity", found.directivity), ("source match", found.source_match),
                        ("reflection tracking", found.tracking)):  # fmt: skip
        np.testing.assert_allclose(terms, oracle.coefs[name], rtol=1e-9, atol=1e-10)
    sample = through_port(tip_reflection(SOIL, FREQUENCY), FREQUENCY)
    (corrected,) = [oracle.apply_cal(one).s[:, 0, 0] for one in networks([sample])]
    np.testing.assert_allclose(found.corrected(sample), corrected, rtol=1e-10, atol=1e-12)


def test_error_terms_are_those_of_the_port():
    true = ideals(3)
    found = fit(through_port(true, FREQUENCY), true, np.ones(true.shape)).terms
    for terms, known in zip((found.directivity, found.source_match, found.tracking),
                            port(FREQUENCY), strict=True):  # fmt: skip
        np.testing.assert_allclose(terms, known, rtol=1e-9)
    np.testing.assert_allclose(found.corrected(found.read(true)), true, rtol=1e-12)


def test_a_standard_that_is_known_to_be_worse_weighs_less():
    generator = np.random.default_rng(4)
    true = ideals(5)
    read = through_port(true, FREQUENCY)
    spoiled = read.copy()
    spoiled[4] += noise(generator, FREQUENCY.size, 0.05)
    spread = np.full(read.shape, 1e-4)
    equal = fit(spoiled, true, spread).terms.directivity
    spread[4] = 0.05
    weighed = fit(spoiled, true, spread).terms.directivity
    known = port(FREQUENCY)[0]
    assert np.abs(weighed - known).max() < 1e-3 * np.abs(equal - known).max()


def test_two_standards_that_are_one_give_no_number():
    true = np.stack([-AIR, tip_reflection(WATER, FREQUENCY), tip_reflection(WATER, FREQUENCY)])
    read = through_port(true, FREQUENCY)
    assert np.isnan(fit(read, true, np.ones(read.shape)).terms.tracking).all()


def test_a_gap_in_one_standard_leaves_the_other_frequencies():
    true = ideals(4)
    read = through_port(true, FREQUENCY)
    read[2, 7] = np.nan
    found = fit(read, true, np.ones(read.shape)).terms.tracking
    assert np.isnan(found[7])
    np.testing.assert_allclose(np.delete(found, 7), np.delete(port(FREQUENCY)[2], 7), rtol=1e-9)


def test_cross_ratios_and_error_terms_tell_the_same_admittance():
    read = dict(zip(("short", "air", "water", "methanol", "ethanol"),
                    through_port(ideals(5), FREQUENCY), strict=True))  # fmt: skip
    sample = through_port(tip_reflection(SOIL, FREQUENCY), FREQUENCY)
    tip = Aperture("radiating", TIP)
    y = {name: tip.admittance(eps, FREQUENCY)[0] for name, eps in (
        ("air", AIR), ("water", WATER), ("methanol", METHANOL))}  # fmt: skip
    from_short = cross_ratio.from_short(
        sample, read["short"], (read["air"], read["water"]), (y["air"], y["water"])
    )
    from_three = cross_ratio.from_three(
        sample, (read["air"], read["water"], read["methanol"]), tuple(y.values())
    )
    expected, _ = tip.admittance(SOIL, FREQUENCY)
    np.testing.assert_allclose(from_short, expected, rtol=1e-9)
    np.testing.assert_allclose(from_three, expected, rtol=1e-8)
    standards = [Standard("short", read["short"]), Standard("air", read["air"], Known(AIR)),
                 Standard("water", read["water"], Known(WATER))]  # fmt: skip
    found = calibrate(FREQUENCY, standards, tip, np.ones((3, FREQUENCY.size)))
    eps = invert(found, sample[None]).permittivity[0]
    np.testing.assert_allclose(tip.admittance(eps, FREQUENCY)[0], from_short, rtol=1e-9)


def test_a_fourth_standard_tells_the_radiation_point_by_point():
    read = through_port(ideals(4), FREQUENCY)
    g = cross_ratio.radiation(read[3], read[0], (read[1], read[2]), (AIR, WATER, METHANOL))
    expected, _ = Aperture("radiating", TIP).admittance(AIR, FREQUENCY)
    np.testing.assert_allclose(g[20:], (expected - 1)[20:], rtol=1e-3)
