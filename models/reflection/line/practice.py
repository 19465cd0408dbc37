"""Good practice with a filled line or cell."""

from collections.abc import Iterator, Mapping
from dataclasses import replace
from typing import Protocol

import numpy as np
from scipy.constants import speed_of_light

from models.errors import Complaint, ParameterError
from models.flags import Flags
from models.reflection.plausible import WATER
from models.reflection.propagation import attenuation_length, propagation_constant
from models.reflection.sweep_flags import MARGIN, Finding, at_least, at_most, raised
from models.relation import Array, ComplexArray

ABOVE_ONE = 0.02
GRAINS = 50.0
ENDLESS = 2.3
"""Attenuation lengths after which a hundredth comes back from the end."""
SHORT = 0.01
MAGNETIC = 0.05
CAPACITIVE = 0.05
SHORT_REAL = -0.9
"""Real part of a reflection below which a low-frequency end is a short."""
SAME = 1e-9
"""Difference of two reflections that is none."""


class Described(Protocol):
    """What practice asks of a query; lengths in m."""

    @property
    def frequency(self) -> Array:
        """Hz, shape (f,)."""

    @property
    def length(self) -> float | None:
        """Of the filling."""

    @property
    def ends(self) -> tuple[str, ...]:
        """What ended the cell; none for an endless line."""

    @property
    def grain_size(self) -> float | None:
        """Of the largest grain."""

    @property
    def gap_width(self) -> float | None:
        """Between the conductors."""


@np.errstate(all="ignore")
def flag(reflection: ComplexArray, spread: Array, flags: Flags) -> None:
    """Mark, in place, where more comes back than went in."""
    excess = np.abs(reflection) - 1
    above = (excess > MARGIN * spread) & (excess > ABOVE_ONE)
    for row in above:
        raised(flags[0], row, "reflection-above-one")


def short_finding(
    frequency: Array, length: float, reflection: ComplexArray, spread: Array, flags: Flags
) -> Finding:
    """Whether a shorted cell is one; where not, every point is marked.

    reflection: of the shorted cell at the face of the sample, shape (f,). length: m.

    Its impedance tanh(x) / sqrt(eps) is that of a small inductance, lossy or not, while |x| is
    small: neither the real part of its reflection is above 0 nor the imaginary one below.
    """
    sixth = frequency * length * np.sqrt(WATER) / speed_of_light < 1 / 6
    unlike = np.maximum(reflection.real, -reflection.imag)[sixth]
    worst = np.median(unlike) if unlike.size else np.nan
    limit = max(CAPACITIVE, MARGIN * float(np.median(spread)))
    about = "real or capacitive part of the shorted cell's reflection, median of its low end"
    found = at_most("not-shorted", about, worst, limit)
    if not found.holds:
        raised(flags[0], np.ones(flags.shape[1], dtype=bool), found.key)
    return found


def refuse_shorted(query: Described, reflection: ComplexArray) -> None:
    """Refuse a cell read open alone that reflects as a short does, inductive and near -1.

    reflection: by what ended the cell, at the face of the sample, for exp(+j w t), shape (k, f).
    Raises ParameterError with the numbers.

    An open end behind a short stretch is a capacitance; what conducts enough to look like a short
    would hold 1 S/m and more.
    """
    if query.ends != ("open",) or query.length is None:
        return
    low = query.frequency * query.length * np.sqrt(WATER) / speed_of_light < 1 / 6
    if not low.any():
        return
    opened = reflection[0, low]
    real, inductive = float(np.median(opened.real)), float(np.median(opened.imag))
    if real < SHORT_REAL and inductive > CAPACITIVE:
        detail = (
            f"the open cell reflects {real:+.3f}{inductive:+.3f}j in the median of its low end: "
            "expected a capacitive reflection towards +1; this is a shorted end, send it as short"
        )
        raise ParameterError("sample", [Complaint("open", detail, ("sample", "open"))])


def refuse_alike(reads: Mapping[str, ComplexArray]) -> None:
    """Refuse one reading for both ends: short and open never reflect alike all along.

    reads: by what ended the cell, shape (f,). Raises ParameterError that names both.
    """
    if len(reads) < 2:
        return
    (one, first), (other, second) = reads.items()
    apart = float(np.nanmedian(np.abs(first - second)))
    if apart <= SAME:
        detail = (
            f"the {other} cell was read exactly like the {one} one: found a median difference of "
            f"{apart:.2g}, expected more than {SAME:g}; one sweep was probably sent for both"
        )
        raise ParameterError("sample", [Complaint(other, detail, ("sample", other))])


def findings_of(
    query: Described, eps: ComplexArray, reflection: ComplexArray
) -> tuple[Finding, ...]:
    """Every check, kept or not, with its number and limit."""
    return (_of_reflection(query.frequency, reflection), *_of_sample(query, eps))


def magnetic_finding(mu: ComplexArray, residual: Array, flags: Flags, *, known: bool) -> Finding:
    """Whether both ends of a cell agree on a permeability of 1; where not, every point is marked.

    residual: of the fit with a permeability of 1, over its spread; it counts where noise is known.
    """
    usable = mu[np.isfinite(mu)]
    middle = complex(np.median(usable.real), np.median(usable.imag)) if usable.size else 1.0
    about = "median departure of permeability from 1, from both ends"
    found = at_most("magnetic", about, abs(middle - 1), MAGNETIC)
    fits = known and float(np.median(residual)) < MARGIN
    found = replace(found, holds=True) if fits else found
    if not found.holds:
        raised(flags[0], np.ones(flags.shape[1], dtype=bool), found.key)
    return found


def _of_reflection(frequency: Array, reflection: ComplexArray) -> Finding:
    with np.errstate(all="ignore"):
        size = np.abs(reflection).max(axis=0)
    about = "largest reflection at the sample"
    return at_most("reflection-above-one", about, size, 1 + ABOVE_ONE, frequency)


def _of_sample(query: Described, eps: ComplexArray) -> Iterator[Finding]:
    f = query.frequency
    if query.length is not None and query.ends:
        turns = np.abs(propagation_constant(eps, f).imag) * query.length / (2 * np.pi)
        about = "length of the cell in wavelengths, smallest"
        yield at_least("electrically-short", about, turns, SHORT, f)
    elif query.length is not None:
        thick = query.length / attenuation_length(eps, f)
        about = "length of the filling in attenuation lengths, smallest"
        yield at_least("sample-thickness", about, thick, ENDLESS, f)
    if query.grain_size is not None and query.gap_width is not None:
        about = "gap between the conductors over the largest grain"
        yield at_least("grain-size", about, query.gap_width / query.grain_size, GRAINS)
