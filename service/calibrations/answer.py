"""What an answer to POST /v1/calibrations tells."""

from collections.abc import Sequence
from typing import Any

import numpy as np

from models.advisories import Advice
from models.advisories import advise as advise_all
from models.calibration import (
    Calibration,
    Candidate,
    advice_of,
    better_form,
    calibrate,
    choose_form,
    largest_residual,
)
from models.calibration.advisories import advise
from models.conversion import Units, to_si, unit_of
from models.errors import Complaint, ParameterError
from models.relation import Array
from service.calibrations.bodies import DENSITY
from service.calibrations.question import Question, question_of
from service.calibrations.tables import (
    PERMITTIVITY,
    WATER,
    bands,
    ends,
    form,
    number,
    pairs,
    shared,
    width,
)
from service.calibrations.used import usable

GRID_STEP = 4
"""Of the grid over the range, every so many permittivities are told where none were asked for."""


def answer_of(body: Any) -> dict[str, Any]:
    """The answer to a request; body: a ``CalibrationBody``.

    Raises ModelError with the place of what cannot be used.
    """
    question = question_of(body)
    candidates: Sequence[Candidate] = ()
    if question.form is None:
        chosen, candidates = choose_form(question.pairs)
        found = chosen.calibration
    else:
        found = calibrate(question.pairs, question.form)
    probability, units = body.coverage_probability, body.units
    at, at_u = _asked(question, found)
    model, of_model = usable(found, probability)
    outside = found.range.excludes(at)
    advice = [
        *advice_of(found),
        *of_model,
        *_of_request(question, candidates, found, int(outside.sum())),
    ]
    return {
        **({"title": body.title} if body.title is not None else {}),
        "form": _named(found),
        "coefficients": _coefficients(found),
        "covariance": {
            "of": list(found.form.coefficients),
            "values": found.covariance.tolist(),
        },
        "fit": _fit(found, units),
        "range": {
            PERMITTIVITY: ends(question.pairs.permittivity, PERMITTIVITY, units),
            WATER: ends(question.pairs.water_content, WATER, units),
        },
        "mixing_model": model,
        "bands": bands(found.band(at, at_u, probability), at, at_u, outside, units),
        "pairs": pairs(question, found, units),
        **({"forms": [form(one, units) for one in candidates]} if candidates else {}),
        "shared": shared(question, units),
        "units": {name: unit_of(name, units).code for name in _told(question)},
        "coverage_probability": probability,
        "advisories": [{"code": said.code, "text": said.text} for said in advice],
    }


def _told(question: Question) -> tuple[str, ...]:
    """Quantities of the answer."""
    return (PERMITTIVITY, WATER, *((DENSITY,) if question.weighed else ()))


def _asked(question: Question, found: Calibration) -> tuple[Array, Array]:
    """Permittivities at which bands are told, and the uncertainty of the new readings, SI."""
    asked, units = question.body.at, question.body.units
    if asked is None:
        at = found.grid[::GRID_STEP]
        return at, np.full(at.size, found.typical_permittivity_u)
    at = np.array([_si(PERMITTIVITY, value, units, (PERMITTIVITY, str(place)))
                   for place, value in enumerate(asked.apparent_permittivity)])  # fmt: skip
    widths = asked.apparent_permittivity_u
    key = f"{PERMITTIVITY}_u"
    if widths is None:
        return at, np.full(at.size, found.typical_permittivity_u)
    if not isinstance(widths, list):
        return at, np.full(at.size, _si(key, widths, units, (key,)))
    if len(widths) != at.size:
        detail = f"columns must be of equal length, found {at.size} permittivities and "
        detail += f"{len(widths)} uncertainties"
        raise ParameterError("at", [Complaint(key, detail, ("at", key))])
    return at, np.array([_si(key, u, units, (key, str(place))) for place, u in enumerate(widths)])


def _si(name: str, value: float, units: Units, place: tuple[str, ...]) -> float:
    try:
        return to_si("at", {name: value}, units)[name]
    except ParameterError as error:
        wrong = [Complaint(name, one.detail, ("at", *place)) for one in error.complaints]
        raise ParameterError("at", wrong) from None


def _named(found: Calibration) -> dict[str, Any]:
    name, model = found.form.model.key, found.form.model
    degree = {"degree": found.form.size - 1} if name == "polynomial" else {}
    return {"name": name, **degree, "equation": model.equation}


def _coefficients(found: Calibration) -> dict[str, float]:
    told: dict[str, float] = {}
    columns = found.form.coefficients, found.coefficients, found.coefficients_u
    for name, value, u in zip(*columns, strict=True):
        told |= {name: float(value), f"{name}_u": float(u)}
    return told


def _fit(found: Calibration, units: Units) -> dict[str, Any]:
    """How good the curve is; water contents in the caller's unit."""
    scatter, left_out = found.scatter, found.left_out
    place = largest_residual(found)
    stated = {
        "chi_square": found.settled.chi_square,
        "reduced_chi_square": found.reduced_chi_square,
        "chi_square_probability": found.chi_square_probability,
    }
    return {
        "pairs": found.pairs.count,
        "levels": None if found.pairs.level is None else found.pairs.levels,
        "degrees_of_freedom": scatter.degrees_of_freedom,
        "weights": "stated uncertainties" if scatter.stated else "all pairs alike",
        **(stated if scatter.stated else dict.fromkeys(stated)),
        "residual_standard_deviation": width(found.residual_deviation, units),
        "soil_scatter": width(found.soil_scatter, units),
        "leave_one_out_error": width(left_out.error, units),
        "leave_one_out_bias": width(left_out.bias, units),
        "left_out": "pair" if found.pairs.level is None else "level",
        "largest_residual": {
            "pair": place + 1,
            "residual": width(float(found.left[place]), units),
            "standardised": number(float(found.standardised[place])),
        },
    }


def _of_request(
    question: Question, candidates: Sequence[Candidate], found: Calibration, outside: int
) -> list[Advice]:
    """What is said of the request itself."""
    said = []
    if candidates:
        said.append(advise("calibration-form", form=found.form.key))
    elif (other := better_form(found)) is not None:
        said.append(advise("calibration-other-form", other=other.form.key, form=found.form.key,
                           other_error=f"{other.left_out.error:.2g}",
                           error=f"{found.left_out.error:.2g}"))  # fmt: skip
    if outside:
        said.append(advise("calibration-extrapolated", count=outside,
                           low=f"{found.range.low:g}", high=f"{found.range.high:g}"))  # fmt: skip
    if question.density_exact:
        said.append(advise("calibration-density-exact"))
    return [*said, advise_all("indirect-measurement"), advise_all("numbers-not-verdicts")]
