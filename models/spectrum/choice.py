"""Which form a spectrum supports: the simplest within reach of the smallest AICc.

Burnham and Anderson (2002): a difference of 4 in AICc and more is considerably less support. The
relaxation functions are tried first, with conduction; the best of them then without conduction,
and with polarised electrodes where the band reaches down to where these are seen.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np

from models.relation import Array
from models.spectrum.fit import Fit, fit
from models.spectrum.form import Form, evaluate, material
from models.spectrum.spectrum import Spectrum
from models.spectrum.weights import MAGNITUDE, likeliest_noise

CANDIDATES: tuple[tuple[str, ...], ...] = (
    (), ("debye",), ("cole-cole",), ("cole-davidson",), ("havriliak-negami",),
    ("debye", "debye"), ("cole-cole", "debye"), ("cole-cole", "cole-cole"),
    ("debye", "debye", "debye"), ("cole-cole", "debye", "debye"),
)  # fmt: skip
CLOSE = 4.0
"""Difference in AICc up to which the form with fewer parameters is taken."""
NEAR = 12.0
"""Difference up to which variants of a form are tried."""
ELECTRODES_BELOW = 20e6
"""Hz, above which polarised electrodes are not looked for unasked."""
NO_ELECTRODE = 0.05
"""Share of the permittivity at the upper end of the band from which a form's electrodes are none:
what hinders there is a lead, or a relaxation."""
POINTS = 160
"""Of a longer spectrum, as many as a choice is made with; the fit itself takes them all."""
RICHEST = ("cole-cole", "debye", "debye")


@dataclass(frozen=True, slots=True)
class Alternative:
    """One form that was tried."""

    fit: Fit
    difference: float
    """Of its AICc from the smallest."""
    weight: float
    """Akaike weight among all that were tried."""


@dataclass(frozen=True, slots=True)
class Choice:
    """The fit that was chosen, and the forms beside it, best first."""

    fit: Fit
    alternatives: tuple[Alternative, ...]


def choose(
    spectrum: Spectrum, *, conduction: bool | None = None, electrode: bool | None = None
) -> Choice:
    """The simplest form that a spectrum supports, fitted.

    conduction, electrode: whether the form has it; None: decided by AICc as well.
    """
    few = spectrum.thinned(POINTS)
    bare = conduction is not False, bool(electrode)
    noise = noise_of(few, Form(RICHEST, *bare))
    tried = _fitted(few, noise, (Form(terms, *bare) for terms in CANDIDATES))
    if conduction is None:
        tried += _fitted(
            few,
            noise,
            [Form(f.form.terms, conduction=False, electrode=bare[1]) for f in _near(tried)],
        )
    if electrode is None and few.frequency.min() < ELECTRODES_BELOW:
        hindered = _fitted(few, noise, _behind_electrodes(tried))
        tried += [one for one in hindered if at_top(one) < NO_ELECTRODE]
    if not tried:
        tried = [fit(Form((), *bare), few, noise)]
    chosen = _simplest(tried)
    best = chosen if len(few.frequency) == len(spectrum.frequency) else fit(
        chosen.form, spectrum, noise
    )  # fmt: skip
    return Choice(best, _ranked(tried))


def noise_of(spectrum: Spectrum, richest: Form) -> str | None:
    """The shape of noise under which to fit; None where the spectrum states its own."""
    if spectrum.noise_stated:
        return None
    form = richest
    while len(form.slots) + 2 > 2 * len(spectrum.frequency) and form.terms:
        form = Form(form.terms[:-1], form.conduction, form.electrode)
    if len(form.slots) >= 2 * len(spectrum.frequency):
        return MAGNITUDE
    first = fit(form, spectrum, MAGNITUDE, effort=1)
    return likeliest_noise(spectrum.permittivity - first.permittivity, first.permittivity)


def _fitted(spectrum: Spectrum, noise: str | None, forms: Iterable[Form]) -> list[Fit]:
    room = 2 * len(spectrum.frequency) - 2
    return [fit(form, spectrum, noise) for form in forms if len(form.slots) < room]


def _behind_electrodes(tried: Sequence[Fit]) -> list[Form]:
    """The simplest forms, which electrodes may have disguised, and the best two."""
    best = sorted(tried, key=lambda one: one.aicc)[:2]
    forms = [Form((kind,), electrode=True) for kind in ("debye", "cole-cole")]
    forms += [Form(one.form.terms, one.form.conduction, electrode=True) for one in best]
    return list(dict.fromkeys(forms))


def at_top(fit: Fit) -> float:
    """Share of the permittivity that a form's electrodes change at the upper end of the band."""
    top = np.array([fit.spectrum.frequency.max()])
    behind = evaluate(*material(fit.form, fit.vector), top)[0]
    return float(np.abs(evaluate(fit.form, fit.vector, top)[0] / behind - 1)[0])


