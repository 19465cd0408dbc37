"""Permittivity and permeability of a sample between two ports, with what is not known of them."""

from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from models.reflection.analytic_fit import solve
from models.reflection.estimates import Band, SweepEstimate, flag_loss, flag_uncertain, kept
from models.reflection.orientation import falls, loss_share, rises
from models.reflection.plausible import judge
from models.reflection.two_port import nicolson_ross_weir
from models.reflection.two_port.baker_jarvis_1990 import all_four
from models.reflection.two_port.baker_jarvis_1990 import permittivity as baker_jarvis
from models.reflection.two_port.position import Planes, at_faces, found
from models.reflection.two_port.practice import (
    findings_of,
    flag,
    flag_everywhere,
    likeness_findings,
    permeability_findings,
)
from models.relation import Array, ComplexArray

Method = Literal["least-squares", "non-iterative", "baker-jarvis-1990", "nicolson-ross-weir"]
Parameters = tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray]
"""S11, S21, S12, S22; shape (f,) each."""
LENGTH_STEP = 1e-6
LOSS = 2e-3


@dataclass(frozen=True, slots=True, kw_only=True)
class TwoPortQuery:
    """One sweep of one sample; lengths in m."""

    frequency: Array
    parameters: Parameters
    spread: Array | None = None
    """Standard uncertainty of each part of the S-parameters, shape (f,); None: not known."""
    both_ways: bool = True
    """False: S12 and S22 stand in for what was not measured, and lessen no noise."""
    length: float
    length_u: float = 0.0
    holder: float | None = None
    """Length between the reference planes; None: they are at the faces of the sample."""
    holder_u: float = 0.0
    before: float | None = None
    """Air line before the sample; None: not known, and found from the reflections."""
    method: Method | None = None
    """None: the one that its permeability calls for."""
    guess: complex | None = None
    """Permittivity near the first frequency."""
    grain_size: float | None = None
    gap_width: float | None = None
    """Between the conductors, m."""
    largest_relative_uncertainty: float | None = None


@dataclass(frozen=True, slots=True)
class TwoPortEstimate:
    """The estimate and what was settled on the way."""

    estimate: SweepEstimate
    method: Method
    planes: Planes
    position_u: float
    """Standard uncertainty of the sample's position, m; zero where it was given."""
    noise: float
    """Standard uncertainty of each part of an S-parameter, median over frequency."""
    noise_known: bool
    turns: int
    length_if_not_magnetic: float | None = None
    """m, with which the permeability would be 1; None: it is, or something else is amiss."""


@np.errstate(all="ignore")
def estimate_constants(query: TwoPortQuery) -> TwoPortEstimate:
    """Permittivity, and permeability where it is not 1, over frequency."""
    s = query.parameters
    loss = _loss(query)
    s11, s21, s12, s22 = (np.conj(part) for part in s)
    turned = replace(query, parameters=(s11, s21, s12, s22))
    through = np.stack([s[1], s[2]])
    doubt = rises(through) or (loss < -LOSS and not falls(through))
    conjugated = doubt and _loss(turned) > max(loss, -LOSS)
    return _estimated(turned if conjugated else query, conjugated=conjugated)


def _loss(query: TwoPortQuery) -> float:
    """Median loss beside |eps|, the sample being taken as not magnetic."""
    eps, _ = _seen(query, "non-iterative", *_planes(query, 1e-3)[:1], query.length)
    return loss_share(eps)


def _planes(query: TwoPortQuery, spread: float) -> tuple[Planes, float]:
    if query.holder is None:
        return (0.0, 0.0), 0.0
    air = query.holder - query.length
    if query.before is not None:
        return (query.before, air - query.before), 0.0
    if air <= 0:
        return (0.0, 0.0), 0.0
    return found(query.parameters[0], query.parameters[3], query.frequency, air, spread)


def _seen(
    query: TwoPortQuery, method: Method, planes: Planes, length: float
) -> tuple[ComplexArray, ComplexArray | None]:
    """Permittivity, and permeability where the method tells it."""
    f = query.frequency
    s = at_faces(query.parameters, f, planes)
    guess = None if query.guess is None else complex(np.sqrt(query.guess))
    mean = 0.5 * (s[0] + s[3]), 0.5 * (s[1] + s[2])
    both = nicolson_ross_weir.constants(*mean, f, length, guess)
    if method == "nicolson-ross-weir":
        return both.permittivity, both.permeability
    start = np.square(both.index)
    if method == "non-iterative":
        return start, None
    start = np.where(np.isfinite(start), start, query.guess or 5.0)
    if method == "baker-jarvis-1990":
        return baker_jarvis(s, f, length, start), None
    weights = np.ones((4, f.size))
    return solve(all_four(f, length), start, np.stack(s), weights).value, None


