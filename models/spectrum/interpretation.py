"""Everything that is asked of one spectrum: terms, curve, circuit, and the soil behind it."""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from models.relation import Array
from models.spectrum import flags
from models.spectrum.choice import Choice, choose, disagreement, left_open, noise_of
from models.spectrum.circuits.circuit import Circuit, circuit_of
from models.spectrum.description import Banded, Curve, curve, factor_of, parameters, restricted
from models.spectrum.fit import Fit, fit
from models.spectrum.flags import Finding
from models.spectrum.form import Form, evaluate
from models.spectrum.spectrum import Spectrum
from models.spectrum.views import UNIT_CUBE
from models.spectrum.water.band import Soil, Told, told_by
from models.spectrum.water.inversion import AT_BEST, POINTS, Band, invert, salty_water
from models.spectrum.water.soil import Scene
from models.spectrum.weights import MAGNITUDE, stated_noise, unit_noise
from models.uncertainty.coverage import coverage_factor

WORSE, NEGLIGIBLE = 2.0, 1e-3
"""Residuals of a soil over those of the relaxation terms that are a misfit, and relative ones that
are none in any case."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Question:
    """What a caller wants to know of a spectrum; SI."""

    form: Form | None = None
    """None: chosen."""
    conduction: bool | None = None
    electrode: bool | None = None
    """Of a chosen form; None: decided along with it."""
    cell: float = UNIT_CUBE
    probability: float = 0.95
    soil: Soil | None = None
    """None: nothing is asked of the soil."""
    mixing_model: str = "complex-refractive"
    parameters: Mapping[str, Any] | None = None
    """Of the mixing model."""


@dataclass(frozen=True, slots=True)
class SoilAnswer:
    """The soil behind a spectrum."""

    bands: tuple[Band, ...]
    """The chosen variant first."""
    told: tuple[Told, ...]


@dataclass(frozen=True, slots=True)
class Interpretation:
    """The answer to a question about a spectrum."""

    choice: Choice
    parameters: tuple[Banded, ...]
    curve: Curve
    circuit: Circuit
    soil: SoilAnswer | None
    findings: tuple[Finding, ...]


def interpret(spectrum: Spectrum, question: Question) -> Interpretation:
    """Fit the spectrum, describe the fit, and invert it for the soil where one is described.

    Raises ParameterError when the points are too few for what is asked.
    """
    choice = fitted(spectrum, question)
    best = choice.fit
    findings = [*flags.of_spectrum(spectrum), *flags.of_fit(best), *flags.of_choice(choice)]
    soil = None
    if question.soil is not None and not np.isfinite(question.soil.temperature):
        text = "No temperature was given: there is no water content"
        findings.append(Finding("missing:temperature", text))
    elif question.soil is not None:
        soil = soil_of(choice, question, question.soil)
        findings += _of_soil(soil, choice, question.soil)
    return Interpretation(
        choice=choice,
        parameters=whole_parameters(choice, question.probability),
        curve=whole_curve(choice, question.probability),
        circuit=circuit_of(best.form, best.form.values(best.vector), question.cell),
        soil=soil,
        findings=tuple(findings),
    )


def fitted(spectrum: Spectrum, question: Question) -> Choice:
    """The form that was asked for, or the one that the spectrum supports, fitted."""
    if question.form is None:
        return choose(spectrum, conduction=question.conduction, electrode=question.electrode)
    return Choice(fit(question.form, spectrum, noise_of(spectrum, question.form)), ())


COMMON = ("infinite_permittivity", "static_permittivity", "bulk_conductivity")


def whole_parameters(choice: Choice, probability: float) -> tuple[Banded, ...]:
    """Every parameter; those that all forms have with what the choice of the form leaves open."""
    factor = factor_of(choice.fit, probability) / coverage_factor(probability)
    found = []
    for one in parameters(choice.fit, probability):
        if one.name in COMMON and choice.alternatives:
            u = float(np.hypot(one.standard_uncertainty, np.sqrt(disagreement(choice, one.name))))
            low = 0.0 if one.name == "bulk_conductivity" else 1.0
            lower, upper = restricted(one.value, u * factor, low, np.inf, probability)
            found.append(Banded(one.name, one.value, u, lower, upper))
        else:
            found.append(one)
    return tuple(found)


def whole_curve(choice: Choice, probability: float, frequency: Array | None = None) -> Curve:
    """The fitted curve, with what parameters and the choice of the form leave open.

    frequency: shape (n,), Hz; None: those of the spectrum.
    """
    of_fit = curve(choice.fit, probability, frequency)
    real, loss = left_open(choice, of_fit.frequency)
    return Curve(
        of_fit.frequency, of_fit.real, np.sqrt(np.square(of_fit.real_u) + real),
        of_fit.loss, np.sqrt(np.square(of_fit.loss_u) + loss), of_fit.factor,
    )  # fmt: skip


def soil_of(choice: Choice, question: Question, soil: Soil) -> SoilAnswer:
    """The soil behind a spectrum, at the noise that the relaxation terms showed.

    Where no soil describes the band to within that noise, what is off is the mixing model, by a
    share of |eps|: then both parts count by that, or the smaller part would pull hardest.
    """
    best = choice.fit
    few = best.spectrum.thinned(POINTS)
    size = evaluate(best.form, best.vector, few.frequency)[0]
    stated = stated_noise(few)
    if stated is None:
        noise = unit_noise(best.noise_shape or MAGNITUDE, size)
    else:
        noise = np.hypot(stated, AT_BEST * np.abs(size))
    scene = Scene(
        few.frequency, question.mixing_model, question.parameters or {},
        salty_water(soil.temperature),
    )  # fmt: skip
    bands = invert(few, scene, noise, soil.temperature)
    if misfits(bands[0], best):
        unstated = replace(few, real_u=None, loss_u=None)
        bands = invert(unstated, scene, unit_noise(MAGNITUDE, size), soil.temperature)
    return SoilAnswer(tuple(bands), told_by(bands[0], soil, question.probability))


def misfits(band: Band, terms: Fit) -> bool:
    """Whether a soil leaves much more of a spectrum unexplained than relaxation terms do."""
    return band.relative_residual > max(WORSE * terms.relative_residual, NEGLIGIBLE)


def _of_soil(answer: SoilAnswer, choice: Choice, soil: Soil) -> list[Finding]:
    band = answer.bands[0]
    found = []
    if band.variant.bound:
        bound = next(told for told in answer.told if told.name == "bound_water_content")
        own = float(np.sqrt(max(bound.standard_uncertainty**2 - bound.shared**2, 0.0)))
        if bound.value < 2 * own:
            text = f"Bound water is {bound.value:.3g} m3/m3, its uncertainty {own:.2g} m3/m3"
            found.append(Finding("bound-water-not-resolved", text))
    if misfits(band, choice.fit):
        text = (
            f"The soil leaves residuals of {100 * band.relative_residual:.3g} % of |eps| where the "
            f"relaxation terms leave {100 * choice.fit.relative_residual:.3g} %"
        )
        found.append(Finding("mixing-model-misfit", text))
    if band.water_content > soil.porosity:
        text = f"The band asks for {band.water_content:.3g} m3/m3 of water in {soil.porosity:.3g}"
        found.append(Finding("wetter-than-pores", text))
    return found
