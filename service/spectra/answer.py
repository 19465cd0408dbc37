"""What an answer to POST /v1/spectra tells: terms, curve, circuit, views, flags."""

from collections.abc import Sequence
from typing import Any

import numpy as np

from models.advisories import advise
from models.conversion import Units, from_si
from models.quantity import QUANTITIES
from models.relation import Array, ComplexArray
from models.spectrum import Interpretation
from models.spectrum.circuits.circuit import UNITS as ELEMENT_UNITS
from models.spectrum.circuits.circuit import Branch, Circuit, constants_of
from models.spectrum.description import Banded, spread
from models.spectrum.doubts import TERM as UNRESOLVED
from models.spectrum.doubts import doubts
from models.spectrum.fit import Fit
from models.spectrum.flags import Finding
from models.spectrum.form import ELECTRODE_FREQUENCY, Form
from models.spectrum.views import VIEWS, seen_as, sensitivity
from models.spectrum.weights import NOISES
from service.spectra.bodies import SpectraBody
from service.spectra.circuits import materials_echo, two_units_echo
from service.spectra.soil_answer import soil_echo
from service.sweeps.phases import suspicion

SHOWN_RUNGS = 12
"""Branches of one term that are listed one by one; longer ladders are lists of their elements."""


def answer_of(found: Interpretation, body: SpectraBody, cell: float) -> dict[str, Any]:
    """The JSON answer. cell: F, of the empty cell."""
    fit = found.choice.fit
    answer: dict[str, Any] = {
        "fit": fit_echo(found, body.units),
        "alternatives": [
            {
                **form_echo(other.fit.form),
                "parameters": len(other.fit.vector),
                "aicc_difference": other.difference,
                "weight": other.weight,
                "relative_residual": other.fit.relative_residual,
            }
            for other in found.choice.alternatives
        ],
        "curve": _curve(found, body.units),
        "circuit": circuit_echo(found.circuit, fit.form),
    }
    constants = constants_of(found.circuit)
    if pair := two_units_echo(constants, cell):
        answer["circuit"]["two_units"] = pair
    if body.geometry is not None:
        answer["circuit"]["materials"] = materials_echo(constants, body.geometry, body.units)
    if body.views:
        answer["views"] = {view: _view(fit, view, cell) for view in dict.fromkeys(body.views)}
    advisories = _said_once(found.findings) + doubted_phases(body)
    if found.soil is not None:
        answer["soil"] = soil_echo(found.soil, body.units)
        for code in ("indirect-measurement", "numbers-not-verdicts", "generic-equation"):
            said = advise(code)
            advisories.append({"code": said.code, "text": said.text})
    return {
        **answer,
        "coverage_probability": body.coverage_probability,
        "units": _units(body.units),
        "flags": list(dict.fromkeys(finding.flag for finding in found.findings)),
        "advisories": advisories,
    }


def _said_once(findings: Sequence[Finding]) -> list[dict[str, str]]:
    """An advisory for each flag, with everything that it was raised for."""
    by_flag: dict[str, list[str]] = {}
    for finding in findings:
        by_flag.setdefault(finding.flag, []).append(finding.text)
    return [{"code": flag, "text": f"{'; '.join(texts)}."} for flag, texts in by_flag.items()]


def doubted_phases(body: SpectraBody) -> list[dict[str, str]]:
    """An advisory where the phases of a spectrum may be radians."""
    sent = body.spectrum
    given = [] if sent is None else [
        one for key in VIEWS if (one := getattr(sent, key)) is not None
    ]  # fmt: skip
    return [{"code": said.code, "text": said.text} for said in suspicion(given)]


TOLD = ("frequency", "real_permittivity", "imaginary_permittivity", "static_permittivity",
        "infinite_permittivity", "relaxation_strength", "relaxation_time", "relaxation_frequency",
        "bulk_conductivity", "pore_water_conductivity", "water_content",
        "bound_water_content")  # fmt: skip


def _units(units: Units) -> dict[str, str]:
    return {name: units.get(name, QUANTITIES[name].unit) for name in TOLD}


def fit_echo(found: Interpretation, units: Units) -> dict[str, Any]:
    """The form, every parameter with its band, and how well it describes the spectrum."""
    fit = found.choice.fit
    whole: dict[str, Any] = {**form_echo(fit.form), "terms": _terms(found, units)}
    electrode: dict[str, float] = {}
    for one in found.parameters:
        if one.term is not None:
            continue
        if one.name.startswith("electrode_"):
            electrode |= banded(one, units, one.name.removeprefix("electrode_"))
        else:
            whole |= banded(one, units)
    if electrode:
        whole["electrode"] = {**electrode, "at_frequency": ELECTRODE_FREQUENCY / (2 * np.pi)}
    stated = fit.noise_shape is None
    size = 1.0 if stated else float(np.sqrt(fit.reduced_chi_square))
    return {
        **whole,
        "noise": {"stated": stated, "shape": fit.noise_shape,
                  "meaning": "as stated" if stated else NOISES[fit.noise_shape or ""],
                  "size": None if stated else size},
        "points": len(fit.spectrum.frequency),
        "degrees_of_freedom": fit.degrees_of_freedom,
        "reduced_chi_square": fit.reduced_chi_square if stated else None,
        "relative_residual": fit.relative_residual,
        "aicc": fit.aicc,
        "covariance": {
            "parameters": [f"ln {slot.label}" if slot.logarithmic else slot.label
                           for slot in fit.form.slots],
            "unit": "SI; of natural logarithms where a name begins with ln",
            "matrix": fit.covariance.tolist(),
        },
    }  # fmt: skip


