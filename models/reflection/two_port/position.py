"""Where in its holder a sample is: what the two reflections of a symmetric sample tell."""

import numpy as np
from scipy.constants import speed_of_light

from models.reflection.propagation import through_air
from models.relation import Array, ComplexArray

FINE, STEPS = 401, 20
"""Shifts that are tried, and Newton steps from the best of them."""

Planes = tuple[float, float]
"""Air line before and behind the sample, m."""


def found(
    s11: ComplexArray, s22: ComplexArray, frequency: Array, air: float, spread: float
) -> tuple[Planes, float]:
    """Air before and behind a sample, m, and the standard uncertainty of their share.

    s11, s22: shape (f,), planes at the ends of the holder. air: length of the holder beyond the
    sample, m. spread: standard uncertainty of each part of the reflections.

    S11 / S22 = exp(2 g0 (d2 - d1)): the shift that makes the two agree over the whole band at
    once, so that no phase need be followed.
    """
    wave = 2 * np.pi * frequency / speed_of_light
    product = np.where(np.isfinite(s11 * s22), s11 * np.conj(s22), 0.0)
    shifts = np.linspace(-air, air, FINE)
    agreement = [np.real(product * np.exp(2j * wave * shift)).sum() for shift in shifts.tolist()]
    shift = float(shifts[int(np.argmax(agreement))])
    for _ in range(STEPS):
        turned = product * np.exp(2j * wave * shift)
        slope = float((-2 * wave * turned.imag).sum())
        bend = float((4 * wave**2 * turned.real).sum())
        if not bend > 0:
            break
        shift = min(max(shift + slope / bend, -air), air)
    power = np.square(np.abs(s11)) + np.square(np.abs(s22))
    with np.errstate(all="ignore"):
        known = np.square(2 * wave) * np.square(np.abs(product)) / power
    information = float(np.nansum(known)) / max(spread, 1e-15) ** 2
    u = 1 / np.sqrt(information) if information > 0 else np.inf
    return (0.5 * (air + shift), 0.5 * (air - shift)), 0.5 * float(u)


def at_faces(
    s: tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray],
    frequency: Array,
    planes: Planes,
) -> tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray]:
    """S11, S21, S12, S22 with the planes moved to the faces of the sample."""
    s11, s21, s12, s22 = s
    before, behind = (through_air(frequency, length) for length in planes)
    return (
        s11 * before * before,
        s21 * before * behind,
        s12 * before * behind,
        s22 * behind * behind,
    )


@np.errstate(all="ignore")
def invariant(
    permittivity: ComplexArray, frequency: Array, length: float, holder: float
) -> ComplexArray:
    """S11 S22 - S21 S12 of a sample anywhere in its holder, elementwise: position drops out."""
    root = np.sqrt(permittivity)
    r = (1 - root) / (1 + root)
    t = np.exp(-2j * np.pi * frequency * root * length / speed_of_light)
    inside = (r * r - t * t) / (1 - r * r * t * t)
    return np.asarray(inside / np.square(through_air(frequency, holder - length)))
