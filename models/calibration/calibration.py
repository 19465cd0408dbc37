"""A soil's own calibration: a curve through its pairs, how good it is, and what it predicts."""

from dataclasses import dataclass

import numpy as np
from scipy.special import chdtrc

from models.calibration.forms import Form
from models.calibration.left_out import LeftOut, leave_out
from models.calibration.pairs import Pairs, refuse, refuse_form
from models.calibration.regression import Fit
from models.calibration.scatter import Scatter
from models.calibration.soil_scatter import Settled, settle
from models.errors import Complaint, ParameterError
from models.relation import Array, Range

GRID = 41
"""Permittivities over the range at which one standard error is made and a rise looked for."""


@dataclass(frozen=True, slots=True, eq=False)
class Band:
    """Water content at permittivities, shape (m,), m3/m3."""

    water_content: Array
    curve_u: Array
    """Of the curve itself, standard: the mean of many soil samples."""
    curve_half_width: Array
    prediction_u: Array
    """Of the water content of one new reading."""
    prediction_half_width: Array

    @property
    def curve_ends(self) -> tuple[Array, Array]:
        """Of the mean band."""
        return (
            self.water_content - self.curve_half_width,
            self.water_content + self.curve_half_width,
        )

    @property
    def prediction_ends(self) -> tuple[Array, Array]:
        """Of the prediction band; neither cut at 0 nor at the pores."""
        return (
            self.water_content - self.prediction_half_width,
            self.water_content + self.prediction_half_width,
        )


RISES = 2.0
"""Standard uncertainties by which a curve rises over its range, at least."""


