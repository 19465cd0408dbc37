"""What an answer to POST /v1/in-place-density tells."""

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from models.advisories import Advice, advise
from models.conversion import Units
from models.decisions.advisories import say
from models.decisions.in_place_density import InPlace, OneStep, compaction_of, one_step, two_step
from models.decisions.outcome import Outcome
from models.decisions.terms import WORDS
from models.soil.description import PARTICLE_DENSITY
from service.decisions.in_place.bodies import NOUN, PlacesBody
from service.decisions.in_place.question import (
    ADJUSTED,
    CONDUCTIVITY,
    KA,
    LARGEST,
    ONE_STEP,
    Question,
    question_of,
    too_cold_or_warm,
)
from service.decisions.rows import Row, in_shape, known, labels, used, without_uncertainty
from service.decisions.told import advice_told, banded, exact_values, number, units_told

WARMTH = "temperature"
SURE = (KA, "total_density", CONDUCTIVITY, LARGEST)


def answer_of(body: PlacesBody) -> dict[str, Any]:
    """The answer to a checked request, its places in the shape they came.

    Raises ParameterError or Unprocessable with the place of what cannot be used.
    """
    single = not isinstance(body.places, list)
    bodies: Sequence[Any] = [body.places] if single else body.places
    question = question_of(body, bodies)
    found, step = _found(question, body)
    outcomes = _outcomes(found, question, body.coverage_probability)
    told = [
        {**labels(one), **banded(outcomes, k, body.units), **_condition(step, k),
         **_used(question, k, body.units), "flags": _flags(question, found, step, k)}
        for k, one in enumerate(bodies)
    ]  # fmt: skip
    mould = None if question.mould is None else _echo(question.mould, body.units)
    largest = used(question.largest, body.units) if question.largest.values else {}
    return {
        NOUN: in_shape(told, single=single),
        "units": units_told([*told, *([mould] if mould else []), largest], body.units),
        "method": body.method,
        "coefficients": _coefficients(body),
        "mould": mould,
        **{name: value for name, value in largest.items() if name != "sources"},
        "coverage_probability": body.coverage_probability,
        "advisories": advice_told(_advice(question, body)),
    }


def _coefficients(body: PlacesBody) -> dict[str, float]:
    """As they were used, each with its uncertainty."""
    stated = body.coefficients.model_dump(exclude_none=True)
    return {name: value for name, value in stated.items() if name.removesuffix("_u") in stated}


def _found(question: Question, body: PlacesBody) -> tuple[InPlace, OneStep | None]:
    own, p = body.coefficients, body.coverage_probability
    a, b = (own.a, own.a_u), (own.b, own.b_u)
    if body.method == ONE_STEP and own.c is not None and own.d is not None:
        salty = question.conductivity(body.units)
        step = one_step(question.permittivity, salty, a=a, b=b, c=(own.c, own.c_u),
                        d=(own.d, own.d_u), probability=p)  # fmt: skip
        return step.found, step
    rows = [question.mould] if question.mould else []
    mould, total = question.mould_permittivity, known(rows, "total_density")
    return two_step(question.permittivity, mould, total, a=a, b=b, probability=p), None


def _outcomes(found: InPlace, question: Question, probability: float) -> Mapping[str, Outcome]:
    outcomes = {
        "gravimetric_water_content": found.gravimetric_water_content,
        "bulk_density": found.dry_density,
        "water_content": found.water_content,
        "total_density": found.total_density,
    }
    if question.largest.has(LARGEST):
        largest = known([question.largest], LARGEST)
        outcomes["compaction"] = compaction_of(found.dry_density, largest, probability=probability)
    return outcomes


def _condition(step: OneStep | None, k: int) -> dict[str, float | None]:
    if step is None:
        return {}
    numbers = step.condition_number
    return {"condition_number": number(numbers[k if numbers.size > 1 else 0])}


def _used(question: Question, k: int, units: Units) -> dict[str, Any]:
    """What one place rests on, and beside it what was made of that."""
    told = _echo(question.rows[k], units)
    told["sources"].pop(ADJUSTED, None)
    made = {name: told.pop(name) for name in (ADJUSTED, f"{ADJUSTED}_u") if name in told}
    return {**made, "used": told}


def _echo(row: Row, units: Units) -> dict[str, Any]:
    """As ``used``, with null for a permittivity that could not be brought to 20 Cel."""
    return {name: number(value) if isinstance(value, float) else value
            for name, value in used(row, units).items()}  # fmt: skip


def _flags(question: Question, found: InPlace, step: OneStep | None, k: int) -> list[str]:
    if too_cold_or_warm(question.rows[k]) or too_cold_or_warm(question.mould):
        return ["outside-temperature-adjustment"]
    if step is not None and step.too_alike[k if step.too_alike.size > 1 else 0]:
        return ["ill-conditioned"]
    dense, wet = (each.value[k] for each in (found.dry_density, found.water_content))
    if np.isnan(dense) or np.isnan(wet):
        return ["no-physical-answer"]
    said = ["frozen-place"] if _frozen(question.rows[k]) else []
    return said + ["more-than-the-volume"] * bool(dense / PARTICLE_DENSITY + wet > 1.0)


def _frozen(row: Row) -> bool:
    return row.has(WARMTH) and bool(row.values[WARMTH] <= 0.0)


def _advice(question: Question, body: PlacesBody) -> list[Advice]:
    said = [advise("indirect-measurement"), say("in-place-scope"), say("compaction-acceptance"),
            say("earthworks"), advise("numbers-not-verdicts")]  # fmt: skip
    if body.method == ONE_STEP:
        unit = body.units.get(CONDUCTIVITY, WORDS[CONDUCTIVITY].unit)
        said.append(say("conductivity-standard", unit=unit))
    if question.as_read:
        said.append(say("not-brought-to-20-degrees", count=question.as_read))
    rows = [*question.rows, question.largest, *([question.mould] if question.mould else [])]
    if any(row.has(ADJUSTED) for row in rows):
        said.append(say("twenty-degrees-from-memory"))
    own = body.coefficients
    exact = [name for name in "abcd"
             if getattr(own, name) is not None and not getattr(own, f"{name}_u")]  # fmt: skip
    return said + exact_values([*without_uncertainty(rows, SURE), *exact])
