"""Good practice with a tip: what the sweeps and the sample's description say about it."""

from collections.abc import Iterator, Sequence

import numpy as np

from models.flags import Flags
from models.reflection.propagation import attenuation_length
from models.reflection.sweep_flags import MARGIN, Finding, at_least, at_most, raised
from models.reflection.tip.aperture import Geometry
from models.reflection.tip.calibration import PASSIVE, Calibration
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


def flag(
    calibration: Calibration, answer: Response, spread: Array, misfit: Misfit, flags: Flags
) -> None:
    """Mark, in place, the frequencies at which a reading or the standards are doubtful."""
    with np.errstate(all="ignore"):
        noise = spread / np.abs(calibration.fitted.terms.slope(answer.reflection))
        excess = np.abs(answer.reflection) - 1
        raised(flags, (excess > MARGIN * noise) & (excess > ABOVE_ONE), "reflection-above-one")
        raised(flags, _closeness(answer) > CLOSE, "standards-too-close")
    if not calibration.passive:
        raised(flags, np.ones(flags.shape, dtype=bool), "port-not-passive")
    if not misfit.consistent:
        raised(flags, np.ones(flags.shape, dtype=bool), "standards-inconsistent")
    for standard in calibration.standards:
        if standard.known is not None and standard.known.outside is not None:
            raised(flags, np.broadcast_to(standard.known.outside, flags.shape),
                   "outside-standard-range")  # fmt: skip


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
            at_most(
                "port-not-passive",
                "larger of directivity and source match, median over frequency",
                calibration.port,
                PASSIVE,
            ),
            _of_reflection(calibration.frequency, answer.reflection[place]),
            _of_closeness(calibration.frequency, closeness[place]),
            *_of_sample(calibration.frequency, answer.permittivity[place], sample, geometry),
        )
        for place, sample in enumerate(samples)
    )


@np.errstate(all="ignore")
def _closeness(answer: Response) -> Array:
    """Relative change of permittivity by an error of READING_ERROR in every standard.

    Without bounds where two standards are one and there is no number to change.
    """
    through = np.sqrt(np.square(np.abs(answer.by_standard)).sum(axis=-1))
    closeness = READING_ERROR * through / np.abs(answer.permittivity)
    return np.where(np.isnan(closeness), np.inf, closeness)


def _of_reflection(frequency: Array, reflection: ComplexArray) -> Finding:
    about = "largest reflection of the sample at the aperture"
    return at_most("reflection-above-one", about, np.abs(reflection), 1 + ABOVE_ONE, frequency)


def _of_misfit(misfit: Misfit) -> Iterator[Finding]:
    if np.isnan(misfit.value):
        return
    about = (
        "reduced chi-square of the standards beyond three"
        if misfit.stated
        else "residual reflection of the standards beyond three, root mean square of each part"
    )
    yield at_most("standards-inconsistent", about, misfit.value, misfit.limit)


def _of_closeness(frequency: Array, closeness: Array) -> Finding:
    about = f"largest relative change of permittivity by {READING_ERROR:g} in the standards"
    return at_most("standards-too-close", about, closeness, CLOSE, frequency)


def _of_sample(
    frequency: Array, eps: ComplexArray, sample: Sample, geometry: Geometry | None
) -> Iterator[Finding]:
    usable = eps[np.isfinite(eps)]
    if geometry is None or not usable.size:
        return
    middle = complex(np.median(usable.real), np.median(usable.imag))
    if sample.grain_size is not None:
        about = "width of the aperture over the largest grain"
        yield at_least("grain-size", about, geometry.width / sample.grain_size, GRAINS)
    if sample.thickness is not None:
        yield from _of_thickness(frequency, eps, middle, sample.thickness, geometry)
    gap = USUAL_GAP if sample.gap is None else sample.gap
    if gap > 0:
        about = f"relative change of eps' by an air gap of {1e6 * gap:.3g} um"
        yield at_most("air-gap", about, np.abs(gap_error(geometry, middle, gap)), ERROR)


def _of_thickness(
    frequency: Array, eps: ComplexArray, middle: complex, thickness: float, geometry: Geometry
) -> Iterator[Finding]:
    """The number of attenuation lengths has no limit: a tip sees less deep than a wave goes."""
    about = "thickness of the sample; its back changes eps' by less than 1 % from the limit on"
    yield at_least("sample-thickness", about, thickness, sensing_depth(geometry, ERROR), unit="m")
    about = "relative change of eps' by metal or air behind the sample, the larger"
    yield at_most("sample-thickness", about, backing_error(geometry, middle.real, thickness), ERROR)
    about = "thickness in attenuation lengths, largest"
    yield at_most("sample-thickness", about, thickness / attenuation_length(eps, frequency), np.inf)
