"""Complex numbers of a request, of a size that reflections have; refusals at their place."""

import numpy as np

from models.relation import Array, ComplexArray, column
from service.errors import Unprocessable
from service.faults import Fault, pointer
from service.sweeps.bodies import ComplexColumn

LARGEST = 2.0
"""Magnitude beyond that of any reflection, even as read through a poor port: ohm, decibels."""
PARTS = (("real", "imaginary"), ("magnitude", "degrees"))
TURN = 4.0
"""Range of a phase that stays within -pi and pi, from which it is in radians."""

Place = tuple[int | str, ...]


def refuse(detail: str, place: Place) -> Unprocessable:
    """A refusal of one thing, at its place."""
    return Unprocessable(detail, [Fault(detail, pointer(place))])


def complex_of(body: ComplexColumn, place: Place) -> ComplexArray:
    """Complex numbers from their parts, of a size that a reflection has."""
    given = tuple(n for pair in PARTS for n in pair if getattr(body, n) is not None)
    if given not in PARTS:
        found = ", ".join(given) or "none of them"
        raise refuse(f"expected real and imaginary, or magnitude and degrees; found {found}", place)
    first, second = (column(getattr(body, name)) for name in given)
    if first.size != second.size:
        detail = f"{given[0]} has {first.size} values, {given[1]} {second.size}"
        raise refuse(detail, (*place, given[1]))
    if given == PARTS[0]:
        values = first + 1j * second
    else:
        _refuse_decibels(first, (*place, "magnitude"))
        _refuse_radians(second, (*place, "degrees"))
        values = first * np.exp(1j * np.radians(second))
    refuse_large(values, place)
    return np.asarray(values, dtype=np.complex128)


def _refuse_decibels(magnitude: Array, place: Place) -> None:
    """A magnitude below zero is none."""
    below = np.flatnonzero(magnitude < 0)
    if below.size:
        worst = int(below[0])
        detail = (
            f"a magnitude is not below 0, found {magnitude[worst]:g}: these look like decibels; "
            "send 10^(dB / 20)"
        )
        raise refuse(detail, (*place, worst))


def _refuse_radians(phase: Array, place: Place) -> None:
    """A sweep that runs through all of -pi to pi, and no further, was written in radians."""
    within = phase.size > 3 and float(np.abs(phase).max()) <= np.pi + 1e-3
    if within and float(np.ptp(phase)) > TURN:
        detail = (
            "every phase lies between -3.1416 and 3.1416: these look like radians; send "
            "degrees (radians times 57.29578), or real and imaginary parts"
        )
        raise refuse(detail, place)


def refuse_large(values: ComplexArray, place: Place) -> None:
    """Refuse what is no reflection coefficient: ohm, decibels, degrees read as a part."""
    if values.size and np.abs(values).max() > LARGEST:
        first = int(np.flatnonzero((np.abs(values) > LARGEST).reshape(len(values), -1).any(1))[0])
        detail = (
            f"a reflection coefficient is about 1 at most, found {np.abs(values[first]).max():.4g} "
            f"at point {first + 1}: send rho = (Z - Z0) / (Z + Z0) in place of ohm, magnitudes in "
            "place of decibels, degrees as degrees"
        )
        raise refuse(detail, place)
