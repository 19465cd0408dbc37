"""What an answer to POST /v1/root-zone tells."""

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from models.advisories import Advice, advise
from models.conversion import Units
from models.decisions.advisories import say
from models.decisions.outcome import Outcome, within
from models.decisions.profile import Profile, salt_of
from models.decisions.root_zone import Depletion, deplete
from models.errors import ParameterError
from models.series.rules import STORAGE_RULES
from service.decisions.root_zone.bodies import NOUN, RootZonesBody
from service.decisions.root_zone.question import Question, frozen, question_of
from service.decisions.rows import Row, in_shape, labels, refuse, used, without_uncertainty
from service.decisions.told import advice_told, banded, converted, exact_values, number, units_told

SAME = ("storage", "total_available_water", "readily_available_water", "depletion",
        "gross_refill", "application", "stress_coefficient")  # fmt: skip
"""Numbers that have the same name in ``models.decisions.Depletion``."""
SURE = ("water_content", "field_capacity", "wilting_point", "depletion_fraction")
"""Numbers whose uncertainty the band should hold."""
TABLES = ("root_depth", "depletion_fraction")


def answer_of(body: RootZonesBody) -> dict[str, Any]:
    """The answer to a checked request, its root zones in the shape they came.

    Raises ParameterError or Unprocessable with the place of what cannot be used.
    """
    single = not isinstance(body.root_zones, list)
    bodies: Sequence[Any] = [body.root_zones] if single else body.root_zones
    question = question_of(body, bodies)
    found = _depleted(question)
    told = [{**labels(one), **_row(question, found, k, body.units)} for k, one in enumerate(bodies)]
    return {
        NOUN: in_shape(told, single=single),
        "units": units_told(told, body.units),
        "rule": {"name": body.rule, "text": STORAGE_RULES[body.rule].text},
        "coverage_probability": body.coverage_probability,
        "advisories": advice_told(_advice(question, bodies)),
    }


def _depleted(question: Question) -> Depletion:
    """What the science says; complaints with their place in the request."""
    try:
        return deplete(question.zone)
    except ParameterError as error:
        complaints = []
        for complaint in error.complaints:
            row, name = complaint.place
            place = (*question.rows[int(row)].place, name)
            complaints.append(replace(complaint, place=place))
        refuse(complaints)
        raise


def _row(question: Question, found: Depletion, k: int, units: Units) -> dict[str, Any]:
    row, profile = question.rows[k], question.profiles[k]
    probability = question.zone.probability
    told = banded({"water_content": _content(question, k)}, 0, units)
    told |= banded(_outcomes(found, row), k, units)
    comparison = _compared(found, k)
    beside: dict[str, Any] = {}
    flags = _flags(question, found, k)
    if profile is not None:
        unread = frozen(row, profile) or question.soaked[k]
        beside = _profile(profile, units, unread=unread)
        if profile.coverage_fraction < 1.0 and not unread:
            told |= banded({"storage": profile.storage(probability=probability)}, 0, units)
        if profile.salty and not unread:
            salt = salt_of(profile, probability=probability)
            told |= banded({"salt_storage": salt.storage,
                            "pore_water_conductivity": salt.conductivity}, 0, units)  # fmt: skip
            beside["profile"]["salt_storage"] = converted("salt_storage", salt.by_sensor, units)
            if np.isnan(salt.storage.value[0]):
                flags.append("no-pore-water-conductivity")
    return {**told, **comparison, **beside, "used": used(row, units), "flags": flags}


def _content(question: Question, k: int) -> Outcome:
    """Mean water content of the root zone, shape (1,)."""
    value, u = (part[k : k + 1] for part in question.water_content)
    return within(value, u, low=0.0, high=1.0, probability=question.zone.probability)


def _outcomes(found: Depletion, row: Row) -> Mapping[str, Outcome]:
    outcomes: dict[str, Outcome] = {name: getattr(found, name) for name in SAME}
    if not row.has("application_limit"):
        del outcomes["application"]
    if row.has("crop_evapotranspiration") and found.time_left is not None:
        outcomes["days_left"] = found.time_left
    return outcomes


def _compared(found: Depletion, k: int) -> dict[str, Any]:
    """How the depletion compares with the readily available water."""
    exceedance = number(found.exceedance[k])
    if exceedance is None:
        return dict.fromkeys(("exceedance_probability", "distinguishable", "compared"))
    apart = bool(found.told_apart[k])
    side = "above" if exceedance > 0.5 else "below"
    return {
        "exceedance_probability": exceedance,
        "distinguishable": apart,
        "compared": side if apart else "cannot be told apart",
    }


def _profile(profile: Profile, units: Units, *, unread: bool) -> dict[str, Any]:
    """What the sensors stand for; of each layer its water, where that was read."""
    storage = [None if unread else value
               for value in converted("storage", profile.by_sensor, units)]  # fmt: skip
    return {
        "profile": {
            "depth": converted("depth", profile.sensors.depth, units),
            "thickness": converted("depth", profile.thickness, units),
            "storage": storage,
            "reached_depth": converted("depth", np.array([profile.reached]), units)[0],
            "coverage_fraction": profile.coverage_fraction,
        }
    }


def _flags(question: Question, found: Depletion, k: int) -> list[str]:
    row, profile = question.rows[k], question.profiles[k]
    limit = row.values.get("application_limit", np.inf)
    seen = {
        "frozen-root-zone": frozen(row, profile),
        "root-zone-above-pores": question.soaked[k],
        **_of_profile(profile),
        "texture-default-limits": _by_texture(row),
        "above-field-capacity": found.above_field_capacity[k],
        "below-wilting-point": found.below_wilting_point[k],
        "efficiency-missing": not row.has("efficiency"),
        "above-application-limit": found.gross_refill.value[k] > limit,
    }
    return [flag for flag, holds in seen.items() if holds]


def _of_profile(profile: Profile | None) -> dict[str, bool]:
    if profile is None:
        return {}
    short = profile.coverage_fraction < 1.0
    return {
        "no-water-content": bool(np.isnan(profile.water_content)),
        "sensors-end-above-root-depth": short,
        "extended-below-sensors": not short and profile.sensors.depth[-1] < profile.reached,
    }


def _by_texture(row: Row) -> bool:
    limits = ("field_capacity", "wilting_point")
    return any(row.origins[name].startswith("texture") for name in limits)


def _advice(question: Question, bodies: Sequence[Any]) -> list[Advice]:
    rows = question.rows
    said = [advise("indirect-measurement"), say("refill-limits"), advise("numbers-not-verdicts")]
    if defaults := sum(map(_by_texture, rows)):
        said.append(say("limits-by-texture", count=defaults))
    tables = [name for name in TABLES
              if any(row.origins[name].startswith("crop") for row in rows)]  # fmt: skip
    crops = [row for row in rows if row.origins["root_depth"].startswith("crop")]
    if crops:
        said.append(say("crop-root-depth", count=len(crops)))
    if tables:
        said.append(say("crop-defaults", names=", ".join(tables)))
    if question.shared_by_default:
        said.append(say("shared-by-default", count=question.shared_by_default))
    if any(profile is not None and profile.salty for profile in question.profiles):
        said += [say("salt-by-conductivity"), advise("salinity-limits")]
    exact = without_uncertainty(rows, SURE)
    sensors = [sensor for one in bodies for sensor in one.profile or ()]
    for name in ("water_content", "pore_water_conductivity"):
        silent = any(getattr(sensor, name) is not None and not getattr(sensor, f"{name}_u")
                     for sensor in sensors)  # fmt: skip
        if silent and name not in exact:
            exact.insert(0, name)
    return said + exact_values(exact)
