"""Baker-Jarvis, Vanzura and Kissick (1990): permittivity alone, steady through half wavelengths."""

import numpy as np

from models.reflection.analytic_fit import Model, solve
from models.reflection.two_port.forward import scattering_slopes
from models.relation import Array, ComplexArray


def combined(frequency: Array, length: float, weight: float) -> Model:
    """((S12 + S21) + b (S11 + S22)) / 2 of a symmetric sample as a function of permittivity."""

    def predicted(permittivity: ComplexArray) -> tuple[ComplexArray, ComplexArray]:
        s11, s21, ds11, ds21 = scattering_slopes(permittivity, frequency, length)
        return (s21 + weight * s11)[None], (ds21 + weight * ds11)[None]

    return predicted


def permittivity(
    s: tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray],
    frequency: Array,
    length: float,
    start: ComplexArray,
    weight: float = 0.0,
) -> ComplexArray:
    """Permittivity by iteration from a start, shape (f,).

    s: S11, S21, S12, S22, planes at the faces. weight: b, how much less certain transmission is
    than reflection; 0 takes what passes alone, which the position of the sample does not change.
    """
    s11, s21, s12, s22 = s
    read = 0.5 * ((s12 + s21) + weight * (s11 + s22))[None]
    model = combined(frequency, length, weight)
    return solve(model, start, read, np.ones(read.shape)).value


def all_four(frequency: Array, length: float) -> Model:
    """S11, S21, S12, S22 of a symmetric sample, shape (4, f): each with its own weight."""

    def predicted(eps: ComplexArray) -> tuple[ComplexArray, ComplexArray]:
        s11, s21, ds11, ds21 = scattering_slopes(eps, frequency, length)
        return np.stack([s11, s21, s21, s11]), np.stack([ds11, ds21, ds21, ds11])

    return predicted
