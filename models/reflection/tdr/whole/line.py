"""A lossy line of several sections, seen from its instrument, with its exact derivatives.

Everything is a function of the complex frequency s; on s = j w it is the reflection of a
network analyser, elsewhere what a transform to time needs.
"""

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np
from scipy.constants import speed_of_light

from models.conductivity.loss import VACUUM_PERMITTIVITY
from models.reflection.tdr.probe import Cable, Head
from models.relation import ComplexArray

OPEN, SHORT = 1.0, -1.0
"""Reflection at the far end."""


class Section(NamedTuple):
    """A piece of line: its impedance, ohm, and twice its propagation constant times its length."""

    impedance: ComplexArray
    travel: ComplexArray


class Sensitivity(NamedTuple):
    """How the reflection answers to one section: to ln(impedance), and to its travel."""

    impedance: ComplexArray
    travel: ComplexArray


@np.errstate(all="ignore")
def reflection(
    source: float, sections: Sequence[Section], end: float = OPEN
) -> tuple[ComplexArray, tuple[Sensitivity, ...]]:
    """Reflection coefficient at the instrument, and its derivatives section by section.

    source: impedance of the instrument, ohm. sections: from the instrument outwards, shape (n,).
    end: reflection at the far end.

    Exact: each junction is (r + G) / (1 + r G), each section exp(-2 gamma L); the derivatives
    follow from the same recursion, walked back from the instrument.
    """
    last = len(sections) - 1
    decays = [np.exp(-section.travel) for section in sections]
    seen: list[ComplexArray] = [np.asarray(end) * decays[last]] * (last + 1)
    steps: list[ComplexArray] = [np.asarray(0j)] * (last + 1)
    for k in range(last - 1, -1, -1):
        steps[k + 1] = _step(sections[k].impedance, sections[k + 1].impedance)
        seen[k] = decays[k] * _junction(steps[k + 1], seen[k + 1])
    steps[0] = _step(np.asarray(source), sections[0].impedance)
    gain: ComplexArray = np.asarray(1.0 + 0j)
    to_step: list[ComplexArray] = []
    to_seen: list[ComplexArray] = []
    for k, r in enumerate(steps):
        square = (1 + r * seen[k]) ** 2
        to_step.append(gain * (1 - r * r) * (1 - seen[k] ** 2) / (2 * square))
        here = gain * (1 - r * r) / square
        to_seen.append(here)
        gain = here * decays[k]
    to_step.append(np.asarray(0j))
    told = tuple(
        Sensitivity(to_step[k] - to_step[k + 1], -to_seen[k] * seen[k]) for k in range(last + 1)
    )
    return _junction(steps[0], seen[0]), told


def _step(here: ComplexArray, beyond: ComplexArray) -> ComplexArray:
    return (beyond - here) / (beyond + here)


def _junction(step: ComplexArray, beyond: ComplexArray) -> ComplexArray:
    return (step + beyond) / (1 + step * beyond)


@np.errstate(all="ignore")
def cable_section(s: ComplexArray, cable: Cable) -> Section:
    """A cable with direct-current resistance and skin effect.

    Series impedance sqrt(R^2 + s K^2) + s Z0 t, shunt admittance s t / Z0, all of its length.
    """
    series, shunt, _ = cable_parts(s, cable)
    return Section(np.sqrt(series / shunt), 2 * np.sqrt(series * shunt))


def cable_parts(s: ComplexArray, cable: Cable) -> tuple[ComplexArray, ComplexArray, ComplexArray]:
    """Series impedance, shunt admittance, and the resistive part of the former."""
    resistive = np.sqrt(cable.resistance**2 + s * cable.skin_resistance**2)
    series = resistive + s * cable.impedance * cable.delay
    return series, s * cable.delay / cable.impedance, resistive


def head_section(s: ComplexArray, head: Head) -> Section:
    """A lossless piece between cable and rods."""
    return Section(np.asarray(head.impedance, dtype=np.complex128), 2 * s * head.delay)


@np.errstate(all="ignore")
def rod_section(
    s: ComplexArray, permittivity: ComplexArray, impedance: float, length: float
) -> Section:
    """Rods in a medium; impedance: theirs in air, ohm. length: m."""
    index: ComplexArray = np.sqrt(permittivity)
    here: ComplexArray = impedance / index
    return Section(here, 2 * s * index * (length / speed_of_light))


def conducting(s: ComplexArray, conductivity: float) -> ComplexArray:
    """What a conductivity, S/m, adds to a permittivity."""
    return conductivity / (s * VACUUM_PERMITTIVITY)
