"""Whether standards agree: each of them measured with the others as standards."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from models.errors import Complaint, ParameterError
from models.reflection.tip.calibration import Calibration, Standard, calibrate
from models.reflection.tip.inversion import Response, invert, of_noise, of_standards
from models.reflection.tip.media import MEDIA, ROOM
from models.relation import Array, ComplexArray

Points = NDArray[np.bool_]

STATIC_BAND = 1e9  # Hz, below which the aperture is a capacitance to a percent or two
SAME = 1e-9
"""Difference of two reflections that is none."""
ENOUGH = 48
"""Points of a sweep that are looked at."""
BLIND = 0.05
"""Relative uncertainty from which a frequency says nothing about a standard."""
ALIKE, CLEARLY = 0.03, 3.0
"""Relative departure of another liquid that is a match, and how many times nearer it must be."""


@dataclass(frozen=True, slots=True)
class Departure:
    """How far a standard is from what it is taken for, the others being taken at their word."""

    name: str
    size: float
    """Median over frequency: relative in permittivity; of a short or load, of its reflection."""
    size_u: float
    """What noise and the uncertainty of all standards let expect of it."""
    looks_like: str | None = None
    """A medium that it reads like instead."""
    chi_square: float | None = None
    """Reduced, of the other standards without this one; None where they are only three."""


def departures(calibration: Calibration) -> tuple[Departure, ...]:
    """Every standard against the others, where there are more than three."""
    if len(calibration.standards) < 4:
        return ()
    points = calibration.frequency.size
    kept = np.zeros(points, dtype=bool)
    kept[np.unique(np.linspace(0, points - 1, min(points, ENOUGH)).astype(int))] = True
    return tuple(_departure(calibration, n, kept) for n in range(len(calibration.standards)))


def refuse_alike(standards: Sequence[Standard]) -> None:
    """Refuse two standards of one reading: no two media and no two sweeps give the same digits.

    Raises ParameterError that names both.
    """
    for later, other in enumerate(standards):
        for one in standards[:later]:
            apart = float(np.nanmedian(np.abs(one.read - other.read)))
            if apart <= SAME:
                detail = (
                    f"{other.name} was read exactly like {one.name}: found a median difference of "
                    f"{apart:.2g} between the two sweeps, expected more than {SAME:g}; one sweep "
                    "was probably sent for both"
                )
                place = ("standards", str(later))
                raise ParameterError("standards", [Complaint(other.name, detail, place)])


def closest(calibration: Calibration) -> tuple[str, str, float]:
    """The two standards whose readings are most alike, and by how much, in the median."""
    read = np.stack([standard.read for standard in calibration.standards])
    pairs = [(i, j) for j in range(len(read)) for i in range(j)]
    apart = [float(np.nanmedian(np.abs(read[i] - read[j]))) for i, j in pairs]
    i, j = pairs[int(np.argmin(apart))]
    return calibration.standards[i].name, calibration.standards[j].name, min(apart)


def _departure(calibration: Calibration, place: int, kept_points: Points) -> Departure:
    out = calibration.standards[place]
    others = [s for n, s in enumerate(calibration.standards) if n != place]
    kept = [n for n in range(len(others) + 1) if n != place]
    frequency, aperture = calibration.frequency, calibration.aperture
    band = kept_points
    if len(others) == 3 and aperture.model == "fitted":
        aperture = replace(aperture, model="capacitive")
        band = band & (frequency <= max(STATIC_BAND, float(frequency.min())))
    rest = calibrate(
        frequency[band],
        [_cut(standard, band) for standard in others],
        aperture,
        calibration.spread[kept][:, band],
    )
    own = _cut(out, band)
    answer = invert(rest, own.read[None])
    left = rest.degrees_of_freedom
    chi_square = rest.chi_square / left if left > 0 else None
    noise = of_noise(rest, answer, calibration.spread[place][None, band])
    shared = of_standards(rest, answer)
    u = np.sqrt(noise.real + noise.loss + shared.real + shared.loss)[0]
    if own.known is None:
        return _of_reflection(own, answer, u, chi_square)
    expected = own.known.permittivity
    size = np.abs(expected)
    doubt = np.sqrt(sum((np.square(np.abs(v)) for v in own.known.variations), np.square(u)))
    seen = doubt < BLIND * size
    seen = seen if seen.any() else np.isfinite(answer.permittivity[0])
    found = answer.permittivity[0][seen]
    departure = _median(np.abs(found - expected[seen]) / size[seen])
    match = _alike(found, rest.frequency[seen], departure, own.name)
    return Departure(own.name, departure, _median((doubt / size)[seen]), match, chi_square)


def _of_reflection(
    own: Standard, answer: Response, u: Array, chi_square: float | None
) -> Departure:
    """A short or a load: by its reflection at the aperture."""
    size = _median(np.abs(answer.reflection[0] - own.reflection))
    through = np.abs(answer.by_sample[0])
    with np.errstate(all="ignore"):
        expected = _median(u / through)
    return Departure(own.name, size, expected, None, chi_square)


def _alike(found: ComplexArray, frequency: Array, departure: float, name: str) -> str | None:
    """The medium at room temperature that is clearly nearer than what a standard is taken for."""
    names = [key for key, m in MEDIA.items() if not m.needs_conductivity and key != name]
    sizes: Sequence[float] = [
        _median(np.abs(found / MEDIA[key].known(frequency, ROOM).permittivity - 1)) for key in names
    ]
    best = int(np.argmin(sizes))
    near = sizes[best] < ALIKE and sizes[best] * CLEARLY < departure
    return names[best] if near else None


def _cut(standard: Standard, band: Points) -> Standard:
    known = standard.known
    if known is not None:
        known = replace(
            known,
            permittivity=known.permittivity[band],
            outside=None,
            variations=tuple(variation[band] for variation in known.variations),
        )
    return replace(standard, read=standard.read[band], known=known)


def _median(values: Array) -> float:
    usable = values[np.isfinite(values)]
    return float(np.median(usable)) if usable.size else float("nan")
