"""Error terms of a tip and, from four or more standards, the two coefficients of its aperture."""

from collections.abc import Callable, Sequence
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
    def degrees_of_freedom(self) -> int:
        """Real numbers read beyond those that were fitted."""
        n, f = self.true.shape
        usable = int(np.isfinite(self.fitted.residual).all(axis=0).sum())
        return 2 * usable * (n - 3) - len(self.covariance) if f else 0

    @property
    def chi_square(self) -> float:
        """Sum of squares of the weighted residuals."""
        return _sum(self.fitted.residual / self.spread)

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

    def residual(tip: Aperture) -> tuple[Fit, ComplexArray]:
        true = reflections(frequency, standards, tip)
        return fit(read, true, spread), true

    found, true = residual(aperture)
    none = np.zeros((*read.shape, 0), dtype=complex)
    plain = Calibration(
        frequency, tuple(standards), aperture, spread, true, found, none, np.zeros((0, 0))
    )
    if aperture.model != "fitted" or len(standards) < 4:
        return plain
    damping, cost = 1e-3, _sum(found.residual / spread)
    for _ in range(MOST):
        jacobian = _jacobian(residual, aperture, spread)
        normal = np.real(np.einsum("nfp,nfq->pq", np.conj(jacobian), jacobian))
        slope = np.real(np.einsum("nfp,nf->p", np.conj(jacobian), _known(found.residual / spread)))
        step = -np.linalg.lstsq(normal + damping * np.diag(np.diag(normal)), slope)[0]
        trial = aperture.moved(0, float(step[0])).moved(1, float(step[1]))
        there, true_there = residual(trial)
        new = _sum(there.residual / spread)
        if new <= cost:
            small = np.all(np.abs(step) <= 1e-10 * np.abs(trial.fitted) + 1e-15)
            aperture, found, true, damping = trial, there, true_there, damping * 0.1
            done, cost = bool(small or cost - new <= 1e-13 * cost), new
        else:
            done, damping = damping > 1e6, damping * 30
        if done:
            break
    jacobian = _jacobian(residual, aperture, spread)
    normal = np.real(np.einsum("nfp,nfq->pq", np.conj(jacobian), jacobian))
    return replace(
        plain, aperture=aperture, fitted=found, true=true, jacobian=jacobian,
        covariance=np.linalg.pinv(normal, hermitian=True),
    )  # fmt: skip


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


def moved(calibration: Calibration, place: int, step: float) -> Calibration:
    """The calibration with one coefficient moved, everything else following."""
    aperture = calibration.aperture.moved(place, step)
    true = reflections(calibration.frequency, calibration.standards, aperture)
    read = np.stack([standard.read for standard in calibration.standards])
    found = fit(read, true, calibration.spread)
    return replace(calibration, aperture=aperture, true=true, fitted=found)


def _jacobian(
    residual: Callable[[Aperture], tuple[Fit, ComplexArray]], aperture: Aperture, spread: Array
) -> ComplexArray:
    columns = []
    for place, step in enumerate(STEPS):
        ends = [residual(aperture.moved(place, sign * step))[0].residual for sign in (1, -1)]
        columns.append(_known((ends[0] - ends[1]) / (2 * step * spread)))
    return np.stack(columns, axis=-1)


def _known(values: ComplexArray) -> ComplexArray:
    """Zero where there is no number."""
    return np.where(np.isfinite(values), values, 0.0)


def _sum(weighted: ComplexArray) -> float:
    return float(np.square(np.abs(_known(weighted))).sum())