def _near(tried: Sequence[Fit]) -> list[Fit]:
    least = min((one.aicc for one in tried), default=0.0)
    return [one for one in tried if one.aicc <= least + NEAR]


def _simplest(tried: Sequence[Fit]) -> Fit:
    least = min(one.aicc for one in tried)
    close = [one for one in tried if one.aicc <= least + CLOSE]
    return min(close, key=lambda one: (len(one.vector), one.aicc))


def _ranked(tried: Sequence[Fit]) -> tuple[Alternative, ...]:
    differences: Array = np.array([one.aicc for one in tried])
    differences = differences - differences.min()
    weights = np.exp(-differences / 2)
    weights = weights / weights.sum()
    order = np.argsort(differences, kind="stable")
    return tuple(Alternative(tried[i], float(differences[i]), float(weights[i])) for i in order)


def left_open(choice: Choice, frequency: Array) -> tuple[Array, Array]:
    """Variance of eps' and of eps'' that the choice of the form leaves, shape (n,) each.

    Other forms tell other permittivities; each counts by its Akaike weight (Burnham and Anderson,
    2002, unconditional variance).
    """
    chosen = evaluate(choice.fit.form, choice.fit.vector, frequency)[0]
    real, loss = np.zeros(len(frequency)), np.zeros(len(frequency))
    for other in choice.alternatives:
        if other.difference <= NEAR:
            off = evaluate(other.fit.form, other.fit.vector, frequency)[0] - chosen
            real += other.weight * np.square(off.real)
            loss += other.weight * np.square(off.imag)
    return real, loss


def disagreement(choice: Choice, name: str) -> float:
    """Variance of what all forms have in common that the choice among them leaves.

    name: infinite_permittivity, static_permittivity or bulk_conductivity.

    Forms that put more terms outside the band than the chosen one do not count: what they say of
    these is made up by terms that nothing there speaks for.
    """
    own, astray = common(choice.fit)[name], outside(choice.fit)
    return sum(
        other.weight * (common(other.fit)[name] - own) ** 2
        for other in choice.alternatives
        if other.difference <= NEAR and outside(other.fit) <= astray
    )


def common(fit: Fit) -> dict[str, float]:
    """What every form tells, SI; no conduction is a conductivity of 0."""
    slots, values = fit.form.slots, fit.form.values(fit.vector)
    named = {slot.name: float(value) for slot, value in zip(slots, values, strict=True)}
    strengths = [float(value) for slot, value in zip(slots, values, strict=True)
                 if slot.name == "relaxation_strength"]  # fmt: skip
    infinite = named["infinite_permittivity"]
    return {
        "infinite_permittivity": infinite,
        "static_permittivity": infinite + sum(strengths),
        "bulk_conductivity": named.get("bulk_conductivity", 0.0),
    }


def outside(fit: Fit) -> int:
    """How many terms relax outside the band."""
    f = fit.spectrum.frequency
    times = np.array([value for slot, value in zip(fit.form.slots, fit.vector, strict=True)
                      if slot.name == "relaxation_time"])  # fmt: skip
    relaxes = 1 / (2 * np.pi * np.exp(times))
    return int(np.count_nonzero((relaxes < f.min()) | (relaxes > f.max())))