@dataclass(frozen=True, slots=True, eq=False)
class Calibration:
    """What pairs tell of a soil's curve."""

    pairs: Pairs
    settled: Settled
    scatter: Scatter
    left_out: LeftOut

    @property
    def fit(self) -> Fit:
        """The curve itself."""
        return self.settled.fit

    @property
    def form(self) -> Form:
        """Of the curve."""
        return self.fit.form

    @property
    def coefficients(self) -> Array:
        """As the mixing model takes them, shape (size,)."""
        return self.fit.coefficients

    @property
    def covariance(self) -> Array:
        """Of the coefficients, shape (size, size); the soil's scatter and shared errors in it."""
        return self.fit.plain(self._of_pairs * self.scatter.factor + self._of_shared)

    @property
    def coefficients_u(self) -> Array:
        """Their standard uncertainties, shape (size,)."""
        return np.sqrt(np.diagonal(self.covariance))

    @property
    def range(self) -> Range:
        """Of the permittivities."""
        return Range(float(self.pairs.permittivity.min()), float(self.pairs.permittivity.max()))

    @property
    def grid(self) -> Array:
        """Permittivities over the range, even in their root."""
        inside = np.square(np.linspace(self.range.low**0.5, self.range.high**0.5, GRID))
        return np.clip(inside, self.range.low, self.range.high)

    @property
    def rise(self) -> tuple[float, float]:
        """Of the curve over the range, and its standard uncertainty, m3/m3."""
        ends = self.fit.basis(np.array([self.range.low, self.range.high]))
        across = ends[1] - ends[0]
        variance = self.scatter.factor * float(across @ self._of_pairs @ across)
        return float(across @ self.fit.reduced), float(np.sqrt(variance))

    @property
    def flat(self) -> bool:
        """Whether the pairs do not tell water content from permittivity."""
        rise, u = self.rise
        return not rise > RISES * u

    @property
    def left(self) -> Array:
        """Measured water content less the curve, shape (n,)."""
        return self.pairs.water_content - self.fit.value(self.pairs.permittivity)

    @property
    def residual_deviation(self) -> float:
        """Standard deviation of what the curve leaves, m3/m3."""
        return float(np.sqrt(np.sum(np.square(self.left)) / self.scatter.degrees_of_freedom))

    @property
    def soil_scatter(self) -> float:
        """Of water content about the curve, beyond stated uncertainties, m3/m3."""
        if not self.scatter.stated:
            return self.residual_deviation
        return float(np.sqrt(self.settled.variance))

    @property
    def reduced_chi_square(self) -> float:
        """Of the stated uncertainties alone, over the degrees of freedom."""
        return self.settled.chi_square / self.scatter.degrees_of_freedom

    @property
    def chi_square_probability(self) -> float:
        """Of a chi-square as large as that or larger, were stated uncertainties all there is."""
        return float(chdtrc(self.scatter.degrees_of_freedom, self.settled.chi_square))

    @property
    def standardised(self) -> Array:
        """Residuals over their own standard deviation, shape (n,)."""
        weights, design = self.fit.weights, self.fit.design
        leverage = weights * np.einsum("ni,ij,nj->n", design, self._of_pairs, design)
        spread = (1.0 - leverage) * self.scatter.factor
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.where(spread > 1e-12, self.fit.residuals * np.sqrt(weights / spread), np.nan)

    @property
    def typical_permittivity_u(self) -> float:
        """Root mean square of the pairs' own."""
        return float(np.sqrt(np.mean(np.square(self.pairs.permittivity_u))))

    def band(self, permittivity: Array, permittivity_u: Array, probability: float) -> Band:
        """Bands of the curve and of new readings.

        permittivity, permittivity_u: shape (m,), of the new readings.

        The mean band holds the curve. The prediction band adds the soil's own scatter, and the
        error of the reading. Where no uncertainty was stated the scatter holds the errors of the
        pairs, those of their permittivity included.
        """
        value = self.fit.value(permittivity)
        curve, shared = self._variances(permittivity)
        reading = np.square(self.fit.slope_at(permittivity) * permittivity_u)
        scatter, typical = self.scatter, _typical(self.fit)
        about = curve + typical
        fixed = shared + reading - (scatter.least * typical if scatter.stated else 0.0)
        return Band(
            value,
            np.sqrt(scatter.factor * curve + shared),
            scatter.half_width(curve, shared, probability),
            np.sqrt(np.maximum(scatter.factor * about + fixed, 0.0)),
            scatter.half_width(about, fixed, probability),
        )

    @property
    def _of_pairs(self) -> Array:
        """Covariance of the reduced coefficients from the pairs, factor 1."""
        return self.fit.reduced_covariance

    @property
    def _of_shared(self) -> Array:
        """The same from errors that all pairs share."""
        total = np.zeros_like(self._of_pairs)
        for source in self.pairs.shared:
            moved = self.fit.moved_by(source.water_content, source.permittivity)
            total += np.outer(moved, moved)
        return total

    def _variances(self, permittivity: Array) -> tuple[Array, Array]:
        """Of the curve: from the pairs, factor 1, and from what they share; shape (m,)."""
        basis = self.fit.basis(permittivity)
        of_pairs, of_shared = (
            np.maximum(np.einsum("mi,ij,mj->m", basis, part, basis), 0.0)
            for part in (self._of_pairs, self._of_shared)
        )
        return of_pairs, of_shared


def calibrate(pairs: Pairs, form: Form) -> Calibration:
    """The curve of that form through these pairs.

    Raises ParameterError where the pairs cannot tell it.
    """
    refuse(pairs)
    refuse_form(pairs, form)
    settled = settle(form, pairs)
    found = settled.fit
    if not (np.isfinite(found.coefficients).all() and bool(found.converged)):
        detail = (
            f"no {form.key} settles among these pairs: their uncertainties are too large for "
            "their range, or some of them are alike; give pairs further apart, or ask for a form "
            "with fewer coefficients"
        )
        raise ParameterError("form", [Complaint("form", detail, ("pairs",))])
    degrees, typical = pairs.count - form.size, _typical(found)
    least = (typical - settled.variance) / typical
    scatter = Scatter(float(found.chi_square), degrees, pairs.stated, least)
    return Calibration(pairs, settled, scatter, leave_out(form, pairs, settled.variance))


def _typical(found: Fit) -> float:
    """Variance of one residual: the harmonic mean."""
    return float(found.weights.shape[-1] / np.sum(found.weights))
