"""What an answer to POST /v1/leaching tells."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from models.advisories import Advice, advise
from models.conversion import Units, from_si
from models.decisions.advisories import say
from models.decisions.leaching import (
    CONVENTIONAL,
    Leaching,
    LongUse,
    after_long_use,
    require_leaching,
    water_for,
)
from models.decisions.outcome import Outcome
from models.decisions.salinity_class import (
    SOIL_SCHEMES,
    WATER_SCHEME,
    Scheme,
    class_of,
    class_probabilities,
)
from models.decisions.terms import WORDS
from models.decisions.yield_response import curved_response, relative_yield
from models.relation import Array
from service.decisions.leaching.bodies import NOUN, LeachingBody
from service.decisions.leaching.question import TARGET, TOLERANCE, rows_asked, tolerant
from service.decisions.rows import Row, in_shape, known, labels, used, without_uncertainty
from service.decisions.told import advice_told, banded, exact_values, listed, number, units_told

EQUATIONS = {
    CONVENTIONAL: "LR = ECw / (5 ECe - ECw), FAO-29 (1985), equation 9",
}
FREQUENT_EQUATION = "LR = ECw / (2 ECe), ECe at which nothing is left; FAO-29 (1985)"
WATER, EXTRACT = "water_conductivity", "saturation_extract_conductivity"
SURE = (WATER, *TOLERANCE, TARGET, "evapotranspiration", "leaching_fraction", EXTRACT)
QUARTERS = (0.0, 0.25, 0.5, 0.75, 1.0)


@dataclass(frozen=True, slots=True)
class Found:
    """What the science says of all fields, one row each."""

    leaching: Leaching
    applied: Outcome
    long_use: LongUse
    line: Outcome
    curve: Outcome


def answer_of(body: LeachingBody) -> dict[str, Any]:
    """The answer to a checked request, its fields in the shape they came.

    Raises ParameterError or Unprocessable with the place of what cannot be used.
    """
    single = not isinstance(body.fields, list)
    bodies: Sequence[Any] = [body.fields] if single else body.fields
    rows = rows_asked(body, bodies)
    found = _found(rows, body)
    scheme = SOIL_SCHEMES[body.salinity_scheme]
    told = [
        {**labels(one), **_row(found, row, k, body.units), **_classes(row, scheme, body.units),
         "used": used(row, body.units), "flags": _flags(found, row, k)}
        for k, (one, row) in enumerate(zip(bodies, rows, strict=True))
    ]  # fmt: skip
    return {
        NOUN: in_shape(told, single=single),
        "units": units_told(told, body.units),
        "method": {"name": body.method, "equation": EQUATIONS.get(body.method, FREQUENT_EQUATION)},
        "coverage_probability": body.coverage_probability,
        "advisories": advice_told(_advice(rows, bodies, scheme)),
    }


def _found(rows: Sequence[Row], body: LeachingBody) -> Found:
    water, target, extract = (known(rows, name) for name in (WATER, TARGET, EXTRACT))
    threshold, slope = (known(rows, name) for name in TOLERANCE)
    p, method = body.coverage_probability, body.method
    used_up, share = known(rows, "evapotranspiration"), known(rows, "leaching_fraction")
    return Found(
        require_leaching(water, target, method=method, probability=p),
        water_for(used_up, water, target, method=method, probability=p),
        after_long_use(water, target, share, method=method, probability=p),
        relative_yield(extract, threshold=threshold, slope=slope, probability=p),
        curved_response(extract, threshold=threshold, slope=slope, probability=p),
    )


def _row(found: Found, row: Row, k: int, units: Units) -> dict[str, Any]:
    """What was asked for of one field."""
    told: dict[str, Any] = {}
    if row.has(WATER, TARGET):
        told |= banded({"leaching_requirement": found.leaching.requirement}, k, units)
        if row.has("evapotranspiration"):
            told |= banded({"applied_water": found.applied}, k, units)
    if row.has(WATER):
        profile = listed("soil_water_conductivity", found.long_use.soil_water, k, units)
        told["root_zone_profile"] = {"share_of_root_depth": list(QUARTERS), **profile}
        told |= banded({"mean_extract_conductivity": found.long_use.extract,
                        "concentration_factor": found.long_use.factor}, k, units)  # fmt: skip
    if row.has(EXTRACT, *TOLERANCE):
        told |= banded({"relative_yield": found.line, "curved_yield": found.curve}, k, units)
    return told


def _classes(row: Row, scheme: Scheme, units: Units) -> dict[str, Any]:
    told = {}
    for name, key, by in (("water_class", WATER, WATER_SCHEME),
                          ("salinity_class", EXTRACT, scheme)):  # fmt: skip
        if row.has(key):
            told[name] = _class(row, key, by, units)
    return told


def _class(row: Row, key: str, scheme: Scheme, units: Units) -> dict[str, Any]:
    """The class of a conductivity by one scheme, with the probability of each."""
    value, u = known([row], key)
    shares = class_probabilities(value, u, scheme)[0]
    ends = [None, *_edges(scheme, key, units), None]
    return {
        "scheme": scheme.key,
        "title": scheme.title,
        "class": scheme.classes[int(class_of(value, scheme)[0])],
        "unit": units.get(key, WORDS[key].unit),
        "classes": [
            {"class": name, "from": ends[place], "below": ends[place + 1],
             "probability": number(shares[place])}
            for place, name in enumerate(scheme.classes)
        ],
    }  # fmt: skip


def _edges(scheme: Scheme, key: str, units: Units) -> list[float]:
    edges: Array = from_si(key, np.array(scheme.edges), units, WORDS)
    return [float(f"{edge:.12g}") for edge in edges]


def _flags(found: Found, row: Row, k: int) -> list[str]:
    if not row.has(WATER, TARGET):
        return []
    if found.leaching.too_saline[k]:
        return ["water-too-saline"]
    open_ended = np.isnan(found.leaching.requirement.upper[k])
    return ["water-perhaps-too-saline"] if open_ended else []


def _advice(rows: Sequence[Row], bodies: Sequence[Any], scheme: Scheme) -> list[Advice]:
    said = [advise("indirect-measurement"), say("yield-guides"), say("leaching-drainage"),
            advise("numbers-not-verdicts")]  # fmt: skip
    if any(_low(rows, scheme)):
        said.append(say("low-salinity"))
    if tolerant(rows):
        said.append(say("crop-defaults", names=", ".join(TOLERANCE)))
    if any(one.crop == "rice" for one in bodies):
        said.append(say("submerged-rice"))
    return said + exact_values(without_uncertainty(rows, SURE))


def _low(rows: Sequence[Row], scheme: Scheme) -> Iterator[bool]:
    """Whether a water or an extract is in the first class of its scheme."""
    for key, by in ((WATER, WATER_SCHEME), (EXTRACT, scheme)):
        yield bool(np.any(class_of(known(rows, key)[0], by) == 0))
