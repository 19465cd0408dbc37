"""Sodium chloride in water at 25 Cel: concentration and conductivity, each from the other."""

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, Citation, Range, column

LIMITING, SQUARE_ROOT, CLOSEST, FIRST, HIGHER = 126.45, -89.14, 1.247, 7.469, -8.502
"""Molar conductivity L(x) = 126.45 - 89.14 x / (1 + 1.247 x) + 7.469 x^2 - 8.502 x^3 in S cm2/mol,
with x the square root of mol/L: at most 0.12 % from the table, 0.0005 to 1 mol/L."""

CONCENTRATION = Range(0.0, 1.2)
"""mol/L; fitted up to 1, rising and smooth to the end."""
SOURCE = Citation(
    authors="Robinson, R. A.; Stokes, R. H.",
    year=1959,
    title="Electrolyte solutions, 2nd edition",
    where="Butterworths, London; appendix, molar conductivity of NaCl at 25 Cel",
    note="0.001 to 0.1 mol/L read in a textbook table, the other points from memory; "
    "the fit through them is ours",
)

_STEPS = 4
"""Newton from below on a concave curve: 4 steps leave 1e-15 of the answer."""
_TO_SI = 0.1  # mol/L times S cm2/mol is dS/m


@np.errstate(all="ignore")
def conductivity_25(concentration: ArrayLike) -> Array:
    """Electrical conductivity at 25 Cel.

    concentration: elementwise, mol/L, 0 to 1.2; NaN outside.
    Returns S/m.
    """
    c = column(concentration)
    known = np.where(CONCENTRATION.excludes(c), np.nan, c)
    return _TO_SI * known * _molar_conductivity(np.sqrt(known))


@np.errstate(all="ignore")
def concentration(conductivity_25: ArrayLike) -> Array:
    """Concentration of sodium chloride with that electrical conductivity.

    conductivity_25: elementwise, S/m at 25 Cel, 0 to 9.95; NaN outside.
    Returns mol/L; the exact inverse of ``conductivity_25``.
    """
    sigma = column(conductivity_25)
    target = np.where(CONDUCTIVITY_25.excludes(sigma), np.nan, sigma) / _TO_SI
    c = target / LIMITING
    for _ in range(_STEPS):
        x = np.sqrt(c)
        molar = _molar_conductivity(x)
        c = c + (target - c * molar) / (molar + x / 2 * _molar_slope(x))
    return c


def _molar_conductivity(x: Array) -> Array:
    return LIMITING + x * (SQUARE_ROOT / (1 + CLOSEST * x) + x * (FIRST + x * HIGHER))


def _molar_slope(x: Array) -> Array:
    return SQUARE_ROOT / (1 + CLOSEST * x) ** 2 + x * (2 * FIRST + x * (3 * HIGHER))


CONDUCTIVITY_25 = Range(0.0, float(conductivity_25(CONCENTRATION.high)))
"""S/m, what the range of concentration reaches."""
