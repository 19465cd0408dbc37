"""The one of several permittivities, at every frequency, that makes a smooth spectrum."""

import numpy as np

from models.reflection.analytic_fit import Model, solve
from models.relation import Array, ComplexArray

REAL = np.geomspace(1.2, 90.0, 24)
LOSSES = (0.003, 0.15, 1.0)
"""Starts: real parts, and losses beside them."""
GAIN = 300.0
"""What a loss below zero costs, in squares of its share."""
BELOW = 100.0
"""What a real part below 0.5 costs."""
GUESSED = 0.1
"""Relative standard uncertainty of a guess."""
NEVER = 1e12
FALL = 1.0
"""Of the mean loss, by which the real part may fall over an e-fold of frequency: the local form of
what Kramers and Kronig demand is 2 / pi, and conduction adds loss without any fall."""
SPEND = 1.5
"""Of itself, by which loss may change over an e-fold: conduction falls as the frequency rises."""
ROUGH = 2e-3
"""Of |eps|, by which a root may be off beside its noise."""
NEAR = 1e-3
"""Of the weighted squares of residuals, within which two roots answer equally well."""


def smooth_roots(
    model: Model,
    frequency: Array,
    read: ComplexArray,
    spread: Array,
    guess: complex | None = None,
) -> ComplexArray:
    """Start for a fit at every frequency, shape (f,).

    frequency: Hz, rising. guess: permittivity near which the lowest frequency is looked for; None:
    anywhere.

    From every start a root is sought at all frequencies at once; of all ways through the roots
    the one is taken whose steps a relaxing medium allows (Viterbi), gain being dear. Steps count in
    units of the roots' own noise: a wrong branch glides down with little loss and less scatter.
    """
    starts = [r - 1j * r * share for r in REAL for share in LOSSES]
    if guess is not None:
        starts.insert(0, guess)
    points = read.shape[1]
    found, costs, spreads = [], [], []
    for start in starts:
        answer = solve(model, np.full(points, start), read, spread)
        found.append(answer.value)
        spreads.append(answer.spread)
        with np.errstate(all="ignore"):
            costs.append((np.square(np.abs(answer.residual)) / np.square(spread)).sum(axis=0))
    roots = np.stack(found)
    with np.errstate(all="ignore"):
        price = _price(roots, np.stack(costs))
        if guess is not None:
            price[:, 0] += np.square(np.abs(np.log(roots[:, 0] / guess)) / GUESSED)
        width = np.hypot(np.stack(spreads), ROUGH * np.abs(roots))
    return _path(roots, width, np.log(frequency), price)


def _price(roots: ComplexArray, cost: Array) -> Array:
    """What it costs to be at a root: infinite where it is none, dear where there is gain."""
    best = np.nanmin(np.where(np.isfinite(cost), cost, np.inf), axis=0)
    none = ~np.isfinite(roots) | ~(cost <= 4 * best + NEAR)
    gain = np.minimum(-roots.imag / np.abs(roots), 0.0)
    below = roots.real < 0.5
    return np.where(none, np.inf, GAIN * np.square(gain) + BELOW * below)


def _path(roots: ComplexArray, width: Array, logs: Array, price: Array) -> ComplexArray:
    """The cheapest way; width: standard uncertainty of the roots. logs: of the frequency."""
    count, points = roots.shape
    total = np.where(np.isfinite(price[:, 0]), price[:, 0], NEVER)
    came = np.zeros((count, points), dtype=np.intp)
    for k in range(1, points):
        step = _step(roots[:, k - 1], roots[:, k], width[:, k - 1 : k + 1], logs[k] - logs[k - 1])
        way = np.where(np.isfinite(step), step, NEVER) + total
        came[:, k] = np.argmin(way, axis=1)
        here = np.where(np.isfinite(price[:, k]), price[:, k], NEVER)
        total = np.take_along_axis(way, came[:, k : k + 1], axis=1)[:, 0] + here
    place = int(np.argmin(total))
    chosen = np.empty(points, dtype=np.intp)
    for k in range(points - 1, -1, -1):
        chosen[k] = place
        place = int(came[place, k])
    return np.asarray(roots[chosen, np.arange(points)])


@np.errstate(all="ignore")
def _step(before: ComplexArray, here: ComplexArray, width: Array, way: float) -> Array:
    """What a step to each root (rows) from each before (columns) costs, in squares of its noise.

    Free is what a relaxing, conducting medium does over ``way`` e-folds of frequency.
    """
    old, new = before[None, :], here[:, None]
    loss = 0.5 * np.maximum(-old.imag - new.imag, 0.0)
    change = new.real - old.real
    real = np.maximum(change, 0.0) + np.maximum(-change - FALL * loss * way, 0.0)
    other = np.maximum(np.abs(new.imag - old.imag) - SPEND * loss * way, 0.0)
    noise = np.square(width[None, :, 0]) + np.square(width[:, None, 1])
    return (np.square(real) + np.square(other)) / noise
