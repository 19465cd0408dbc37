"""Error terms of a tip and, from four or more standards, the two coefficients of its aperture."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from models.reflection.error_terms import Fit, fit
from models.reflection.tip.aperture import Aperture
from models.reflection.tip.media import Known
from models.relation import Array, ComplexArray

IMPEDANCE = 50.0  # ohm
CAPACITANCE = 0.02e-12
"""F, where no radii are given: it cancels, unless one of the standards is a load."""
STEPS = np.array((1e-6, 1e-8))
"""Of the coefficients h and g at 1 GHz: a hundredth of those of a 3.6 mm line."""
MOST = 30
PASSIVE = 1.0
"""Of directivity and source match: what a passive port cannot exceed."""
CHANCE = 2.0
"""Standard deviations of the likeness of neighbours that noise makes."""


@dataclass(frozen=True, slots=True)
class Standard:
    """What was before the tip, and what was read; shape (f,)."""

    name: str
    read: ComplexArray
    known: Known | None = None
    """Its permittivity; None: a short or a load."""
    reflection: float = -1.0
    """At the aperture, of a short (-1) or a load (0)."""


@dataclass(frozen=True, slots=True)
class Calibration:
    """A tip that was calibrated; n standards, f frequencies, p fitted coefficients."""

    frequency: Array
    standards: tuple[Standard, ...]
    aperture: Aperture
    spread: Array
    """Standard uncertainty of each part of what was read, shape (n, f); relative if not known."""
    true: ComplexArray
    """Reflections at the aperture, shape (n, f)."""
    fitted: Fit
    jacobian: ComplexArray
    """Of the weighted residuals by the coefficients, shape (n, f, p)."""
    covariance: Array
    """Of the coefficients, shape (p, p), for the spread as it stands."""

    @property
    def fitted_u(self) -> Array:
        """Standard uncertainties of the coefficients, shape (p,)."""
        return np.sqrt(np.diagonal(self.covariance))

    @property
    def kinship(self) -> float:
        """How many frequencies err as one: 1 for noise, up to all of them for a wrong standard.

        From the likeness of neighbouring residuals at the aperture, less what chance makes.
        """
        with np.errstate(all="ignore"):
            left = _known(self.fitted.residual / self.fitted.terms.slope(self.true))
        points = left.shape[1]
        total = float(np.square(np.abs(left)).sum())
        if points < 3 or self.degrees_of_freedom <= 0 or total == 0:
            return 1.0
        product = float(np.real(np.conj(left[:, :-1]) * left[:, 1:]).sum())
        likeness = min(max(product / total - CHANCE / np.sqrt(points), 0.0), 1 - 1 / points)
        return (1 + likeness) / (1 - likeness)

    @property
    def degrees_of_freedom(self) -> int:
        """Real numbers read beyond those that were fitted."""
        n, f = self.true.shape
        usable = int(np.isfinite(self.fitted.residual).all(axis=0).sum())
        return 2 * usable * (n - 3) - len(self.covariance) if f else 0

    @property
    def chi_square(self) -> float:
        """Sum of squares of the weighted residuals."""
        return _sum(self.fitted.residual / self.spread)

    @property
    def port(self) -> float:
        """Larger of directivity and source match in the median over frequency; NaN: no number."""
        terms = self.fitted.terms
        size = np.maximum(np.abs(terms.directivity), np.abs(terms.source_match))
        usable = size[np.isfinite(size)]
        return float(np.median(usable)) if usable.size else float("nan")

    @property
    def passive(self) -> bool:
        """Whether the port can be one that only loses power."""
        return not self.port > PASSIVE

    def scaled(self, factor: float) -> "Calibration":
        """The same with all spreads times ``factor``."""
        return replace(
            self,
            spread=self.spread * factor,
            jacobian=self.jacobian / factor,
            covariance=self.covariance * factor**2,
        )


def calibrate(
    frequency: Array, standards: Sequence[Standard], aperture: Aperture, spread: Array
) -> Calibration:
    """Error terms from standards as read, the aperture being known or fitted.

    frequency: shape (f,), Hz. spread: shape (n, f), see Calibration.

    The error terms are free at every frequency; h and g are one pair for all of them, found by
    Gauss-Newton steps on what the error terms leave (variable projection).
    """
    read = np.stack([standard.read for standard in standards])

    def solved(tip: Aperture) -> Calibration:
        true = reflections(frequency, standards, tip)
        none = np.zeros((*read.shape, 0), dtype=complex)
        found = fit(read, true, spread)
        return Calibration(
            frequency, tuple(standards), tip, spread, true, found, none, np.zeros((0, 0))
        )

    if aperture.model != "fitted" or len(standards) < 4:
        return solved(aperture)
    here = min((solved(start) for start in aperture.starts()), key=lambda c: c.chi_square)
    damping = 1e-3
    for _ in range(MOST):
        jacobian = _jacobian(here)
        normal = np.real(np.einsum("nfp,nfq->pq", np.conj(jacobian), jacobian))
        left = _known(here.fitted.residual / spread)
        slope = np.real(np.einsum("nfp,nf->p", np.conj(jacobian), left))
        step = -np.linalg.lstsq(normal + damping * np.diag(np.diag(normal)), slope)[0]
        there = solved(here.aperture.moved(0, float(step[0])).moved(1, float(step[1])))
        if there.chi_square <= here.chi_square:
            small = np.all(np.abs(step) <= 1e-10 * np.abs(there.aperture.fitted) + 1e-15)
            gain = here.chi_square - there.chi_square
            done = bool(small or gain <= 1e-12 * here.chi_square)
            here, damping = there, damping * 0.1
        else:
            done, damping = damping > 1e6, damping * 30
        if done:
            break
    jacobian = _jacobian(here)
    normal = np.real(np.einsum("nfp,nfq->pq", np.conj(jacobian), jacobian))
    return replace(here, jacobian=jacobian, covariance=np.linalg.pinv(normal, hermitian=True))


def scale(frequency: Array, aperture: Aperture) -> ComplexArray:
    """The product j w C0 Z0, which turns a relative admittance into one in units of 1/Z0."""
    capacitance = CAPACITANCE if aperture.geometry is None else aperture.geometry.capacitance
    return np.asarray(2j * np.pi * frequency * capacitance * IMPEDANCE, dtype=complex)


@np.errstate(all="ignore")
def reflections(
    frequency: Array, standards: Sequence[Standard], aperture: Aperture
) -> ComplexArray:
    """Reflection of every standard at the aperture, shape (n, f)."""
    unit = scale(frequency, aperture)
    rows = np.empty((len(standards), frequency.size), dtype=complex)
    for row, standard in zip(rows, standards, strict=True):
        if standard.known is None:
            row[:] = standard.reflection
            continue
        relative, _ = aperture.admittance(standard.known.permittivity, frequency)
        row[:] = (1 - relative * unit) / (1 + relative * unit)
    return rows


@np.errstate(all="ignore")
def as_readings(calibration: Calibration) -> ComplexArray:
    """By how much readings would be off if the coefficients were: shape (n, f, p).

    A standard that is not what it is taken for acts like a reading that is off by as much.
    """
    frequency, aperture = calibration.frequency, calibration.aperture
    unit, terms = scale(frequency, aperture), calibration.fitted.terms
    rows = np.zeros((*calibration.true.shape, len(STEPS)), dtype=complex)
    for place, standard in enumerate(calibration.standards):
        if standard.known is not None:
            eps = standard.known.permittivity
            relative, _ = aperture.admittance(eps, frequency)
            turn = 2 * unit / np.square(1 + relative * unit)
            off = terms.slope(calibration.true[place]) * turn
            rows[place] = off[:, None] * aperture.by_coefficient(eps, frequency, STEPS)
    return rows


@np.errstate(all="ignore")
def _jacobian(calibration: Calibration) -> ComplexArray:
    """Of the weighted residuals by the coefficients, error terms following; shape (n, f, p)."""
    off = as_readings(calibration)
    rows = calibration.fitted.terms.gradient(calibration.true)
    followed = np.einsum("nft,ftm,mfp->nfp", rows, calibration.fitted.response, off)
    return _known((off - followed) / calibration.spread[:, :, None])


def _known(values: ComplexArray) -> ComplexArray:
    """Zero where there is no number."""
    return np.where(np.isfinite(values), values, 0.0)


def _sum(weighted: ComplexArray) -> float:
    return float(np.square(np.abs(_known(weighted))).sum())
