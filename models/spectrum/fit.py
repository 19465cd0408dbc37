"""Weighted complex least squares: one form fitted to one spectrum, with its covariance.

Both parts are fitted together, with analytic derivatives, from several starts. Covariance is that
of the linearised problem: as it stands where the noise is stated, else scaled by the residuals.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from models.errors import Complaint, ParameterError
from models.numerics.complex_fit import complex_least_squares, covariance
from models.relation import Array, ComplexArray
from models.spectrum.form import Form, evaluate
from models.spectrum.spectrum import Spectrum
from models.spectrum.starts import starts
from models.spectrum.weights import FLOOR, stated_noise, unit_noise

STARTS = 3
ROUGH, FINE = 1e-6, 1e-14
"""Relative change at which a fit ends: before the best start is known, and after."""
AT_BOUND = 1e-6
"""Share of a bound's distance within which a parameter lies at it."""


@dataclass(frozen=True)
class Fit:
    """A form, fitted: best vector, covariance, and how well it describes the spectrum."""

    form: Form
    spectrum: Spectrum
    vector: Array
    permittivity: ComplexArray
    """Of the form at the frequencies of the spectrum, eps' - j eps''."""
    derivatives: ComplexArray
    """Of it by the vector, shape (n, parameters)."""
    noise: Array
    """Standard uncertainties of both parts, shape (2, n); of size 1 where none was stated."""
    noise_shape: str | None
    """None: stated."""

    @cached_property
    def residuals(self) -> Array:
        """Measured minus fitted, over the noise; shape (2, n)."""
        difference = self.spectrum.permittivity - self.permittivity
        return np.array([difference.real, difference.imag]) / self.noise

    @property
    def chi_square(self) -> float:
        """Sum of the squared residuals."""
        return float(np.sum(np.square(self.residuals)))

    @property
    def count(self) -> int:
        """Numbers that were fitted: two a point."""
        return 2 * len(self.spectrum.frequency)

    @property
    def degrees_of_freedom(self) -> int:
        """Numbers less parameters."""
        return self.count - len(self.vector)

    @property
    def reduced_chi_square(self) -> float:
        """1 where the noise was stated rightly and the form suits; the squared noise else."""
        return self.chi_square / self.degrees_of_freedom

    @property
    def variance_factor(self) -> float:
        """What the covariance of the unit noise is multiplied by."""
        if self.noise_shape is None:
            return max(1.0, self.reduced_chi_square) if self.misfit else 1.0
        return self.reduced_chi_square

    @property
    def misfit(self) -> bool:
        """The residuals are larger than the stated noise, by four standard deviations."""
        excess = self.reduced_chi_square - 1.0
        return self.noise_shape is None and excess > 4 * np.sqrt(2 / self.degrees_of_freedom)

    @property
    def relative_residual(self) -> float:
        """Root mean square of measured minus fitted, over |eps|."""
        off = np.abs(self.spectrum.permittivity - self.permittivity) / np.abs(self.permittivity)
        return float(np.sqrt(np.mean(np.square(off))))

    @property
    def aicc(self) -> float:
        """Akaike's criterion with the correction for few points (Hurvich and Tsai, 1989)."""
        n, k = self.count, len(self.vector)
        if self.noise_shape is None:
            surprise = self.chi_square
        else:
            k += 1
            surprise = n * np.log(self.chi_square / n + FLOOR**2)
        room = max(n - k - 1, 1e-9)
        return float(surprise + 2 * k + 2 * k * (k + 1) / room)

    @cached_property
    def held(self) -> NDArray[np.bool_]:
        """Parameters that ended at an end of their range."""
        low, high = bounds_of(self.form, self.spectrum)
        reach = AT_BOUND * np.maximum(1.0, np.abs(self.vector))
        return (self.vector - low < reach) | (high - self.vector < reach)

    @cached_property
    def covariance(self) -> Array:
        """Of the vector; 0 for times and sizes that ran to the end of their range.

        A shape, a conductivity or an infinite permittivity at its physical end is still uncertain
        to one side, and what it is correlated with is uncertain with it: those stay in.
        """
        endless = np.array([slot.logarithmic for slot in self.form.slots])
        free = np.flatnonzero(~(self.held & endless))
        return covariance(self.derivatives, self.noise, free) * self.variance_factor


def fit(form: Form, spectrum: Spectrum, noise_shape: str | None, effort: int = STARTS) -> Fit:
    """The form that comes nearest to the spectrum.

    noise_shape: one of ``weights.NOISES``; None where the spectrum states its noise.
    effort: how many starts are followed.
    Raises ParameterError when the points are too few for the parameters.
    """
    refuse_too_few(form, spectrum)
    eps, f = spectrum.permittivity, spectrum.frequency
    stated = stated_noise(spectrum)
    noise = unit_noise(noise_shape or "", eps) if stated is None else stated
    tried = [
        _from(form, spectrum, noise, start, ROUGH) for start in starts(form, f, eps, noise, effort)
    ]
    best = min(tried, key=lambda pair: pair[1])[0]
    if stated is None:  # the noise of a part belongs to its true size, not to its noisy one
        noise = unit_noise(noise_shape or "", evaluate(form, best, f)[0])
    best = _sorted(form, _from(form, spectrum, noise, best, FINE)[0])
    value, derivatives = evaluate(form, best, f)
    return Fit(form, spectrum, best, value, derivatives, noise, noise_shape)


def bounds_of(form: Form, spectrum: Spectrum) -> tuple[Array, Array]:
    """Where the parameters of a form may lie, given the band of a spectrum."""
    return form.bounds(float(spectrum.frequency.min()), float(spectrum.frequency.max()))


def refuse_too_few(form: Form, spectrum: Spectrum) -> None:
    """Raises ParameterError when a form has more parameters than a spectrum has numbers."""
    count, needed = len(spectrum.frequency), len(form.slots) // 2 + 1
    if count < needed:
        detail = (
            f"{form.title} has {len(form.slots)} parameters and needs at least {needed} "
            f"frequencies, found {count}: send more, or ask for fewer terms"
        )
        raise ParameterError("model", [Complaint("terms", detail, ("model", "terms"))])


def _from(
    form: Form, spectrum: Spectrum, noise: Array, start: Array, tolerance: float
) -> tuple[Array, float]:
    return complex_least_squares(
        lambda vector: evaluate(form, vector, spectrum.frequency),
        start, bounds_of(form, spectrum), spectrum.permittivity, noise, tolerance,
    )  # fmt: skip


def _sorted(form: Form, vector: Array) -> Array:
    """Like terms with the slowest first."""
    blocks = {
        k: [i for i, slot in enumerate(form.slots) if slot.term == k]
        for k in range(len(form.terms))
    }
    arranged = vector.copy()
    for kind in set(form.terms):
        alike = [k for k, other in enumerate(form.terms) if other == kind]
        slowest = sorted(alike, key=lambda k: -vector[form.place("relaxation_time", k)])
        for to, source in zip(alike, slowest, strict=True):
            arranged[blocks[to]] = vector[blocks[source]]
    return arranged
