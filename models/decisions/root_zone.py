"""The root zone: water in it, what is missing to field capacity, and how sure that is."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.decisions import allen_1998 as fao
from models.decisions.outcome import Known, Outcome, carried, exceedance, outcome, within
from models.errors import Complaint, ParameterError
from models.relation import Array, column

TOLD_APART = 0.95
"""Probability from which a depletion is told apart from the readily available water."""
EFFICIENCIES: Mapping[str, float] = {"surface": 0.60, "sprinkler": 0.75, "drip": 0.90}
"""Indicative: Brouwer, Prins and Heibloem (1989), FAO Irrigation Water Management Training Manual
4, from a secondary copy."""


@dataclass(frozen=True, slots=True, kw_only=True)
class RootZone:
    """What is known of a root zone; each an exact value or (value, standard uncertainty)."""

    water_content: Known
    """Mean over the root depth, m3/m3."""
    field_capacity: Known
    wilting_point: Known
    root_depth: Known
    """m."""
    depletion_fraction: Known
    """p: the share of the available water that is readily available."""
    efficiency: ArrayLike = 1.0
    """Share of the applied water that gets to the root zone, above 0."""
    leaching_requirement: ArrayLike = 0.0
    """Share of the water that is to pass below it, below 1."""
    crop_evapotranspiration: ArrayLike | None = None
    """m/s, counted as exact; None: no time is told."""
    application_limit: ArrayLike = np.inf
    """m: the most that is applied at once."""
    probability: float = 0.95


@dataclass(frozen=True, slots=True)
class Depletion:
    """Depths of water in m, one row per root zone."""

    storage: Outcome
    """Water in the root zone."""
    total_available_water: Outcome
    readily_available_water: Outcome
    depletion: Outcome
    """Missing to field capacity, between 0 and the total available water: the net refill depth."""
    gross_refill: Outcome
    """The same with losses and leaching."""
    application: Outcome
    """The gross refill, at most the limit."""
    stress_coefficient: Outcome
    exceedance: Array
    """Probability that the depletion is above the readily available water."""
    told_apart: NDArray[np.bool_]
    """Whether that is at most 0.05 or at least 0.95."""
    above_field_capacity: NDArray[np.bool_]
    """The water content is above field capacity: water drains, nothing is missing."""
    below_wilting_point: NDArray[np.bool_]
    time_left: Outcome | None
    """s, until the readily available water is used up, without rain; 0 where it is."""


def deplete(zone: RootZone) -> Depletion:
    """Available water, depletion, refill and stress of root zones, with bands.

    What enters two numbers enters their comparison once: field capacity is in the depletion and in
    the available water, and the probability of exceedance knows it. The inputs themselves count as
    independent: a field capacity read by the same probe errs with the water content, which makes
    the true band of the depletion narrower than the one told.
    Raises ParameterError, with the row of each complaint, when field capacity is not above the
    wilting point, the root depth or the limit is not positive, a fraction or the efficiency is not
    one, or the leaching requirement is not below 1.
    """
    _check(zone)
    given = {
        "theta": zone.water_content,
        "fc": zone.field_capacity,
        "wp": zone.wilting_point,
        "zr": zone.root_depth,
        "p": zone.depletion_fraction,
    }
    probability = zone.probability

    def missing(**at: Array) -> Array:
        return fao.depletion(at["theta"], at["fc"], at["zr"])

    def total(**at: Array) -> Array:
        return fao.total_available_water(at["fc"], at["wp"], at["zr"])

    def readily(**at: Array) -> Array:
        return fao.readily_available_water(total(**at), at["p"])

    def beyond(**at: Array) -> Array:
        return missing(**at) - readily(**at)

    def stress(**at: Array) -> Array:
        return fao.stress_coefficient(missing(**at), total(**at), at["p"])

    depleted, depleted_u = carried(missing, given)
    whole = outcome(total, given, low=0.0, probability=probability)
    factor = 1.0 / (column(zone.efficiency) * (1.0 - column(zone.leaching_requirement)))
    net = _at_most(depleted, depleted_u, whole, probability=probability)
    gross = _times(net, factor)
    excess = exceedance(*carried(beyond, given))
    return Depletion(
        storage=outcome(
            lambda **at: at["theta"] * at["zr"], given, low=0.0, probability=probability
        ),
        total_available_water=whole,
        readily_available_water=outcome(readily, given, low=0.0, probability=probability),
        depletion=net,
        gross_refill=gross,
        application=_cut(gross, column(zone.application_limit)),
        stress_coefficient=outcome(stress, given, low=0.0, high=1.0, probability=probability),
        exceedance=excess,
        told_apart=(excess >= TOLD_APART) | (excess <= 1.0 - TOLD_APART),
        above_field_capacity=depleted < 0.0,
        below_wilting_point=depleted > whole.value,
        time_left=_time_left(zone, carried(beyond, given)),
    )  # fmt: skip


def _times(found: Outcome, factor: Array) -> Outcome:
    return Outcome(
        found.value * factor,
        found.standard_uncertainty * factor,
        found.lower * factor,
        found.upper * factor,
    )


def _at_most(value: Array, u: Array, whole: Outcome, *, probability: float) -> Outcome:
    """From 0 to the whole, which is uncertain itself: each end is the lesser of both."""
    free = within(value, u, low=0.0, probability=probability)
    held = within(value, u, low=0.0, high=whole.value, probability=probability)
    own, other = held.standard_uncertainty, whole.standard_uncertainty
    return Outcome(
        held.value,
        np.where(value > whole.value, np.maximum(own, other), own),
        np.minimum(free.lower, whole.lower),
        np.minimum(free.upper, whole.upper),
    )


def _cut(found: Outcome, limit: Array) -> Outcome:
    """At most an exact limit."""
    sure = found.lower >= limit
    return Outcome(
        np.minimum(found.value, limit),
        np.where(sure, 0.0, found.standard_uncertainty),
        np.minimum(found.lower, limit),
        np.minimum(found.upper, limit),
    )


def _time_left(zone: RootZone, beyond: tuple[Array, Array]) -> Outcome | None:
    if zone.crop_evapotranspiration is None:
        return None
    rate = column(zone.crop_evapotranspiration)
    value, u = beyond
    return within(-value / rate, u / rate, low=0.0, probability=zone.probability)


def _check(zone: RootZone) -> None:
    """Raise with every row that cannot be; the place of a complaint is (row, name)."""
    parts = (zone.field_capacity, zone.wilting_point, zone.root_depth, zone.depletion_fraction,
             zone.efficiency, zone.leaching_requirement, zone.crop_evapotranspiration,
             zone.application_limit)  # fmt: skip
    values = (known[0] if isinstance(known, tuple) else known for known in parts)
    fc, wp, zr, p, share, leach, drawn, limit = np.broadcast_arrays(
        *(np.atleast_1d(column(np.nan if value is None else value)) for value in values)
    )
    wrong = {
        "field_capacity": (fc <= wp, "takes field_capacity above wilting_point", fc),
        "root_depth": (zr <= 0, "takes root_depth above 0 m", zr),
        "depletion_fraction": ((p <= 0) | (p >= 1), "takes depletion_fraction between 0 and 1", p),
        "efficiency": ((share <= 0) | (share > 1), "takes efficiency above 0, at most 1", share),
        "leaching_requirement": ((leach < 0) | (leach >= 1),
                                 "takes leaching_requirement from 0 to below 1", leach),
        "crop_evapotranspiration": (drawn <= 0, "takes crop_evapotranspiration above 0", drawn),
        "application_limit": (limit <= 0, "takes application_limit above 0", limit),
    }  # fmt: skip
    complaints = [
        Complaint(name, f"{detail}, found {found[row]:g}", (str(row), name))
        for name, (bad, detail, found) in wrong.items()
        for row in np.flatnonzero(bad)
    ]
    if complaints:
        raise ParameterError("root-zone", complaints)
