"""Permittivity before a tip from reflections as read: the whole way, with what is not known."""

from dataclasses import dataclass, replace

import numpy as np

from models.reflection.estimates import Band, SweepEstimate, flag_loss, flag_uncertain, kept
from models.reflection.orientation import falls, loss_share, rises
from models.reflection.plausible import judge
from models.reflection.tip.aperture import USUAL, Aperture, Geometry, Model
from models.reflection.tip.calibration import Calibration, Standard, calibrate
from models.reflection.tip.consistency import Departure, departures, refuse_alike
from models.reflection.tip.inversion import Response, Variance, invert, of_noise, of_standards
from models.reflection.tip.layers import without_gap
from models.reflection.tip.misfit import USUAL_NOISE, Misfit, judged
from models.reflection.tip.practice import findings_of, flag
from models.reflection.tip.sample import Sample
from models.relation import Array, ComplexArray

WORSE, BETTER = 2.0, 0.1
"""Times the misfit of the standards that conjugating may cost, or must save."""
LOSS = 2e-3
"""Share of |eps| below zero in the median from which the time convention is doubted."""
USUAL_CHI_SQUARE = 10.0
"""Reduced, up to which nobody looks for a mistake."""
USUAL_TIP = Geometry(1.5e-3 / USUAL, 1.5e-3)
"""Of the 3.6 mm line that most open tips are cut from; where no radii are given."""


@dataclass(frozen=True, slots=True, kw_only=True)
class TipQuery:
    """One calibration and the samples that were read with it; f frequencies."""

    frequency: Array
    standards: tuple[Standard, ...]
    standard_spread: Array | None = None
    """Standard uncertainty of each part of the reflections, shape (n, f); None: not known."""
    samples: tuple[Sample, ...]
    model: Model | None = None
    """None: fitted from four standards, else the field of the radii, else the capacitance."""
    geometry: Geometry | None = None
    largest_relative_uncertainty: float | None = None


@dataclass(frozen=True, slots=True)
class TipEstimate:
    """The estimate with the calibration behind it."""

    estimate: SweepEstimate
    calibration: Calibration
    departures: tuple[Departure, ...]
    misfit: Misfit
    aperture_open: bool = False
    """Whether the bands hold what other models of the aperture would say."""


@np.errstate(all="ignore")
def estimate_permittivity(query: TipQuery) -> TipEstimate:
    """Permittivity of every sample over frequency, its uncertainty, flags and findings.

    Raises ParameterError where two standards were read alike.
    """
    refuse_alike(query.standards)
    aperture = Aperture(query.model or _usual(query), query.geometry)
    calibration, answer, conjugated = _oriented(query, aperture)
    misfit = judged(calibration, query.samples, stated=query.standard_spread is not None)
    calibration = calibration.scaled(misfit.factor)
    spread = _sample_spread(query, misfit)
    shared = of_standards(calibration, answer)
    aperture_open = query.model is None and len(query.standards) == 3
    if aperture_open:
        shared = shared + _of_aperture(query, calibration, answer, conjugated=conjugated)
    total = of_noise(calibration, answer, spread) + shared
    band = Band(*(np.sqrt(v) for v in (total.real, total.loss, shared.real, shared.loss)))
    eps, band = _gaps_closed(query, answer.permittivity, band)
    flags = np.zeros(eps.shape, dtype=np.uint64)
    flag_loss(eps, band, flags)
    flag_uncertain(eps, band, flags, query.largest_relative_uncertainty)
    flag(calibration, answer, spread, misfit, flags)
    findings = findings_of(calibration, answer, query.samples, misfit, query.geometry)
    plausible = judge(query.frequency, eps, band, flags)
    freedom = np.stack([np.full(query.frequency.size, s.freedom) for s in query.samples])
    estimate = SweepEstimate(
        query.frequency,
        kept(eps, flags),
        band,
        flags,
        tuple((*one, *more) for one, more in zip(findings, plausible, strict=True)),
        freedom,
        conjugated,
        noise_known=misfit.known,
    )
    return TipEstimate(estimate, calibration, departures(calibration), misfit, aperture_open)


def _usual(query: TipQuery) -> Model:
    if len(query.standards) > 3:
        return "fitted"
    return "capacitive" if query.geometry is None else "aperture-field"