def form_echo(form: Form) -> dict[str, Any]:
    """A form as the ``model`` of a request takes it."""
    return {"model": {"terms": list(form.terms), "conduction": form.conduction,
                      "electrode": form.electrode}}  # fmt: skip


def banded(one: Banded, units: Units, name: str | None = None) -> dict[str, float]:
    """A quantity with its uncertainty and ends, in the caller's unit."""
    stem = name or one.name
    values = {stem: one.value, f"{stem}_u": one.standard_uncertainty,
              f"{stem}_lower": one.lower, f"{stem}_upper": one.upper}  # fmt: skip
    if one.name not in QUANTITIES:
        return values
    return {key: float(from_si(key, value, units)) for key, value in values.items()}


def _terms(found: Interpretation, units: Units) -> list[dict[str, Any]]:
    fit = found.choice.fit
    reasons = doubts(fit)
    terms = []
    for k, kind in enumerate(fit.form.terms):
        own = [one for one in found.parameters if one.term == k]
        told: dict[str, Any] = {"kind": kind}
        for one in own:
            told |= banded(one, units)
        time = next(one for one in own if one.name == "relaxation_time")
        told |= banded(_frequency_of(time), units)
        why = [doubt for doubt in reasons if doubt.term == k]
        resolved = not any(doubt.flag == UNRESOLVED for doubt in why)
        terms.append({**told, "resolved": resolved, "reasons": [doubt.reason for doubt in why]})
    return terms


def _frequency_of(time: Banded) -> Banded:
    f = 1 / (2 * np.pi * time.value)
    low, high = (1 / (2 * np.pi * max(end, 1e-300)) for end in (time.upper, time.lower))
    share = time.standard_uncertainty / time.value
    return Banded("relaxation_frequency", f, share * f, low, high, time.term)


def _curve(found: Interpretation, units: Units) -> dict[str, Any]:
    curve, spectrum = found.curve, found.choice.fit.spectrum
    told: dict[str, Any] = {"frequency": from_si("frequency", curve.frequency, units)}
    for name, value, u in (("real_permittivity", curve.real, curve.real_u),
                           ("imaginary_permittivity", curve.loss, curve.loss_u)):  # fmt: skip
        told |= {name: value, f"{name}_u": u, f"{name}_lower": value - curve.factor * u,
                 f"{name}_upper": value + curve.factor * u}  # fmt: skip
    off = spectrum.permittivity - found.choice.fit.permittivity
    return {**told, "residual": _complex(off)}


def _view(fit: Fit, view: str, cell: float) -> dict[str, Any]:
    f = fit.spectrum.frequency
    slopes = fit.derivatives * sensitivity(view, fit.permittivity, f, cell)[:, None]
    real_u, imaginary_u = spread(fit, slopes)
    return {
        "unit": VIEWS[view].unit,
        "measured": _complex(seen_as(view, fit.spectrum.permittivity, f, cell)),
        "fitted": {**_complex(seen_as(view, fit.permittivity, f, cell)),
                   "real_u": real_u, "imaginary_u": imaginary_u},
    }  # fmt: skip


def _complex(values: ComplexArray) -> dict[str, Array]:
    return {
        "real": np.ascontiguousarray(values.real),
        "imaginary": np.ascontiguousarray(values.imag),
    }


def circuit_echo(circuit: Circuit, form: Form) -> dict[str, Any]:
    """Elements of the cell; all branches lie in parallel."""
    direct = circuit.resistance if np.isfinite(circuit.resistance) else None
    told: dict[str, Any] = {
        "cell_capacitance": circuit.cell,
        "parallel": {"capacitance": circuit.capacitance, "resistance": direct},
        "branches": [
            _of_term([branch for branch in circuit.branches if branch.term == k], kind)
            for k, kind in enumerate(form.terms)
        ],
        "units": dict(ELEMENT_UNITS),
    }
    if circuit.electrode:
        told["in_series"] = dict(circuit.electrode)
    return told


def _of_term(branches: Sequence[Branch], kind: str) -> dict[str, Any]:
    if len(branches) == 1:
        return {"of": kind, "kind": branches[0].kind, **branches[0].elements}
    listed = {name: [branch.elements[name] for branch in branches]
              for name in ("capacitance", "resistance")}  # fmt: skip
    return {"of": kind, "kind": "ladder of series-rc", **listed}
