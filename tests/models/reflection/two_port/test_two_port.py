"""Samples between two ports: scikit-rf, simulated sweeps with truth, half waves, position."""

import numpy as np
import pytest
import skrf
from scipy.constants import speed_of_light

from models.reflection.sweep_flags import keys_of
from models.reflection.two_port import nicolson_ross_weir, position
from models.reflection.two_port.estimate import TwoPortQuery, estimate_constants
from models.reflection.two_port.forward import scattering, scattering_slopes
from tests.models.reflection.sweep_records import WIDE, debye, noise, truths, two_port_sweep

TRUTH = truths("two_port")
LENGTHS = {"ptfe_20mm": 0.02, "loam_30mm": 0.03, "drysand_50mm": 0.05}
METHODS = ("least-squares", "non-iterative", "baker-jarvis-1990", "nicolson-ross-weir")
SOIL, LENGTH = debye(WIDE), 0.02


def asked(name, **changes):
    frequency, s = two_port_sweep(name)
    return estimate_constants(
        TwoPortQuery(frequency=frequency, parameters=s, length=LENGTHS[name], **changes)
    )


def simulated(eps, mu=1.0, spread=0.0, seed=0, air=(0.0, 0.0)):
    generator = np.random.default_rng(seed)
    s11, s21 = scattering(eps, mu, WIDE, LENGTH)
    one, other = (np.exp(-2j * np.pi * WIDE * d / speed_of_light) for d in air)
    s = (s11 * one**2, s21 * one * other, s21 * one * other, s11 * other**2)
    return tuple(part + noise(generator, WIDE.size, spread) for part in s)


@pytest.mark.parametrize("mu", [1.0, 1.8 - 0.2j])
def test_a_sample_is_the_line_of_scikit_rf(mu):
    axis = skrf.Frequency.from_f(WIDE, unit="hz")
    gamma = 2j * np.pi * WIDE * np.sqrt(SOIL) * np.sqrt(mu) / speed_of_light
    medium = skrf.media.DefinedGammaZ0(frequency=axis, gamma=gamma, z0=50 * np.sqrt(mu / SOIL))
    line = medium.line(LENGTH, "m")
    line.renormalize(50.0)
    s11, s21 = scattering(SOIL, mu, WIDE, LENGTH)
    np.testing.assert_allclose(s11, line.s[:, 0, 0], rtol=1e-8)
    np.testing.assert_allclose(s21, line.s[:, 1, 0], rtol=1e-8)


def test_slopes_are_those_of_the_s_parameters():
    s11, s21, ds11, ds21 = scattering_slopes(SOIL, WIDE, LENGTH)
    step = 1e-6
    there, back = (scattering(SOIL + sign * step, 1.0, WIDE, LENGTH) for sign in (1, -1))
    np.testing.assert_allclose(np.stack(scattering(SOIL, 1.0, WIDE, LENGTH)), (s11, s21))
    for slope, one, other in zip((ds11, ds21), there, back, strict=True):
        np.testing.assert_allclose(slope, (one - other) / (2 * step), rtol=1e-6, atol=1e-9)


@pytest.mark.parametrize("method", [None, *METHODS])
@pytest.mark.parametrize("name", ["ptfe_20mm", "loam_30mm"])
def test_sweeps_without_noise_give_the_permittivity_to_a_millionth(name, method):
    found = asked(name, method=method).estimate
    np.testing.assert_allclose(found.permittivity[0], TRUTH_OF[name], rtol=1e-6)
    assert not found.conjugated


def _of(name):
    return TRUTH[name][1]


TRUTH_OF = {name: _of(name) for name in LENGTHS}


@pytest.mark.parametrize(
    ("method", "worst"), [(None, 0.01), ("baker-jarvis-1990", 0.02), ("non-iterative", 0.02)]
)
def test_a_noisy_sweep_is_steady_through_half_wavelengths(method, worst):
    found = asked("drysand_50mm", method=method).estimate.permittivity[0]
    frequency, truth = TRUTH["drysand_50mm"]
    high = frequency > 0.5e9
    assert (np.abs(found - truth) / np.abs(truth))[high].max() < worst


