"""Permittivity before a calibrated tip, and how it answers to everything that was read."""

from dataclasses import dataclass

import numpy as np

from models.reflection.tip.calibration import STEPS, Calibration, as_readings, scale
from models.relation import Array, ComplexArray


@dataclass(frozen=True, slots=True)
class Response:
    """Permittivity of m samples and its first-order answers to what was read; f frequencies."""

    permittivity: ComplexArray
    """Shape (m, f)."""
    reflection: ComplexArray
    """At the aperture, shape (m, f)."""
    by_sample: ComplexArray
    """Derivative by the sample's own reflection as read, shape (m, f)."""
    by_standard: ComplexArray
    """Derivative by those of the standards, coefficients held, shape (m, f, n)."""
    by_coefficient: ComplexArray
    """Derivative by the fitted coefficients, shape (m, f, p)."""


@np.errstate(all="ignore")
def invert(calibration: Calibration, read: ComplexArray) -> Response:
    """Permittivity of samples from reflections as read, shape (m, f).

    Everything between a reflection and a permittivity is analytic, so that one complex number
    holds a derivative; the coefficients of the aperture are real and enter by differences.
    """
    frequency, aperture = calibration.frequency, calibration.aperture
    terms, unit = calibration.fitted.terms, scale(frequency, aperture)
    true = terms.corrected(read)
    eps = aperture.permittivity((1 - true) / ((1 + true) * unit), frequency)
    _, slope = aperture.admittance(eps, frequency)
    by_true = -2 / (np.square(1 + true) * unit * slope)
    by_sample = by_true / terms.slope(true)
    by_standard = -np.einsum(
        "mf,mft,ftn->mfn", by_sample, terms.gradient(true), calibration.fitted.response
    )
    by_coefficient = np.zeros((*read.shape, 0), dtype=complex)
    if len(calibration.covariance):
        own = aperture.by_coefficient(eps, frequency, STEPS) / slope[:, :, None]
        off = as_readings(calibration)
        by_coefficient = np.einsum("mfn,nfp->mfp", by_standard, off) - own
    return Response(eps, true, by_sample, by_standard, by_coefficient)


@dataclass(frozen=True, slots=True)
class Variance:
    """Of real part and loss, shape (m, f) each."""

    real: Array
    loss: Array

    def __add__(self, other: "Variance") -> "Variance":
        return Variance(self.real + other.real, self.loss + other.loss)


@np.errstate(all="ignore")
def of_noise(calibration: Calibration, answer: Response, sample_spread: Array) -> Variance:
    """What the noise of the sample and of the standards leaves open.

    sample_spread: standard uncertainty of each part of the sample's reflection, shape (m, f).

    A standard's noise acts through the error terms at its own frequency and, a little, through
    the fitted coefficients at every frequency; both ways are added before squaring. Residuals
    that are alike from frequency to frequency are no noise: they do not average out.
    """
    own = np.square(np.abs(answer.by_sample) * sample_spread)
    total = Variance(own, own)
    inverse, jacobian = calibration.covariance, calibration.jacobian
    through = answer.by_coefficient
    pull = -np.einsum("pq,nfq->nfp", inverse, np.stack([jacobian], 0)[0])
    spread = calibration.spread.T
    direct = answer.by_standard
    for part in (np.real, np.imag):
        to_coefficient = part(pull).swapaxes(0, 1)  # of real noise, then of imaginary noise
        shared = np.einsum("mfp,fnp->mfn", through, to_coefficient)
        turned = direct if part is np.real else 1j * direct
        moved_by = turned * spread + shared
        total += Variance(
            np.square(moved_by.real).sum(axis=-1) - np.square(shared.real).sum(axis=-1),
            np.square(moved_by.imag).sum(axis=-1) - np.square(shared.imag).sum(axis=-1),
        )
    coefficients = inverse * calibration.kinship
    return total + Variance(_form(through.real, coefficients), _form(through.imag, coefficients))


def _form(rows: Array, matrix: Array) -> Array:
    return np.einsum("mfp,pq,mfq->mf", rows, matrix, rows)


@np.errstate(all="ignore")
def of_standards(calibration: Calibration, answer: Response) -> Variance:
    """What is not known of the standards' permittivity: common to all sweeps of a calibration.

    A standard that is not what it is taken for acts like a reading that is off by as much.
    """
    shape = answer.permittivity.shape
    total = Variance(np.zeros(shape), np.zeros(shape))
    frequency, aperture = calibration.frequency, calibration.aperture
    unit, terms = scale(frequency, aperture), calibration.fitted.terms
    for place, standard in enumerate(calibration.standards):
        if standard.known is None:
            continue
        relative, slope = aperture.admittance(standard.known.permittivity, frequency)
        true = calibration.true[place]
        off = -terms.slope(true) * -2 * unit * slope / np.square(1 + relative * unit)
        weighted = np.conj(calibration.jacobian[place]) / calibration.spread[place][:, None]
        for variation in standard.known.variations:
            reading = off * variation
            usable = np.where(np.isfinite(reading), reading, 0.0)
            pull = -calibration.covariance @ np.real(np.einsum("fp,f->p", weighted, usable))
            change = answer.by_standard[:, :, place] * reading + answer.by_coefficient @ pull
            total += Variance(np.square(change.real), np.square(change.imag))
    return total
