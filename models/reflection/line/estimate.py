"""Permittivity of a filled line or cell from reflections, with what is not known of it."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace

import numpy as np

from models.reflection.analytic_fit import solve
from models.reflection.error_terms import fit
from models.reflection.estimates import Band, SweepEstimate, flag_loss, flag_uncertain, kept
from models.reflection.line import cell, filled, practice
from models.reflection.line.cell import ENDS, End
from models.reflection.line.gaps import CoaxialGap
from models.reflection.line.roots import smooth_roots
from models.reflection.orientation import falls, loss_share, rises
from models.reflection.plausible import judge
from models.reflection.propagation import through_air
from models.relation import Array, ComplexArray

IDEAL: Mapping[str, float] = {"short": -1.0, "open": 1.0, "load": 0.0}
"""Reflections of the standards that settle the reference plane."""
LOSS = 2e-3
TRACED = 401
"""Points over which roots are followed."""
NOTHING = 1e-6
"""Spread of reflections of which nothing is known: below the digits of any file that matters."""
STEP = 1e-6


@dataclass(frozen=True, slots=True)
class Read:
    """A sweep of one end of the line, shape (f,)."""

    reflection: ComplexArray
    spread: Array | None = None
    """Standard uncertainty of each part; None: not known."""
    freedom: float = np.inf


@dataclass(frozen=True, slots=True, kw_only=True)
class LineQuery:
    """One sample; lengths in m."""

    frequency: Array
    reads: Mapping[str, Read]
    """By what ends the cell, short or open; else the one of an endless line."""
    standards: Mapping[str, Read] = field(default_factory=dict)
    """short, open and load as read; none: the reflections are those at the plane."""
    length: float | None = None
    length_u: float = 0.0
    air: float = 0.0
    """Air line between the reference plane and the sample."""
    air_u: float = 0.0
    guess: complex | None = None
    gap: CoaxialGap | None = None
    grain_size: float | None = None
    gap_width: float | None = None
    largest_relative_uncertainty: float | None = None

    @property
    def ends(self) -> tuple[End, ...]:
        """What ended the cell, in the order short, open; none for an endless line."""
        return tuple(end for end in ENDS if end in self.reads)


@dataclass(frozen=True, slots=True)
class LineEstimate:
    """The estimate and the noise it rests on."""

    estimate: SweepEstimate
    noise: float
    noise_known: bool


@np.errstate(all="ignore")
def estimate_line(query: LineQuery) -> LineEstimate:
    """Permittivity over frequency, with a finding where both ends of a cell contradict one.

    Raises ParameterError where both ends were read alike, or a single open one like a shorted one.
    """
    practice.refuse_alike({end: query.reads[end].reflection for end in query.ends})
    reads = [*query.reads.values(), *query.standards.values()]
    everything = np.stack([read.reflection for read in reads])
    face, here = _first(query)
    backwards = rises(everything)
    practice.refuse_shorted(query, np.conj(face.reflection) if backwards else face.reflection)
    loss = loss_share(here.permittivity)
    if backwards or (loss < -LOSS and not falls(everything)):
        turned = replace(
            query, reads=_conjugated(query.reads), standards=_conjugated(query.standards)
        )
        other = _first(turned)
        if loss_share(other[1].permittivity) > (-LOSS if backwards else max(loss, -LOSS)):
            return _estimated(turned, *other, conjugated=True)
    return _estimated(query, face, here, conjugated=False)


def _conjugated(reads: Mapping[str, Read]) -> Mapping[str, Read]:
    return {
        name: replace(read, reflection=np.conj(read.reflection)) for name, read in reads.items()
    }


@dataclass(frozen=True, slots=True)
class _Face:
    """Reflections at the face of the sample, shape (k, f), and their spread."""

    reflection: ComplexArray
    spread: Array
    known: bool


@np.errstate(all="ignore")
def _at_face(query: LineQuery) -> _Face:
    """Through the error terms of the standards, and through the air before the sample."""
    names: Iterable[str] = query.ends or query.reads
    reads = [query.reads[end] for end in names]
    read = np.stack([one.reflection for one in reads])
    known = all(one.spread is not None for one in reads)
    spread = np.stack([_spread(one) for one in reads])
    if query.standards:
        names = list(query.standards)
        raw = np.stack([query.standards[name].reflection for name in names])
        ideal = np.stack([np.full(query.frequency.size, IDEAL[name] + 0j) for name in names])
        own = np.stack([_spread(query.standards[name]) for name in names])
        found = fit(raw, ideal, own)
        true = found.terms.corrected(read)
        through = np.einsum("kft,ftn->kfn", found.terms.gradient(true), found.response)
        total = np.square(spread) + (np.square(np.abs(through)) * np.square(own.T)).sum(axis=-1)
        spread, read = np.sqrt(total) / np.abs(found.terms.slope(true)), true
    shift = np.square(through_air(query.frequency, query.air))
    return _Face(read * shift, spread, known)


def _spread(read: Read) -> Array:
    if read.spread is None:
        return np.full(read.reflection.size, NOTHING)
    return np.maximum(read.spread, NOTHING)


@dataclass(frozen=True, slots=True)
class _Solution:
    permittivity: ComplexArray
    spread: Array
    residual: Array
    """Of the fit over its spread, root mean square of each part; NaN where nothing is left."""


def _solved(query: LineQuery, face: _Face, length: float | None) -> _Solution:
    f, nothing = query.frequency, np.full(query.frequency.size, np.nan)
    if not query.ends or length is None:
        read = face.reflection[0]
        spread = np.abs(filled.slope(read)) * face.spread[0]
        return _Solution(filled.permittivity(read), spread, nothing)
    model = cell.model(f, length, query.ends)
    start = _start(query, face, length)
    answer = solve(model, start, face.reflection, face.spread)
    left = np.square(np.abs(answer.residual) / face.spread).sum(axis=0)
    freedom = 2 * (len(query.ends) - 1)
    return _Solution(answer.value, answer.spread, np.sqrt(left / freedom) if freedom else nothing)


def _start(query: LineQuery, face: _Face, length: float) -> ComplexArray:
    """In closed form from both ends; else the smooth one of the roots, on a thinned sweep."""
    f = query.frequency
    if len(query.ends) == 2:
        start, _ = cell.from_both(face.reflection[0], face.reflection[1], f, length)
        return np.where(np.isfinite(start), start, 5.0)
    rows = np.unique(np.linspace(0, f.size - 1, min(f.size, TRACED)).astype(int))
    model = cell.model(f[rows], length, query.ends)
    found = smooth_roots(
        model, f[rows], face.reflection[:, rows], face.spread[:, rows], query.guess
    )
    known = np.isfinite(found)
    if not known.any():
        return np.full(f.size, 5.0 + 0j)
    return np.asarray(np.interp(f, f[rows][known], found[known]))


def _first(query: LineQuery) -> tuple["_Face", "_Solution"]:
    face = _at_face(query)
    return face, _solved(query, face, query.length)


def _estimated(query: LineQuery, face: _Face, here: _Solution, *, conjugated: bool) -> LineEstimate:
    f = query.frequency
    known, spread = face.known, here.spread
    if not known and np.isfinite(here.residual).any():
        level = float(np.sqrt(np.nanmean(np.square(here.residual))))
        spread, known = here.spread * level, True
        face = replace(face, spread=face.spread * level)
    elif not known:
        spread = np.zeros(f.size)
    eps = here.permittivity
    shared = _shared(query, face, eps)
    eps, own, shared = _gap_closed(query, eps, spread, shared)
    band = Band(*(np.atleast_2d(row) for row in (
        np.hypot(own, shared[0]), np.hypot(own, shared[1]), *shared
    )))  # fmt: skip
    flags = np.zeros((1, f.size), dtype=np.uint64)
    flag_loss(eps[None], band, flags)
    flag_uncertain(eps[None], band, flags, query.largest_relative_uncertainty)
    practice.flag(face.reflection, face.spread, flags)
    (plausible,) = judge(f, eps[None], band, flags)
    findings = (*practice.findings_of(query, eps, face.reflection), *plausible)
    if "short" in query.ends and query.length is not None:
        first = face.reflection[0], face.spread[0]
        findings = (*findings, practice.short_finding(f, query.length, *first, flags))
    if len(query.ends) == 2 and query.length is not None:
        both = cell.from_both(face.reflection[0], face.reflection[1], f, query.length)
        magnetic = practice.magnetic_finding(both[1], here.residual, flags, known=face.known)
        findings = (*findings, magnetic)
    freedom = min(read.freedom for read in query.reads.values())
    estimate = SweepEstimate(
        f, kept(eps[None], flags), band, flags, (findings,), np.full((1, f.size), freedom),
        conjugated, noise_known=known,
    )  # fmt: skip
    return LineEstimate(estimate, float(np.median(face.spread)) if known else 0.0, known)


Width = tuple[Array, Array]
"""Of real part and loss, shape (f,)."""


def _shared(query: LineQuery, face: _Face, eps: ComplexArray) -> Width:
    """What the lengths leave open, by moving each a little and following the root."""
    total = [np.zeros(query.frequency.size), np.zeros(query.frequency.size)]
    cases = [(query.length_u, STEP, 0.0), (query.air_u, 0.0, STEP)]
    for u, longer, further in cases:
        if not u:
            continue
        moved = face.reflection * np.square(through_air(query.frequency, further))
        if query.ends and query.length is not None:
            model = cell.model(query.frequency, query.length + longer, query.ends)
            there = solve(model, eps, moved, face.spread).value
        else:
            there = filled.permittivity(moved[0])
        change = (there - eps) * u / STEP
        total[0] += np.square(change.real)
        total[1] += np.square(change.imag)
    return np.sqrt(total[0]), np.sqrt(total[1])


def _gap_closed(
    query: LineQuery, eps: ComplexArray, own: Array, shared: Width
) -> tuple[ComplexArray, Array, Width]:
    if query.gap is None:
        return eps, own, shared
    steeper = np.abs(query.gap.slope(eps))
    return query.gap.closed(eps), own * steeper, (shared[0] * steeper, shared[1] * steeper)
