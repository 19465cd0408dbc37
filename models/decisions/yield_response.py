"""Yield and salt: Maas and Hoffman (1977), a line; Steppuhn and others (2005), a curve.

Conductivities are those of the saturated paste extract at 25 Cel, S/m; slopes are fractions of the
yield per S/m. Rice while submerged is the exception: its conductivity is that of the soil water.
"""

import numpy as np
from numpy.typing import ArrayLike

from models.decisions.outcome import Known, Outcome, outcome
from models.relation import Array, Citation, column

SOURCE = Citation(
    authors="Maas, E. V.; Hoffman, G. J.",
    year=1977,
    title="Crop salt tolerance: current assessment",
    where="Journal of the Irrigation and Drainage Division ASCE 103(IR2), 115-134",
    equation="Yr = 100 - b (ECe - a)",
    note="equation and worked values read in course notes on ASCE Manual 71; citation from memory",
)
CURVE_SOURCE = Citation(
    authors="Steppuhn, H.; van Genuchten, M. T.; Grieve, C. M.",
    year=2005,
    title="Root-zone salinity: II. Indices for tolerance in agricultural crops",
    where="Crop Science 45, 221-232",
    equation="Yr = 1 / (1 + (C / C50)^exp(s C50))",
    note="read in the abstract",
)
DS_M = 0.1
"""S/m in 1 dS/m: the constants of the curve are for dS/m."""


def linear_yield(extract_conductivity: ArrayLike, threshold: ArrayLike, slope: ArrayLike) -> Array:
    """The threshold-slope line without its ends 0 and 1, elementwise."""
    return 1.0 - column(slope) * (column(extract_conductivity) - column(threshold))


def relative_yield(
    extract_conductivity: Known, *, threshold: Known, slope: Known, probability: float = 0.95
) -> Outcome:
    """Relative yield, 0 to 1, by threshold and slope, with its band, elementwise."""
    given = {"conductivity": extract_conductivity, "threshold": threshold, "slope": slope}

    def line(conductivity: Array, threshold: Array, slope: Array) -> Array:
        return linear_yield(conductivity, threshold, slope)

    return outcome(line, given, low=0.0, high=1.0, probability=probability)


def conductivity_at(relative: ArrayLike, threshold: ArrayLike, slope: ArrayLike) -> Array:
    """Extract conductivity at which the line gives that relative yield, elementwise, S/m."""
    return column(threshold) + (1.0 - column(relative)) / column(slope)


def curve_parameters(threshold: ArrayLike, slope: ArrayLike) -> tuple[Array, Array]:
    """C50 (S/m) and steepness s (1 per S/m) of the curve, from threshold and slope, elementwise."""
    a, b = column(threshold) / DS_M, column(slope) * DS_M
    return (0.988 * (0.5 / b + a) - 0.252) * DS_M, 1.52 * b / DS_M


def curved_yield(extract_conductivity: ArrayLike, half: ArrayLike, steepness: ArrayLike) -> Array:
    """Relative yield by the curve, elementwise; half: C50, S/m; NaN below no salt at all."""
    c, c50 = column(extract_conductivity), column(half)
    with np.errstate(invalid="ignore"):
        return 1.0 / (1.0 + np.power(c / c50, np.exp(column(steepness) * c50)))


def curved_response(
    extract_conductivity: Known, *, threshold: Known, slope: Known, probability: float = 0.95
) -> Outcome:
    """Relative yield by the curve behind threshold and slope, with its band, elementwise."""
    given = {"conductivity": extract_conductivity, "threshold": threshold, "slope": slope}

    def curve(conductivity: Array, threshold: Array, slope: Array) -> Array:
        return curved_yield(conductivity, *curve_parameters(threshold, slope))

    return outcome(curve, given, low=0.0, high=1.0, probability=probability)
