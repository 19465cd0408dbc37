"""The one of several permittivities, at every frequency, that makes a smooth spectrum."""

import numpy as np

from models.reflection.analytic_fit import Model, solve
from models.relation import Array, ComplexArray

REAL = np.geomspace(1.2, 90.0, 24)
LOSSES = (0.003, 0.15, 1.0)
"""Starts: real parts, and losses beside them."""
GAIN = 30.0
"""What a loss below zero costs, in squares of its share."""
NEAR = 1e-3
"""Of the weighted squares of residuals, within which two roots answer equally well."""


def smooth_roots(
    model: Model, read: ComplexArray, spread: Array, guess: complex | None = None
) -> ComplexArray:
    """Start for a fit at every frequency, shape (f,).

    guess: permittivity near which the lowest frequency is looked for; None: anywhere.

    From every start a root is sought at all frequencies at once; of all ways through the roots,
    the one is taken along which permittivity changes least (Viterbi), gain being dear.
    """
    starts = [r - 1j * r * share for r in REAL for share in LOSSES]
    if guess is not None:
        starts.insert(0, guess)
    points = read.shape[1]
    found, costs = [], []
    for start in starts:
        answer = solve(model, np.full(points, start), read, spread)
        found.append(answer.value)
        with np.errstate(all="ignore"):
            costs.append((np.square(np.abs(answer.residual)) / np.square(spread)).sum(axis=0))
    roots = np.stack(found)
    with np.errstate(all="ignore"):
        price = _price(roots, np.stack(costs))
        logs = np.log(roots)
        if guess is not None:
            price[:, 0] += np.square(np.abs(logs[:, 0] - np.log(guess)))
    return _path(roots, logs, price)


def _price(roots: ComplexArray, cost: Array) -> Array:
    """What it costs to be at a root: infinite where it is none, dear where there is gain."""
    best = np.nanmin(np.where(np.isfinite(cost), cost, np.inf), axis=0)
    none = ~np.isfinite(roots) | ~(cost <= 4 * best + NEAR)
    gain = np.minimum(-roots.imag / np.abs(roots), 0.0)
    below = roots.real < 0.5
    return np.where(none, np.inf, GAIN * np.square(gain) + 10.0 * below)


def _path(roots: ComplexArray, logs: ComplexArray, price: Array) -> ComplexArray:
    count, points = roots.shape
    total = np.where(np.isfinite(price[:, 0]), price[:, 0], 1e9)
    came = np.zeros((count, points), dtype=np.intp)
    for k in range(1, points):
        with np.errstate(all="ignore"):
            change = np.square(np.abs(logs[:, None, k] - logs[None, :, k - 1]))
        way = np.where(np.isfinite(change), change, 1e9) + total
        came[:, k] = np.argmin(way, axis=1)
        here = np.where(np.isfinite(price[:, k]), price[:, k], 1e9)
        total = np.take_along_axis(way, came[:, k : k + 1], axis=1)[:, 0] + here
    place = int(np.argmin(total))
    chosen = np.empty(points, dtype=np.intp)
    for k in range(points - 1, -1, -1):
        chosen[k] = place
        place = int(came[place, k])
    return np.asarray(roots[chosen, np.arange(points)])
