"""Air between a sample and the conductors of a coaxial line: two capacitances in series."""

from dataclasses import dataclass

import numpy as np

from models.errors import Complaint, ParameterError
from models.relation import ComplexArray


@dataclass(frozen=True, slots=True)
class CoaxialGap:
    """Diameters, m: inner conductor, hole and outside of the sample, inside of the outer one."""

    inner_conductor: float
    sample_inner: float
    sample_outer: float
    outer_conductor: float

    def __post_init__(self) -> None:
        if (
            not 0
            < self.inner_conductor
            <= self.sample_inner
            < self.sample_outer
            <= (self.outer_conductor)
        ):
            detail = (
                "diameters must grow from inner_conductor over sample_inner and sample_outer to "
                "outer_conductor"
            )
            raise ParameterError("line", [Complaint("gap", detail, ("line", "gap"))])

    @property
    def logarithms(self) -> tuple[float, float, float]:
        """Of the ratios of diameters: of both gaps, of the sample, of the whole."""
        gaps = np.log(self.sample_inner / self.inner_conductor) + np.log(
            self.outer_conductor / self.sample_outer
        )
        sample = np.log(self.sample_outer / self.sample_inner)
        return (
            float(gaps),
            float(sample),
            float(np.log(self.outer_conductor / self.inner_conductor)),
        )

    @np.errstate(all="ignore")
    def closed(self, read: ComplexArray) -> ComplexArray:
        """Permittivity of the sample from that of sample and gaps together, elementwise."""
        gaps, sample, whole = self.logarithms
        return np.asarray(read * sample / (whole - read * gaps))

    @np.errstate(all="ignore")
    def slope(self, read: ComplexArray) -> ComplexArray:
        """Derivative of ``closed``, elementwise."""
        gaps, sample, whole = self.logarithms
        return np.asarray(sample * whole / np.square(whole - read * gaps))

    @np.errstate(all="ignore")
    def read(self, permittivity: ComplexArray) -> ComplexArray:
        """Permittivity that sample and gaps have together: the inverse of ``closed``."""
        gaps, sample, whole = self.logarithms
        return np.asarray(permittivity * whole / (sample + permittivity * gaps))