def test_half_a_wavelength_upsets_only_what_parts_permittivity_from_permeability():
    # PTFE of 20 mm is half a wavelength long at 5.2336 GHz
    eps = np.full(WIDE.size, 2.05 + 0j)
    query = {"frequency": WIDE, "parameters": simulated(eps, spread=1e-3), "length": LENGTH}
    near = np.abs(WIDE - 5.2336e9) < 40e6
    worst = {}
    for method in METHODS:
        found = estimate_constants(TwoPortQuery(**query, method=method)).estimate
        worst[method] = np.abs(found.permittivity[0] / 2.05 - 1)[near].max()
        flagged = ["half-wave" in keys_of(int(mask)) for mask in found.flags[0]]
        assert np.any(np.array(flagged)[near]) == (method == "nicolson-ross-weir")
    assert worst["nicolson-ross-weir"] > 0.02
    for method in METHODS[:3]:
        assert worst[method] < 0.005


@pytest.mark.parametrize("method", [None, *METHODS])
def test_bands_hold_the_truth_of_200_draws(method):
    shares = []
    for seed in range(200):
        s = simulated(SOIL, spread=1e-3, seed=seed)
        found = estimate_constants(
            TwoPortQuery(frequency=WIDE, parameters=s, length=LENGTH, method=method,
                         spread=np.full(WIDE.size, 1e-3))
        ).estimate  # fmt: skip
        away = found.permittivity[0] - SOIL
        shares.append(((np.abs(away.real) <= 1.96 * found.band.real[0]).mean(),
                       (np.abs(away.imag) <= 1.96 * found.band.loss[0]).mean()))  # fmt: skip
    for share in np.mean(shares, axis=0):
        assert 0.93 <= share <= 0.97


def test_noise_is_told_by_the_symmetry_of_the_sample():
    s = simulated(SOIL, spread=1e-3)
    found = estimate_constants(TwoPortQuery(frequency=WIDE, parameters=s, length=LENGTH))
    assert found.noise_known
    assert found.noise == pytest.approx(1e-3, rel=0.15)


def test_a_sample_measured_from_one_side_has_wider_bands():
    s = simulated(SOIL)
    query = {"frequency": WIDE, "parameters": s, "length": LENGTH, "spread": np.full(200, 1e-3)}
    both = estimate_constants(TwoPortQuery(**query)).estimate.band.real
    one = estimate_constants(TwoPortQuery(**query, both_ways=False)).estimate.band.real
    np.testing.assert_allclose(one, np.sqrt(2) * both, rtol=1e-9)


def test_a_magnetic_sample_is_told_from_one_that_is_not():
    mu = 1.8 - 0.2j
    s = simulated(SOIL, mu, spread=1e-4)
    found = estimate_constants(TwoPortQuery(frequency=WIDE, parameters=s, length=LENGTH))
    assert found.method == "nicolson-ross-weir"
    told = next(f for f in found.estimate.findings[0] if f.key == "magnetic")
    assert told.value == pytest.approx(abs(mu - 1), abs=0.02)
    middle = slice(40, 160)
    np.testing.assert_allclose(found.estimate.permittivity[0][middle], SOIL[middle], rtol=0.02)
    np.testing.assert_allclose(found.estimate.permeability[0][middle], mu, rtol=0.02)
    plain = estimate_constants(
        TwoPortQuery(frequency=WIDE, parameters=simulated(SOIL, spread=1e-3), length=LENGTH)
    )
    assert plain.method == "least-squares"
    assert plain.estimate.permeability is None


def test_permittivity_and_permeability_come_back_together():
    eps, mu = np.full(WIDE.size, 6 - 0.3j), np.full(WIDE.size, 1.8 - 0.2j)
    found = estimate_constants(
        TwoPortQuery(frequency=WIDE, parameters=simulated(eps, mu), length=LENGTH)
    ).estimate
    np.testing.assert_allclose(found.permittivity[0], eps, rtol=1e-9)
    np.testing.assert_allclose(found.permeability[0], mu, rtol=1e-9)


