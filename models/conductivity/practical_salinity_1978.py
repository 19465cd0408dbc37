"""Practical salinity scale 1978, at 25 Cel, with the extension of Hill et al. (1986) below 2."""

import numpy as np
from numpy.polynomial.polynomial import polyval
from numpy.typing import ArrayLike

from models.relation import Array, Citation, Range, column

STANDARD = 4.2914
"""Conductivity of sea water of salinity 35 at 15 Cel, S/m."""
TEMPERATURE = 25.0 * 1.00024
"""25 Cel on the scale of 1968, on which the polynomials were made."""
TEMPERATURE_RATIO = (0.6766097, 2.00564e-2, 1.104259e-4, -6.9698e-7, 1.0031e-9)
A = (0.0080, -0.1692, 25.3851, 14.0941, -7.0261, 2.7081)
B = (0.0005, -0.0056, -0.0066, -0.0375, 0.0636, -0.0144)
K = 0.0162

SALINITY = Range(0.0, 42.0)
SOURCE = Citation(
    authors="Lewis, E. L.",
    year=1980,
    title="The practical salinity scale 1978 and its antecedents",
    where="IEEE Journal of Oceanic Engineering 5(1), 3-8; below 2: Hill, Dauphinee and Woods "
    "(1986), the same journal 11(1), 109-112",
    note="coefficients from memory, confirmed to 8e-5 against an independent implementation",
)


@np.errstate(all="ignore")
def salinity(conductivity_25: ArrayLike) -> Array:
    """Salinity of sea water, diluted or not, with that conductivity at 25 Cel.

    conductivity_25: elementwise, S/m, 0 to 6.2; NaN below 0.
    Returns practical salinity, close to g/kg.

    The extension is applied throughout, so that there is no step at 2; above it adds below 1e-3.
    """
    ratio = column(conductivity_25) / (STANDARD * polyval(TEMPERATURE, TEMPERATURE_RATIO))
    root = np.sqrt(ratio)
    away = TEMPERATURE - 15
    share = away / (1 + K * away)
    x, y = 400 * ratio, 10 * root
    dilute = A[0] / (1 + x * (1.5 + x)) + B[0] * share / (1 + y * (1 + y * (1 + y)))
    return polyval(root, A) + share * polyval(root, B) - dilute
