"""A line filled without end: its impedance alone tells the permittivity, if it is not magnetic."""

import numpy as np

from models.relation import ComplexArray


@np.errstate(all="ignore")
def reflection(permittivity: ComplexArray) -> tuple[ComplexArray, ComplexArray]:
    """Reflection at the face of the filling, from an air line, and its derivative, elementwise."""
    root = np.sqrt(permittivity)
    return (1 - root) / (1 + root), -1 / (root * np.square(1 + root))


@np.errstate(all="ignore")
def permittivity(read: ComplexArray) -> ComplexArray:
    """Permittivity from the reflection at the face of the filling, elementwise.

    eps = ((1 - R) / (1 + R))^2: the line is endless, or what comes back from its end is not seen.
    """
    return np.square((1 - read) / (1 + read))


@np.errstate(all="ignore")
def slope(read: ComplexArray) -> ComplexArray:
    """Derivative of the permittivity by the reflection, elementwise."""
    return -4 * (1 - read) / (1 + read) ** 3
