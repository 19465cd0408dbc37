"""Nicolson and Ross (1970), Weir (1974): permittivity and permeability from S11 and S21."""

from dataclasses import dataclass

import numpy as np
from scipy.constants import speed_of_light

from models.reflection.two_port.forward import scattering
from models.relation import Array, ComplexArray

LARGEST_INDEX = 12.0
"""Of refraction, up to which branches are looked for."""
CLEAR = 0.5
"""How much nearer the chosen branch must be than the next to count as certain."""


@dataclass(frozen=True, slots=True)
class Constants:
    """What the equations give, shape (f,)."""

    index: ComplexArray
    """sqrt(eps mu): stays good where the sample is half a wavelength long."""
    impedance: ComplexArray
    """sqrt(mu / eps)"""
    turns: int
    """Whole wavelengths in the sample at the first frequency."""
    certain: bool
    """Whether the sweep itself tells the number of turns."""

    @property
    def permittivity(self) -> ComplexArray:
        """Relative permittivity eps."""
        return self.index / self.impedance

    @property
    def permeability(self) -> ComplexArray:
        """Relative permeability mu."""
        return self.index * self.impedance


@np.errstate(all="ignore")
def constants(
    s11: ComplexArray,
    s21: ComplexArray,
    frequency: Array,
    length: float,
    guess: complex | None = None,
) -> Constants:
    """Index and impedance of a sample, planes at its faces, shape (f,).

    guess: index near the first frequency, which then decides the branch.

    |R| <= 1 chooses the root; where |R| is so near 1 that noise decides, the root that follows
    from its neighbour is taken.
    """
    x = (np.square(s11) - np.square(s21) + 1) / (2 * s11)
    root = np.sqrt(np.square(x) - 1)
    either = np.stack([x - root, x + root])
    either = 1 / either[np.argmax(np.abs(either), axis=0), np.arange(x.size)]  # no digits lost
    r = np.where(np.isfinite(either), either, 0.0)
    t = (s11 + s21 - r) / (1 - (s11 + s21) * r)
    phase = np.unwrap(np.angle(np.where(np.isfinite(t), t, 1.0)))
    turns, certain = _branch(phase, frequency, length, guess)
    way = -(np.log(np.abs(t)) + 1j * (phase - 2 * np.pi * turns))
    index = way * speed_of_light / (2j * np.pi * frequency * length)
    return Constants(index, (1 + r) / (1 - r), turns, certain)


def _branch(
    phase: Array, frequency: Array, length: float, guess: complex | None
) -> tuple[int, bool]:
    """Whole turns to take from the phase: those at which phase and group index agree best."""
    unit = speed_of_light / (2 * np.pi * length)
    first = -phase[0] * unit / frequency[0]
    step = speed_of_light / (length * frequency[0])
    most = max(int(np.ceil(LARGEST_INDEX / step)), 1)
    turns = np.arange(-1, most + 1)
    if guess is not None:
        away = np.abs(first + turns * step - guess.real)
        return int(turns[np.argmin(away)]), True
    if frequency.size < 3:
        usable = turns[first + turns * step > 0]
        return (int(usable[0]) if usable.size else 0), False
    group = -np.gradient(phase, frequency) * unit
    index = (-phase + 2 * np.pi * turns[:, None]) * unit / frequency
    away = np.median(np.abs(index - group), axis=1)
    away = np.where(np.median(index, axis=1) > 0, away, np.inf)
    order = np.argsort(away)
    certain = bool(away[order[0]] < CLEAR * away[order[1]])
    largest = float(np.max(np.abs(np.diff(phase))))
    return int(turns[order[0]]), certain and largest < 0.8 * np.pi


@np.errstate(all="ignore")
def response(
    permittivity: ComplexArray, permeability: ComplexArray, frequency: Array, length: float
) -> ComplexArray:
    """Derivatives of (eps, mu) by (S11, S21), shape (f, 2, 2): the inverse of the forward ones."""
    columns = []
    for step_eps, step_mu in ((1e-6, 0.0), (0.0, 1e-6)):
        ends = [
            np.stack(scattering(
                permittivity * (1 + sign * step_eps), permeability * (1 + sign * step_mu),
                frequency, length,
            ))
            for sign in (1, -1)
        ]  # fmt: skip
        moved = 2e-6 * (permittivity if step_eps else permeability)
        columns.append((ends[0] - ends[1]) / moved)
    forward = np.moveaxis(np.stack(columns, axis=1), -1, 0)
    a, b, c, d = forward[:, 0, 0], forward[:, 0, 1], forward[:, 1, 0], forward[:, 1, 1]
    inverse = np.stack([np.stack([d, -b], -1), np.stack([-c, a], -1)], axis=1)
    return np.asarray(inverse / (a * d - b * c)[:, None, None])