def _estimated(query: TwoPortQuery, *, conjugated: bool) -> TwoPortEstimate:
    f, length = query.frequency, query.length
    noise, known = _noise(query)
    planes, position_u = _planes(query, float(np.median(noise)))
    s = at_faces(query.parameters, f, planes)
    both = nicolson_ross_weir.constants(
        0.5 * (s[0] + s[3]), 0.5 * (s[1] + s[2]), f, length,
        None if query.guess is None else complex(np.sqrt(query.guess)),
    )  # fmt: skip
    response = nicolson_ross_weir.response(both.permittivity, both.permeability, f, length)
    fewer = 1.0 if query.both_ways else np.sqrt(2.0)
    mu_u = np.sqrt(np.square(np.abs(response[:, 1])).sum(axis=-1) / 2) * noise * fewer
    magnetic, whole = permeability_findings(f, both, mu_u)
    if query.both_ways:
        whole = (*whole, *likeness_findings(s, query.spread))
    method = query.method or ("least-squares" if magnetic.holds else "nicolson-ross-weir")
    eps, mu = _seen(query, method, planes, length)
    own = _own(query, method, eps, response[:, 0], noise) * fewer
    shared, shared_mu = _shared(query, method, planes, position_u, (eps, mu))
    band = _band(own, shared)
    flags = np.zeros((1, f.size), dtype=np.uint64)
    flag_loss(eps[None], band, flags)
    flag_uncertain(eps[None], band, flags, query.largest_relative_uncertainty)
    flag(query, s, eps, mu, noise, flags, certain=both.certain)
    flag_everywhere((magnetic, *whole), flags)
    (plausible,) = judge(f, eps[None], band, flags)
    found_here = (*findings_of(query, eps, mu, magnetic, s), *whole, *plausible)
    estimate = SweepEstimate(
        f, kept(eps[None], flags), band, flags, (found_here,), np.full((1, f.size), np.inf),
        conjugated, None if mu is None else kept(mu[None], flags),
        None if shared_mu is None else _band(mu_u, shared_mu), known,
    )  # fmt: skip
    level = float(np.median(noise))
    other = None
    if not magnetic.holds and all(f.holds for f in whole if f.key != "permeability-below-one"):
        ratio = float(np.nanmedian(both.permeability.real))
        other = length * ratio if ratio > 0 else None
    return TwoPortEstimate(estimate, method, planes, position_u, level, known, both.turns, other)


def _noise(query: TwoPortQuery) -> tuple[Array, bool]:
    """As stated; else what four S-parameters leave of one permittivity and one permeability."""
    f = query.frequency
    if query.spread is not None:
        return query.spread, True
    if not query.both_ways:
        return np.full(f.size, 1e-15), False
    planes, _ = _planes(query, 1e-3)
    s = at_faces(query.parameters, f, planes)
    apart = np.stack([s[0] - s[3], s[1] - s[2]])
    usable = apart[np.isfinite(apart)]
    size = float(np.sqrt(np.mean(np.square(np.abs(usable))) / 4)) if usable.size else 0.0
    return np.full(f.size, max(size, 1e-15)), size > 1e-12


def _own(
    query: TwoPortQuery, method: Method, eps: ComplexArray, by_both: ComplexArray, noise: Array
) -> Array:
    """Standard uncertainty of each part of the permittivity by noise, shape (f,)."""
    with np.errstate(all="ignore"):
        if method == "nicolson-ross-weir":
            through: Array = np.sqrt(np.square(np.abs(by_both)).sum(axis=-1) / 2)
            return through * noise
        _, slopes = all_four(query.frequency, query.length)(eps)
        if method == "least-squares":
            return noise / np.sqrt(np.square(np.abs(slopes)).sum(axis=0))
        if method == "baker-jarvis-1990":
            return noise / (np.sqrt(2) * np.abs(slopes[1]))
    return _numerically(query, eps, noise)


def _numerically(query: TwoPortQuery, eps: ComplexArray, noise: Array) -> Array:
    """The same for the square of the index, by shifting S11 and S21 a little."""
    step, planes = 1e-6, _planes(query, 1e-3)[0]
    total = np.zeros(eps.shape)
    for pair in ((0, 3), (1, 2)):
        moved = [part + step * (place in pair) for place, part in enumerate(query.parameters)]
        there, _ = _seen(
            replace(query, parameters=(moved[0], moved[1], moved[2], moved[3])),
            "non-iterative", planes, query.length,
        )  # fmt: skip
        total += np.square(np.abs(there - eps) / step) / 2
    return np.sqrt(total) * noise


Pair = tuple[ComplexArray, ComplexArray | None]
Width = tuple[Array, Array]
"""Of real part and loss, shape (f,)."""


def _shared(
    query: TwoPortQuery, method: Method, planes: Planes, position_u: float, here: Pair
) -> tuple[Width, Width | None]:
    """What lengths and the position of the sample leave open."""
    before, behind = planes
    cases = [
        (query.length_u, (before, behind - LENGTH_STEP if query.holder else 0.0), LENGTH_STEP),
        (query.holder_u, (before, behind + LENGTH_STEP), 0.0),
        (position_u, (before + LENGTH_STEP, behind - LENGTH_STEP), 0.0),
    ]
    totals = [np.zeros(query.frequency.size) for _ in range(4)]
    for u, moved, longer in cases:
        if not u:
            continue
        there = _seen(query, method, moved, query.length + longer)
        for place, (new, old) in enumerate(zip(there, here, strict=True)):
            if new is not None and old is not None:
                change = (new - old) * u / LENGTH_STEP
                totals[2 * place] += np.square(change.real)
                totals[2 * place + 1] += np.square(change.imag)
    eps_real, eps_loss, mu_real, mu_loss = (np.sqrt(total) for total in totals)
    return (eps_real, eps_loss), None if here[1] is None else (mu_real, mu_loss)


def _band(own: Array, shared: Width) -> Band:
    real, loss = shared
    rows = (np.hypot(own, real), np.hypot(own, loss), real, loss)
    return Band(*(np.atleast_2d(row) for row in rows))
