"""The line of several sections against scikit-rf and its own limits, and every derivative."""

import numpy as np
import pytest
import skrf
from scipy.constants import epsilon_0, speed_of_light

from models.errors import ParameterError
from models.reflection.tdr.probe import Cable, Head, Rods, System
from models.reflection.tdr.record import window_axis
from models.reflection.tdr.whole.experiment import (
    SYSTEM,
    Experiment,
    Layers,
    reflected,
    system_of,
    system_values,
)
from models.reflection.tdr.whole.line import OPEN, SHORT, Section, reflection
from models.reflection.tdr.whole.medium import Medium, apparent_of
from models.reflection.tdr.whole.response import grid, late_frequencies, late_value

SOIL = Medium(6.0, (9.0, 3.0), (9e-12, 6e-10), 0.04)
ABOVE = Medium(2.5, (0.5,), (9e-12,), 0.002)
PROBE = System(Rods(0.3, 178.6), Head(86.6, 0.23e-9), Cable(49.0, 15.2e-9, 0.15, 3e-4), 50.0)


@pytest.mark.parametrize("end", [OPEN, SHORT])
def test_it_reflects_as_scikit_rf_says(end):
    frequency = skrf.Frequency(10, 6000, 300, unit="MHz")
    f, s = frequency.f, 2j * np.pi * frequency.f
    cable = PROBE.cable
    series = np.sqrt(cable.resistance**2 + s * cable.skin_resistance**2) + s * 49.0 * cable.delay
    shunt = s * cable.delay / 49.0
    parts = [(np.sqrt(series / shunt), np.sqrt(series * shunt)), (86.6 + 0 * s, s * 0.23e-9)]
    for medium, share in ((ABOVE, 0.25), (SOIL, 0.75)):
        index = np.sqrt(medium.permittivity(s))
        parts.append((178.6 / index, s * index * share * 0.3 / speed_of_light))
    ends = skrf.media.DefinedGammaZ0(frequency, z0_port=50.0, gamma=1j * f)
    network = ends.open() if end == OPEN else ends.short()
    for z, gl in reversed(parts):
        media = skrf.media.DefinedGammaZ0(frequency, z0_port=50.0, z0=z, gamma=gl)
        network = media.line(1.0, "m") ** network
    logit = float(np.log(0.25 / 0.75))
    found, _ = reflected(s, PROBE, Layers((ABOVE, SOIL), logit), end)
    assert np.max(np.abs(found - network.s[:, 0, 0])) < 1e-11


def test_a_matched_line_reflects_nothing_but_its_end():
    travel = np.array([0.3 + 2j, 0.1 + 0.5j])
    found, _ = reflection(50.0, [Section(np.array([50.0 + 0j, 50.0]), travel)])
    assert np.allclose(found, np.exp(-travel), atol=1e-15)


def test_far_below_every_reflection_it_is_a_resistance():
    """R = K / sigma with K = eps0 c Z / L, in series with the cable."""
    s = np.array([1e-3 + 0j])
    cable = Cable(50.0, 15e-9, 0.15, 0.0)
    system = System(Rods(0.3, 178.631), Head(86.6, 0.23e-9), cable, 50.0)
    found, _ = reflected(s, system, Layers((Medium(13.0, (), (), 0.03),)), OPEN)
    ohms = 50.0 * (1 + found[0]) / (1 - found[0])
    constant = epsilon_0 * speed_of_light * 178.631 / 0.3
    assert ohms.real == pytest.approx(constant / 0.03 + 0.15, rel=1e-6)


def test_derivatives_are_those_of_small_changes():
    start, gap = window_axis(4.15, 5.0, 400)
    case = Experiment(np.zeros(400), 1.0, grid(start, gap, 400, 40e-12), (0.0, 1.0, 8e-7))
    layers = Layers((ABOVE, SOIL), -0.8)
    values = np.concatenate([system_values(PROBE), layers.values])
    places = len(SYSTEM)

    def at(v):
        return case.explained(system_of(v[:places], 50.0), layers.with_values(v[places:]))

    _, slopes = at(values)
    for k in range(values.size):
        ahead, behind = values.copy(), values.copy()
        ahead[k] += 3e-5
        behind[k] -= 3e-5
        change = (at(ahead)[0] - at(behind)[0]) / 6e-5
        scale = max(np.max(np.abs(slopes[:, k])), 1e-4)
        assert np.max(np.abs(change - slopes[:, k])) < 2e-3 * scale, k


def test_apparent_permittivity_and_its_derivatives():
    """Ka = (Re sqrt(eps))^2; 25 - 2j with 0.1 S/m is 28.50004 at 100 MHz, 25.14339 at 1 GHz."""
    for frequency, expected in ((1e8, 28.50004), (1e9, 25.14339)):
        strength = 2.0 * (1 + 1e-12) / 1e-6  # a loss of 2 and no more: strength w t at w t = 1e-6
        time = 1e-6 / (2 * np.pi * frequency)
        medium = Medium(25.0 - strength, (strength,), (time,), 0.1)
        eps = medium.permittivity(np.array([2j * np.pi * frequency]))[0]
        assert np.sqrt(eps).real ** 2 == pytest.approx(expected, abs=1e-4)
    value, slopes = apparent_of(SOIL, 7e8)
    for k in range(slopes.size):
        moved = SOIL.values
        moved[k] += 1e-6
        change = (apparent_of(Medium.of_values(moved), 7e8)[0] - value) / 1e-6
        assert change == pytest.approx(slopes[k], abs=1e-4)


@pytest.mark.parametrize(("start", "step", "sentence"), [
    (-1e-9, 1e-11, "1 ns before it"), (1.9e-5, 1e-13, "expected at most"),
])  # fmt: skip
def test_a_grid_that_cannot_be_is_refused_before_it_takes_memory(start, step, sentence):
    with pytest.raises(ParameterError, match=sentence):
        grid(start, step, 1024, 5e-11)


def test_late_times_are_those_of_known_transforms():
    """1 / (s + a) is exp(-a t); s^-1.5 is 2 sqrt(t / pi)."""
    t = 7e-7
    s = late_frequencies(t)
    assert float(late_value(s / (s + 2e5))) == pytest.approx(np.exp(-0.14), abs=2e-5)
    assert float(late_value(s * s**-1.5)) == pytest.approx(2 * np.sqrt(t / np.pi), rel=2e-4)


def test_a_medium_comes_back_from_its_numbers():
    again = Medium.of_values(SOIL.values)
    assert again.strengths == pytest.approx(SOIL.strengths)
    assert again.times == pytest.approx(SOIL.times)
    assert (again.high, again.conductivity) == pytest.approx((SOIL.high, SOIL.conductivity))
