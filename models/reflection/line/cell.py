"""A cell of known length, shorted or open at its end, or measured both ways."""

from typing import Literal

import numpy as np
from scipy.constants import speed_of_light

from models.reflection.analytic_fit import Model
from models.relation import Array, ComplexArray

End = Literal["short", "open"]
ENDS: tuple[End, End] = ("short", "open")


@np.errstate(all="ignore")
def reflection(
    permittivity: ComplexArray, frequency: Array, length: float, end: End
) -> tuple[ComplexArray, ComplexArray]:
    """Reflection at the face of a sample in an air line and its derivative, elementwise.

    frequency: Hz. length: of the sample, m; what lies behind it is a short, or ideally open.

    In powers of the wave that went to the end and back, so that nothing overflows in a long
    lossy cell.
    """
    root, k = np.sqrt(permittivity), 2 * np.pi * frequency / speed_of_light
    face = (1 - root) / (1 + root)
    face_slope = -1 / (root * np.square(1 + root))
    sign = -1.0 if end == "short" else 1.0
    back = sign * np.exp(-2j * k * length * root)
    back_slope = -1j * k * length / root * back
    below = 1 + face * back
    value = (face + back) / below
    slope = (face_slope * (1 - back * back) + back_slope * (1 - face * face)) / np.square(below)
    return value, slope


def model(frequency: Array, length: float, ends: tuple[End, ...]) -> Model:
    """What the cell reads with each of the ends, shape (k, f), as a function of permittivity."""

    def predicted(permittivity: ComplexArray) -> tuple[ComplexArray, ComplexArray]:
        pairs = [reflection(permittivity, frequency, length, end) for end in ends]
        values, slopes = zip(*pairs, strict=True)
        return np.stack(values), np.stack(slopes)

    return predicted


@np.errstate(all="ignore")
def from_both(
    shorted: ComplexArray, opened: ComplexArray, frequency: Array, length: float
) -> tuple[ComplexArray, ComplexArray]:
    """Permittivity and permeability from both ends, shape (f,), reflections at the face.

    Z = sqrt(Zs Zo), tanh(gamma L) = Zs / Z; the phase of gamma L, which repeats with pi, is
    followed from the lowest frequency up.
    """
    at_short, at_open = ((1 + read) / (1 - read) for read in (shorted, opened))
    impedance = np.sqrt(at_short * at_open)
    way = np.arctanh(at_short / impedance)
    phase = np.unwrap(np.where(np.isfinite(way), way.imag, 0.0), period=np.pi)
    phase = phase - np.pi * np.floor(phase[..., :1] / np.pi)
    index = (phase - 1j * way.real) * speed_of_light / (2 * np.pi * frequency * length)
    return index / impedance, index * impedance
