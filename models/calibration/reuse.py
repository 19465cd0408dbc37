"""A calibration as parameters of a mixing model, whose coefficients carry no covariance."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from scipy.optimize import nnls

from models.calibration.calibration import GRID, Calibration
from models.relation import Array
from models.uncertainty.coverage import coverage_factor

MOST = 1.0
"""m3/m3 of standard error that estimates take."""
STRAIGHT = 2
"""Coefficients of a line: curves that turn are not moved by an uncertainty of their slope."""

NEGLIGIBLE = 0.05
"""Of the variance at the wet end: less growth is not told."""


@dataclass(frozen=True, slots=True)
class Reuse:
    """What to send as mixing model, and how well it gives the prediction band back."""

    parameters: Mapping[str, float]
    """Coefficients, standard_error, and for a line the _u of its slope."""
    least: float
    """Standard uncertainty that a new reading needs beside that of its permittivity, m3/m3."""
    most: float
    """The same where most is needed within the range."""
    off: float
    """Largest relative difference between what is needed and what the parameters give."""
    unusable: str
    """Why the mixing model does not take them; empty: it does."""


def reuse(found: Calibration, probability: float) -> Reuse:
    """Parameters with which estimates have the prediction band of the calibration.

    What a new reading needs beside the error of its permittivity is the half-width of the
    prediction band over the coverage factor of a normal distribution, so that who multiplies with
    that gets the band back, few pairs and all. Its square over the range is told by a constant,
    the standard error, and for a line by a part that grows with the variable, an uncertainty of
    the slope: an error of density does that. Nearest in relative variance, neither below zero.
    """
    form, grid = found.form, found.grid
    band = found.band(grid, np.zeros(GRID), probability)
    needed = band.prediction_half_width / coverage_factor(probability)
    variance = np.maximum(np.square(needed), 1e-30)
    growing = np.square(form.variable(grid))
    constant, growth = _shares(variance, growing if form.size == STRAIGHT else None)
    told = np.sqrt(constant + growth * growing)
    parameters = dict(zip(form.coefficients, found.coefficients.tolist(), strict=True))
    if growth > 0.0:
        parameters[f"{form.coefficients[1]}_u"] = float(np.sqrt(growth))
    parameters["standard_error"] = float(np.sqrt(constant))
    off = float(np.max(np.abs(told / np.sqrt(variance) - 1.0)))
    why = form.unusable(found.coefficients)
    if found.flat:
        why = "the curve rises by no more than twice the uncertainty of its rise"
    elif needed.max() > MOST:
        why = f"its standard error would be {needed.max():.3g} m3/m3, more than all of the volume"
    return Reuse(parameters, float(needed.min()), float(needed.max()), off, why)


def _shares(variance: Array, growing: Array | None) -> tuple[float, float]:
    """Variances that are there everywhere, and in proportion to what grows; neither below zero."""
    even = np.ones(GRID)
    if growing is not None:
        terms = np.stack([even, growing], axis=1)
        shares, _ = nnls(terms / variance[:, None], even)
        if shares[1] * growing[-1] > NEGLIGIBLE * variance[-1]:
            return float(shares[0]), float(shares[1])
    return float(np.sum(1.0 / variance) / np.sum(1.0 / np.square(variance))), 0.0