def _of_aperture(
    query: TipQuery, calibration: Calibration, answer: Response, *, conjugated: bool
) -> Variance:
    """What the models of an aperture disagree about, which three standards cannot settle.

    The difference from another model counts as one standard uncertainty of each part: with radii
    the one that radiates only, else the field of a usual tip.
    """
    if query.geometry is None:
        other = Aperture("aperture-field", USUAL_TIP)
    else:
        other = Aperture("radiating", query.geometry)
    read = np.stack([sample.read for sample in query.samples])
    read = np.conj(read) if conjugated else read
    _, there = _solved(query, other, calibration.standards, read)
    change = there.permittivity - answer.permittivity
    size = np.square(np.abs(np.where(np.isfinite(change), change, 0.0)))
    return Variance(size, size)


def _oriented(query: TipQuery, aperture: Aperture) -> tuple[Calibration, Response, bool]:
    """Calibration and answer, every reflection conjugated where that alone makes sense of them.

    Never where the port would stop being passive for it, or the standards stop to agree.
    """
    read = np.stack([sample.read for sample in query.samples])
    everything = np.concatenate([np.stack([s.read for s in query.standards]), read])
    first = _solved(query, aperture, query.standards, read)
    loss, fits = (
        loss_share(first[1].permittivity),
        _fits(first[0], stated=query.standard_spread is not None),
    )
    if loss >= -LOSS and fits and not rises(everything):
        return *first, False
    turned = tuple(replace(s, read=np.conj(s.read)) for s in query.standards)
    other = _solved(query, aperture, turned, np.conj(read))
    before, after = first[0].chi_square, other[0].chi_square
    if len(query.standards) > 3 and not fits:
        signs = loss < -LOSS and after < WORSE * before
        turn = after < BETTER * before or (signs and loss_share(other[1].permittivity) > LOSS)
    else:
        turn = (rises(everything) or (loss < -LOSS and not falls(everything))) and (
            loss_share(other[1].permittivity) >= -LOSS
            and (other[0].passive or not first[0].passive)
            and _fits(other[0], stated=query.standard_spread is not None)
        )
    return (*other, True) if turn else (*first, False)


def _fits(calibration: Calibration, *, stated: bool) -> bool:
    """Whether standards beyond three agree as well as standards usually do."""
    freedom = calibration.degrees_of_freedom
    if freedom <= 0:
        return True
    most = USUAL_CHI_SQUARE if stated else USUAL_NOISE**2
    return calibration.chi_square / freedom <= most


def _solved(
    query: TipQuery, aperture: Aperture, standards: tuple[Standard, ...], read: ComplexArray
) -> tuple[Calibration, Response]:
    spread = query.standard_spread
    if spread is None:
        spread = np.ones((len(standards), query.frequency.size))
    calibration = calibrate(query.frequency, standards, aperture, spread)
    return calibration, invert(calibration, read)


def _sample_spread(query: TipQuery, misfit: Misfit) -> Array:
    """That of its own repeats or statement; else a sample is as noisy as the standards."""
    rows = [
        np.full(query.frequency.size, misfit.noise) if s.spread is None else s.spread
        for s in query.samples
    ]
    return np.stack(rows)


def _gaps_closed(query: TipQuery, eps: ComplexArray, band: Band) -> tuple[ComplexArray, Band]:
    """Samples that are read through a stated air gap, without it; what the gap leaves open."""
    geometry = query.geometry
    if geometry is None or not any(sample.gap for sample in query.samples):
        return eps, band
    eps = eps.copy()
    parts = [v.copy() for v in (band.real, band.loss, band.real_shared, band.loss_shared)]
    for place, sample in enumerate(query.samples):
        if not sample.gap:
            continue
        read = eps[place]
        eps[place] = without_gap(geometry, read, sample.gap)
        step = 1e-4 * np.where(np.isfinite(read), read, 1.0)
        with np.errstate(all="ignore"):
            steeper = np.abs((without_gap(geometry, read + step, sample.gap) - eps[place]) / step)
        off = np.zeros_like(read)
        if sample.gap_u:
            off = without_gap(geometry, read, max(sample.gap - sample.gap_u, 0.0)) - eps[place]
        for part, change in zip(parts, (off.real, off.imag) * 2, strict=True):
            part[place] = np.hypot(steeper * part[place], change)
    return eps, Band(*parts)
