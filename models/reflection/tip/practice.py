"""Good practice with a tip: what the sweeps and the sample's description say about it."""

from collections.abc import Iterator, Sequence

import numpy as np

from models.flags import Flags
from models.reflection.propagation import attenuation_length
from models.reflection.sweep_flags import MARGIN, Finding, between, raised
from models.reflection.tip.aperture import Geometry
from models.reflection.tip.calibration import Calibration
from models.reflection.tip.inversion import Response
from models.reflection.tip.layers import backing_error, gap_error, sensing_depth
from models.reflection.tip.misfit import Misfit
from models.reflection.tip.sample import Sample
from models.relation import Array, ComplexArray

READING_ERROR, CLOSE = 1e-3, 0.05
"""A reflection's error, and the relative change it may make through the standards."""
ABOVE_ONE = 0.02
GRAINS = 50.0
ERROR = 0.01
USUAL_GAP = 10e-6  # m, under a tip that is set on a solid with care


def flag(calibration: Calibration, answer: Response, spread: Array, flags: Flags) -> None:
    """Mark, in place, the frequencies at which a reading or the standards are doubtful."""
    with np.errstate(all="ignore"):
        noise = spread / np.abs(calibration.fitted.terms.slope(answer.reflection))
        excess = np.abs(answer.reflection) - 1
        raised(flags, (excess > MARGIN * noise) & (excess > ABOVE_ONE), "reflection-above-one")
        raised(flags, _closeness(answer) > CLOSE, "standards-too-close")


def findings_of(
    calibration: Calibration,
    answer: Response,
    samples: Sequence[Sample],
    misfit: Misfit,
    geometry: Geometry | None,
) -> tuple[tuple[Finding, ...], ...]:
    """Every check of every sample, kept or not, with its number and limit."""
    closeness = _closeness(answer)
    return tuple(
        (
            *_of_misfit(misfit),
            _of_closeness(calibration.frequency, closeness[place]),
            *_of_sample(calibration.frequency, answer.permittivity[place], sample, geometry),
        )
        for place, sample in enumerate(samples)
    )


@np.errstate(all="ignore")
def _closeness(answer: Response) -> Array:
    """Relative change of permittivity by an error of READING_ERROR in every standard."""
    through = np.sqrt(np.square(np.abs(answer.by_standard)).sum(axis=-1))
    return READING_ERROR * through / np.abs(answer.permittivity)


def _of_misfit(misfit: Misfit) -> Iterator[Finding]:
    if np.isnan(misfit.value):
        return
    about = (
        "reduced chi-square of the standards beyond three"
        if misfit.stated
        else "residual reflection of the standards beyond three, root mean square of each part"
    )
    holds = misfit.value <= misfit.limit
    yield Finding("standards-inconsistent", holds=holds, value=misfit.value, limit=misfit.limit, unit="1", about= about)


def _of_closeness(frequency: Array, closeness: Array) -> Finding:
    bad = closeness > CLOSE
    worst = float(np.nanmax(closeness)) if np.isfinite(closeness).any() else float("nan")
    about = f"largest relative change of permittivity by {READING_ERROR:g} in the standards"
    return Finding("standards-too-close", holds=not bad.any(), value=worst, limit=CLOSE, unit="1", about= about,
                   between(frequency, bad))  # fmt: skip


def _of_sample(
    frequency: Array, eps: ComplexArray, sample: Sample, geometry: Geometry | None
) -> Iterator[Finding]:
    usable = eps[np.isfinite(eps)]
    if geometry is None or not usable.size:
        return
    middle = complex(np.median(usable.real) - 1j * np.median(-usable.imag))
    if sample.grain_size is not None:
        ratio = geometry.width / sample.grain_size
        yield Finding("grain-size", holds=ratio >= GRAINS, value=ratio, limit=GRAINS, unit="1", about=
                      "width of the aperture over the largest grain")  # fmt: skip
    if sample.thickness is not None:
        yield from _of_thickness(frequency, eps, middle, sample.thickness, geometry)
    gap = USUAL_GAP if sample.gap is None else sample.gap
    if gap > 0:
        change = float(np.abs(gap_error(geometry, middle, gap))[0])
        yield Finding("air-gap", holds=change <= ERROR, value=change, limit=ERROR, unit="1", about=
                      f"relative change of eps' by an air gap of {1e6 * gap:.3g} um")  # fmt: skip


def _of_thickness(
    frequency: Array, eps: ComplexArray, middle: complex, thickness: float, geometry: Geometry
) -> Iterator[Finding]:
    depth = sensing_depth(geometry, ERROR)
    yield Finding("sample-thickness", holds=thickness >= depth, value=thickness, limit=depth, unit="m", about=
                  "thickness beside that from which its back changes eps' by less than 1 %")  # fmt: skip
    error = backing_error(geometry, middle.real, thickness)
    yield Finding("sample-thickness", holds=error <= ERROR, value=error, limit=ERROR, unit="1", about=
                  "relative change of eps' by metal or air behind the sample")  # fmt: skip
    length = float(np.nanmin(attenuation_length(eps, frequency)))
    yield Finding("sample-thickness", holds=True, value=thickness / length, limit=float("inf"), unit="1", about=
                  "thickness in the shortest attenuation length of the band")  # fmt: skip
