"""Where a fit may start: relaxation times on a grid, everything linear solved for.

With the relaxation times and shapes held, strengths, conductivity and the infinite permittivity
are a linear problem with non-negative answers (Lawson and Hanson, 1974). It is solved for every
combination of times on a coarse grid; the best combinations that differ are starts.
"""

from collections.abc import Iterator, Sequence
from itertools import combinations, permutations, product

import numpy as np
from scipy.optimize import nnls

from models.relation import Array, ComplexArray
from models.spectrum.form import ELECTRODE_FREQUENCY, Form, per_conductivity, without_electrodes
from models.spectrum.relaxation import dispersion

POINTS = 32
"""Of the spectrum, as many as a start needs."""
GRID = {0: 1, 1: 16, 2: 11, 3: 9, 4: 8}
"""Relaxation times tried, by the number of terms."""
BEYOND = 8.0
"""How far outside the band a relaxation may lie, as a factor of frequency."""
SHAPES = {"debye": ((),), "cole-cole": ((0.1,), (0.4,)), "cole-davidson": ((0.75,), (0.4,)),
          "havriliak-negami": ((0.1, 0.75), (0.4, 0.5))}  # fmt: skip
WEAKEST = 1e-4
"""A term that the linear problem leaves out starts with this share of the permittivity."""


def starts(
    form: Form, frequency: Array, permittivity: ComplexArray, noise: Array, count: int
) -> list[Array]:
    """The ``count`` best vectors from which to fit, best first.

    frequency: shape (n,), Hz. noise: shape (2, n), standard uncertainties of both parts.
    """
    kept = np.unique(np.linspace(0, len(frequency) - 1, POINTS).round().astype(int))
    f, eps, u = frequency[kept], permittivity[kept], noise[:, kept]
    found: list[tuple[float, Array]] = []
    for electrode in _electrodes(form, f, eps):
        seen = eps if electrode is None else without_electrodes(eps, f, *electrode)
        usable = np.isfinite(seen) & (np.abs(seen) < 1e3 * np.abs(eps))
        scale = 1.0 if electrode is None else np.abs(eps / seen) ** 2
        if np.count_nonzero(usable) < 2:
            continue
        tried = _linear(form, f[usable], seen[usable], (u / scale)[:, usable])
        found += [(misfit, np.append(v, electrode or ())) for misfit, v in tried]
    found.sort(key=lambda pair: pair[0])
    return _different(form, [vector for _, vector in found], count)


def _electrodes(
    form: Form, frequency: Array, permittivity: ComplexArray
) -> Iterator[tuple[float, float] | None]:
    """Log sizes and exponents of electrodes that hinder a little, or much, at the lowest end."""
    if not form.electrode:
        yield None
        return
    low = int(np.argmin(frequency))
    w = 2 * np.pi * frequency[low] / ELECTRODE_FREQUENCY
    for share, exponent in product((30.0, 6.0, 1.5), (0.0, 0.25)):
        size = share * np.abs(permittivity[low]) * w**exponent
        yield float(np.log(size)), exponent


def _linear(
    form: Form, frequency: Array, permittivity: ComplexArray, noise: Array
) -> list[tuple[float, Array]]:
    w = 2 * np.pi * frequency
    target = np.concatenate([(permittivity.real - 1) / noise[0], permittivity.imag / noise[1]])
    fixed = [np.ones(w.shape, np.complex128)]
    if form.conduction:
        fixed.append(per_conductivity(w))
    fixed_columns = [_stacked(column, noise) for column in fixed]
    size = float(np.median(np.abs(permittivity)))
    found = []
    for shapes, times in _combinations(form, w):
        columns = fixed_columns + [
            _stacked(dispersion(kind, w, time, shape)[0], noise)
            for kind, shape, time in zip(form.terms, shapes, times, strict=True)
        ]
        matrix = np.array(columns).T
        scales = np.linalg.norm(matrix, axis=0)
        try:
            answer, misfit = nnls(matrix / scales, target)
        except RuntimeError:  # it went round in circles: another combination will do
            continue
        found.append((float(misfit), _vector(form, answer / scales, shapes, times, size)))
    return found


def _combinations(
    form: Form, w: Array
) -> Iterator[tuple[tuple[tuple[float, ...], ...], tuple[float, ...]]]:
    """Shapes and ln relaxation times of the terms; like terms are not swapped."""
    low, high = np.log(1 / (BEYOND * w.max())), np.log(BEYOND / w.min())
    grid = np.linspace(high, low, GRID[len(form.terms)])
    middle = float(np.log(np.sqrt(w.min() * w.max()) / (2 * np.pi)))
    known = {**SHAPES, "resonance": ((middle,), (float(np.log(w.max() / (2 * np.pi))),))}
    few = 1 if len(form.terms) > 2 else None
    for shapes in product(*(known[kind][:few] for kind in form.terms)):
        for chosen in combinations(grid, len(form.terms)):
            for order in _orders(form.terms):
                yield shapes, tuple(float(chosen[place]) for place in order)


def _orders(kinds: tuple[str, ...]) -> list[tuple[int, ...]]:
    """Which term takes which of the times, the slowest first; like terms are not swapped."""
    return [
        order
        for order in permutations(range(len(kinds)))
        if all(order[i] < order[j] for i, j in combinations(range(len(kinds)), 2)
               if kinds[i] == kinds[j])
    ]  # fmt: skip


def _stacked(column: ComplexArray, noise: Array) -> Array:
    return np.concatenate([column.real / noise[0], column.imag / noise[1]])


def _vector(
    form: Form,
    linear: Array,
    shapes: Sequence[tuple[float, ...]],
    times: Sequence[float],
    size: float,
) -> Array:
    beside = 2 if form.conduction else 1
    vector = [1 + linear[0]]
    for strength, shape, time in zip(linear[beside:], shapes, times, strict=True):
        vector += [np.log(max(strength, WEAKEST * size)), time, *shape]
    if form.conduction:
        vector.append(linear[1])
    return np.array(vector)


def _plain(form: Form) -> Array:
    """A start that needs no data: the middle of every range that matters."""
    middle = {"infinite_permittivity": 5.0, "relaxation_strength": 5.0, "relaxation_time": 1e-9,
              "beta": 0.8, "alpha": 0.1, "resonance_frequency": 1e9, "bulk_conductivity": 1e-2,
              "electrode_permittivity": 1e4, "electrode_exponent": 0.1}  # fmt: skip
    return form.vector(np.array([middle[slot.name] for slot in form.slots]))


def _different(form: Form, ranked: list[Array], count: int) -> list[Array]:
    """The best that are not neighbours on the grid of any better one."""
    telling = {"relaxation_time", "electrode_permittivity"}
    times = [i for i, slot in enumerate(form.slots) if slot.name in telling]
    chosen: list[Array] = []
    for vector in ranked:
        if all(np.any(np.abs(vector[times] - other[times]) > 1.0) for other in chosen):
            chosen.append(vector)
        if len(chosen) == count:
            break
    return chosen or [_plain(form)]
