"""The answer to a JSON document of readings: as JSON, or as a table of the estimates alone."""

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

import numpy as np
from fastapi.responses import Response

from models.advisories import Advice
from models.estimate import Basis, Estimates, estimate, explain
from models.estimate.beside.budget import budget
from models.estimate.beside.ensemble import Ensemble, EveryModel
from models.estimate.beside.validation import validate
from models.readings import Readings, read
from service.answers.advice import (
    advice_on_columns,
    advice_on_settings,
    in_a_header,
    remarks_of,
)
from service.answers.effort import refuse_effort
from service.errors import Unprocessable
from service.faults import Fault
from service.formats.json.estimates import encode, encode_members, laid_out, tabulate
from service.formats.json.readings import JsonReadings, decode
from service.formats.raw_records import TakenIn, take_in
from service.negotiate import VARY
from service.schemas.echo import echo_of, headers_of, units_of_answer
from service.schemas.echo_beside import (
    budget_echo,
    ensemble_echo,
    explanation_echo,
    validation_echo,
)
from service.schemas.estimates import EstimatesSettings
from service.schemas.query import basis_of, settings_of
from service.settings import Settings

JSON = "application/json"


def answer_document(document: dict[str, Any], answered: str, limits: Settings) -> Response:
    """Estimates for the readings of a document.

    answered: media type of the answer.
    """
    raw = take_in(document)
    sent = replace(decode(document.pop("readings"), most=limits.json_readings), told=raw.told)
    settings = settings_of(document)
    refuse_effort(settings, sent.count, limits.drawn_values)
    basis = basis_of(settings, (*sent.numbers, *sent.texts))
    readings = raw.with_shared(read(sent.numbers, settings.units, {}, sent.absent))
    raw.mark(readings.flags)
    if isinstance(basis, EveryModel):
        return _of_every_model(basis, readings, sent, settings, answered, raw)
    result = estimate(readings, basis)
    said = (*_advice(sent, settings, basis, result), *raw.advice)
    echo = {**echo_of(basis, settings, said), **raw.echo}
    if answered != JSON:
        return _table(result, sent, settings, answered, echo, said)
    answer = laid_out(result, sent, settings.units)
    rest = {"units": _units(answer.names, settings), **echo, **_beside(settings, readings, basis)}
    body = encode(answer, sent.shape, rest)
    return Response(body, media_type=JSON, headers={**VARY, **_counted(result)})


def _beside(settings: EstimatesSettings, readings: Readings, basis: Basis) -> dict[str, Any]:
    """What was asked for beside the estimates."""
    rest: dict[str, Any] = {}
    if settings.budget:
        rest |= budget_echo(budget(readings, basis))
    if settings.validate_first_order:
        rest |= validation_echo(validate(readings, basis))
    if settings.explain:
        rest |= explanation_echo(explain(readings, basis))
    return rest


def _of_every_model(
    basis: EveryModel,
    readings: Readings,
    sent: JsonReadings,
    settings: EstimatesSettings,
    answered: str,
    raw: TakenIn,
) -> Response:
    """All models side by side: their combination as ``estimates``, each one under ``models``."""
    _refuse_beside(settings)
    found = basis.estimate(readings)
    result = Estimates(found.columns, found.flags)
    said = (*_advice(sent, settings, basis, result), *raw.advice)
    echo = {**ensemble_echo(basis, settings, said), **raw.echo}
    if answered != JSON:
        return _table(result, sent, settings, answered, echo, said)
    answer = laid_out(result, sent, settings.units)
    rest = {"units": _units(answer.names, settings), **echo}
    body = encode(answer, sent.shape, rest)
    return Response(
        body[:-1] + b"," + encode_members(_members(found, sent, settings), sent.shape) + b"}",
        media_type=JSON,
        headers={**VARY, **_counted(result)},
    )


def _members(found: Ensemble, sent: JsonReadings, settings: EstimatesSettings) -> Mapping[str, Any]:
    """Each model's own estimates, with its share of the combination."""
    return {
        key: laid_out(member.estimates, sent, settings.units).with_weight(member.share)
        for key, member in found.members.items()
    }


def _refuse_beside(settings: EstimatesSettings) -> None:
    asked = {
        "budget": settings.budget,
        "validate": settings.validate_first_order,
        "explain": settings.explain,
    }
    faults = [
        Fault(f"{name} is about one mixing model: name it in mixing_model", f"#/{name}")
        for name, wanted in asked.items()
        if wanted
    ]
    if faults:
        raise Unprocessable("not told of all models at once", faults)


def _counted(result: Estimates) -> dict[str, str]:
    flagged = int(np.count_nonzero(result.flags))
    return {"Row-Count": str(len(result.flags)), "Flagged-Count": str(flagged)}


def _advice(
    sent: JsonReadings, settings: EstimatesSettings, basis: Basis | EveryModel, result: Estimates
) -> tuple[Advice, ...]:
    """What names and values of the request give rise to."""
    remarks = remarks_of(basis)
    remarks.note(sent.numbers, settings.units, result.flags, result.columns)
    named = (*advice_on_columns((), sent.numbers), *advice_on_settings(settings))
    return (*named, *remarks.advice(settings.units))


def _units(names: tuple[str, ...], settings: EstimatesSettings) -> dict[str, str]:
    return {**units_of_answer(names, settings.units), **settings.units}


def _table(
    result: Estimates,
    sent: JsonReadings,
    settings: EstimatesSettings,
    answered: str,
    echo: Mapping[str, Any],
    said: Sequence[Advice],
) -> Response:
    """The estimates as a table; what a table cannot say stands in headers."""
    if settings.budget or settings.validate_first_order or settings.explain:
        detail = "budget, validate and explain are answered in JSON: send Accept: application/json"
        raise Unprocessable(detail, [Fault(detail, "Accept")])
    answer = laid_out(result, sent, settings.units)
    headers = {
        **VARY,
        **headers_of(echo, units_of_answer(answer.names, settings.units)),
        **in_a_header("Remarks", [one.text for one in said]),
        "Row-Count": str(sent.count),
        "Flagged-Count": str(int((result.flags != 0).sum())),
    }
    return Response(tabulate(answer, answered), media_type=answered, headers=headers)
