"""What of a fit the spectrum does not resolve, and the number that says so."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from models.spectrum.description import widths
from models.spectrum.fit import Fit

VAGUE = 0.3
"""Relative standard uncertainty from which a strength, time or conductivity is not resolved."""
ALIKE = 3.0
"""Two relaxation times closer than this factor are hardly two."""
TIED, LOOSE = 0.995, 0.1
"""Correlation from which two parameters are hardly two, where one is known no better than that."""
FAINT = 1e-3
"""Share of the permittivity below which a term is nothing."""

TERM, OUTSIDE = "term-not-resolved", "term-outside-band"
CONDUCTION, INFINITE = "conduction-not-resolved", "infinite-permittivity-not-resolved"


@dataclass(frozen=True, slots=True)
class Doubt:
    """One thing the spectrum leaves open, as a flag with its reason."""

    flag: str
    reason: str
    term: int | None = None


def doubts(fit: Fit) -> tuple[Doubt, ...]:
    """What of the fit the spectrum does not resolve, term by term, then what stands beside."""
    found = [
        Doubt(flag, reason, term)
        for term in range(len(fit.form.terms))
        for flag, reason in _of_term(fit, term)
    ]
    return (*found, *_beside(fit))


def _of_term(fit: Fit, term: int) -> Iterator[tuple[str, str]]:
    form, values, u = fit.form, fit.form.values(fit.vector), widths(fit)
    size, time = form.place("relaxation_strength", term), form.place("relaxation_time", term)
    for place, what in ((size, "strength"), (time, "relaxation time")):
        if fit.held[place]:
            yield TERM, f"its {what} ran to the end of its range"
        elif u[place] > VAGUE:
            yield TERM, f"the standard uncertainty of its {what} is {100 * u[place]:.3g} %"
    if values[size] < FAINT * np.abs(fit.permittivity).max():
        yield TERM, f"its strength is {values[size]:.3g} only"
    for words in (*_alike(fit, term), *_tied(fit, term)):
        yield TERM, words
    f, relaxes = fit.spectrum.frequency, 1 / (2 * np.pi * values[time])
    if form.terms[term] != "resonance" and not f.min() <= relaxes <= f.max():
        ends = f"{f.min():.3g} to {f.max():.3g} Hz"
        yield OUTSIDE, f"it relaxes at {relaxes:.3g} Hz, outside the band of {ends}"


def _alike(fit: Fit, term: int) -> Iterator[str]:
    """Terms that relax at nearly the same time."""
    times = [np.exp(fit.vector[fit.form.place("relaxation_time", k)])
             for k in range(len(fit.form.terms))]  # fmt: skip
    for other, time in enumerate(times):
        ratio = times[term] / time
        if other != term and 1 / ALIKE < ratio < ALIKE:
            yield f"its relaxation time is {ratio:.3g} times that of term {other + 1}"


def _tied(fit: Fit, term: int) -> Iterator[str]:
    """Parameters of a term that are tied to another one."""
    u, slots = widths(fit), fit.form.slots
    with np.errstate(all="ignore"):
        correlation = np.abs(fit.covariance / np.outer(u, u))
    for i, j in np.argwhere(correlation > TIED).tolist():
        if j < i and term in {slots[i].term, slots[j].term} and max(u[i], u[j]) > LOOSE:
            pair = f"{slots[i].label} and {slots[j].label}"
            yield f"{pair} are tied: correlation {correlation[i, j]:.4f}"


def _beside(fit: Fit) -> Iterator[Doubt]:
    u = widths(fit)
    if fit.form.conduction:
        place = fit.form.place("bulk_conductivity")
        if u[place] > VAGUE * fit.vector[place]:
            known = f"{fit.vector[place]:.3g} S/m, standard uncertainty {u[place]:.2g} S/m"
            yield Doubt(CONDUCTION, f"the conductivity is {known}")
    if u[0] > VAGUE * fit.vector[0]:
        known = f"{fit.vector[0]:.3g}, standard uncertainty {u[0]:.2g}"
        yield Doubt(INFINITE, f"the permittivity above all relaxations is {known}")