@pytest.mark.parametrize("method", [None, "nicolson-ross-weir"])
@pytest.mark.parametrize("spread", [0.0, 1e-3])
def test_the_position_of_a_sample_is_found(spread, method):
    s = simulated(SOIL, spread=spread, air=(0.012, 0.018))
    found = estimate_constants(
        TwoPortQuery(frequency=WIDE, parameters=s, length=LENGTH, holder=0.05, method=method)
    )
    assert found.planes[0] == pytest.approx(0.012, abs=1e-9 if not spread else 4e-6)
    if spread:
        assert abs(found.planes[0] - 0.012) < 4 * found.position_u
    else:
        np.testing.assert_allclose(found.estimate.permittivity[0], SOIL, rtol=1e-6)


def test_where_a_sample_lies_drops_out_of_the_invariant():
    frequency = np.array([1.3e9])
    found = position.invariant(np.array([12 - 1.5j]), frequency, 0.02, 0.05)
    assert found[0] == pytest.approx(-0.35966474 - 0.81451914j, abs=1e-8)
    s11, s21, s12, s22 = simulated(SOIL, air=(0.004, 0.026))
    np.testing.assert_allclose(
        s11 * s22 - s21 * s12, position.invariant(SOIL, WIDE, LENGTH, 0.05), rtol=1e-9
    )


@pytest.mark.parametrize(("start", "turns"), [(0.05e9, 0), (2e9, 1), (4e9, 3)])
def test_whole_wavelengths_are_counted_from_the_sweep_itself(start, turns):
    frequency = np.linspace(start, 6e9, 150)
    eps = np.full(150, 25 - 2j)
    s11, s21 = scattering(eps, 1.0, frequency, 0.05)
    found = nicolson_ross_weir.constants(s11, s21, frequency, 0.05)
    assert found.certain
    np.testing.assert_allclose(found.permittivity, eps, rtol=1e-9)
    assert abs(found.turns - turns) <= 1


def test_too_few_points_leave_the_branch_open_and_a_guess_settles_it():
    frequency, eps = np.array([4e9, 6e9]), np.full(2, 25 - 0.5j)
    s11, s21 = scattering(eps, 1.0, frequency, 0.05)
    query = {"frequency": frequency, "parameters": (s11, s21, s21, s11), "length": 0.05}
    doubtful = estimate_constants(TwoPortQuery(**query)).estimate
    assert "branch-uncertain" in keys_of(int(doubtful.flags[0, 0]))
    guessed = estimate_constants(TwoPortQuery(**query, guess=24 + 0j)).estimate
    np.testing.assert_allclose(guessed.permittivity[0][0], eps[0], rtol=1e-9)


def test_the_other_convention_is_conjugated_once():
    s = tuple(np.conj(part) for part in simulated(SOIL))
    found = estimate_constants(TwoPortQuery(frequency=WIDE, parameters=s, length=LENGTH)).estimate
    assert found.conjugated
    np.testing.assert_allclose(found.permittivity[0], SOIL, rtol=1e-9)


def test_an_uncertain_length_moves_the_index_by_as_much():
    s = simulated(SOIL)
    query = TwoPortQuery(frequency=WIDE, parameters=s, length=LENGTH, length_u=2e-5,
                         method="non-iterative")  # fmt: skip
    band = estimate_constants(query).estimate.band
    np.testing.assert_allclose(band.real_shared[0], 2 * SOIL.real * 2e-5 / LENGTH, rtol=0.01)


def test_practice_is_told_with_its_number():
    s = simulated(SOIL)
    query = TwoPortQuery(frequency=WIDE, parameters=s, length=LENGTH, grain_size=1e-4,
                         gap_width=2e-3)  # fmt: skip
    told = {f.key: f for f in estimate_constants(query).estimate.findings[0]}
    assert not told["grain-size"].holds
    assert told["grain-size"].value == pytest.approx(20.0)
    # 0.02 m in wavelengths of a medium of about 25 at 30 MHz
    short = told["electrically-short"]
    assert short.value == pytest.approx(0.02 * 30e6 * np.sqrt(25.0) / speed_of_light, rel=0.2)
    assert short.holds == (short.value >= 0.01)
