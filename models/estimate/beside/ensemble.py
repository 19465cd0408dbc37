"""Every mixing model that can answer, side by side, and what they say together.

A model's weight is the inverse square of its own uncertainty at that reading, which grows outside
its range; a model whose declared range does not hold the reading is shown and weighs nothing. The
combined variance is the weighted mean of the models' variances plus the weighted spread between
them: the spread is an error all readings of this soil share.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from models.advisories import Advice, advise
from models.errors import Complaint, ModelError, ParameterError
from models.estimate.basis import Basis, Query, prepare
from models.estimate.choice import suits_soil
from models.estimate.pipeline import Estimates, estimate
from models.estimate.salt.salinity import SalinityQuery
from models.estimate.water_content import most_water
from models.flags import BIT, Flags
from models.mixing import MIXING_MODELS
from models.numerics.added import added
from models.quantity import band_names
from models.readings import Readings
from models.relation import Array
from models.uncertainty.coverage import shortest_interval

OUTSIDE = BIT["outside-model-range"] | BIT["inconsistent"] | BIT["outside-water-range"]
"""Any of these takes a model's weight away;"""
LEANING = BIT["low-frequency"]
"""this one only where another model does without it: its band reaches down for what it means."""
TWICE = {"power-law": "crim", "sihvola": "bruggeman"}
"""Models that are another one, to the digit, at their defaults: one of both counts."""


@dataclass(frozen=True, slots=True)
class Member:
    """One model's answer, and its share of the combination at each reading."""

    estimates: Estimates
    share: Array


@dataclass(frozen=True, slots=True)
class Ensemble:
    """All members, and their combination; shape (n,), SI."""

    members: Mapping[str, Member]
    columns: Mapping[str, Array]
    """Water content with its band, and ``model_spread``: standard deviation between the models
    that have weight."""
    flags: Flags
    """What all members say of a reading, and that none has weight where that is so."""


COLUMNS = (*band_names("water_content"), "model_spread")

SAID_ONCE = frozenset(
    {
        "indirect-measurement",
        "numbers-not-verdicts",
        "generic-equation",
        "texture-defaults",
        "frequency-assumed",
        "temperature-assumed",
        "porosity-disagrees",
        "no-uncertainty-stated",
    }
)


@dataclass(frozen=True, slots=True)
class EveryModel:
    """A query, bound to every mixing model that has what it needs."""

    query: Query
    bases: Mapping[str, Basis]
    silent: Mapping[str, str]
    """Models that cannot answer, and why."""

    @property
    def advice(self) -> tuple[Advice, ...]:
        """What the members' answers must be read with, said once."""
        fullest: dict[str, Advice] = {}
        for basis in self.bases.values():
            for said in basis.advice:
                known = fullest.get(said.code)
                if said.code in SAID_ONCE and (known is None or len(known.text) < len(said.text)):
                    fullest[said.code] = said
        if "bulk_conductivity" in self.query.columns or self.query.salinity.model is not None:
            fullest["all-without-salt"] = advise("all-without-salt")
        return tuple(fullest.values())

    def estimate(self, readings: Readings) -> Ensemble:
        """Every model's estimates, and their combination."""
        found = {key: estimate(readings, basis) for key, basis in self.bases.items()}
        weights = np.array([self._weight(key, found[key]) for key in self.bases])
        leaning = np.array([(each.flags & LEANING) != 0 for each in found.values()])
        straight = np.where(leaning, 0.0, weights)
        weights = np.where(added(straight) > 0, straight, weights)
        total = added(weights)
        shares = np.divide(weights, total, out=np.zeros_like(weights), where=total > 0)
        members = {
            key: Member(estimates, share)
            for (key, estimates), share in zip(found.items(), shares, strict=True)
        }
        flags = np.array([estimates.flags for estimates in found.values()])
        heard = total > 0
        common: Flags = np.bitwise_and.reduce(flags, axis=0)
        most = max(most_water(basis) for basis in self.bases.values())
        columns = _combined(members, shares, most, self.query.probability)
        common[~heard] |= BIT["no-model-in-range"]
        return Ensemble(members, columns, common)

    def _weight(self, key: str, found: Estimates) -> Array:
        """Inverse square of the model's own uncertainty where it holds; 0 elsewhere."""
        basis, u = self.bases[key], found.columns["water_content_u"]
        within = suits_soil(basis.model, basis.query.soil) and not basis.outside
        within &= TWICE.get(key) not in self.bases
        counts = within & np.isfinite(u) & (u > 0) & ((found.flags & OUTSIDE) == 0)
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.where(counts, 1.0 / np.square(u), 0.0)


def prepare_all(query: Query) -> EveryModel:
    """Bind a query to all models.

    Raises ParameterError when no model can answer.
    """
    bases: dict[str, Basis] = {}
    silent: dict[str, str] = {}
    of_water = replace(query, given={}, salinity=SalinityQuery())
    for key in MIXING_MODELS:
        try:
            bases[key] = replace(prepare(replace(of_water, model=key)), salinity=None)
        except ModelError as error:
            silent[key] = str(error)
    if not bases:
        detail = "no mixing model has what it needs: give soil.texture"
        raise ParameterError("soil", [Complaint("soil", detail, ("soil",))])
    return EveryModel(query, bases, silent)


def _combined(
    members: Mapping[str, Member], share: Array, most: float, probability: float
) -> dict[str, Array]:
    def of(name: str) -> Array:
        return np.nan_to_num(np.array([m.estimates.columns[name] for m in members.values()]))

    values, u, shared = of("water_content"), of("water_content_u"), of("water_content_u_shared")
    counted = share > 0
    known = counted.any(axis=0)
    theta = np.where(known, added(share * values), np.nan)
    between = added(share * np.square(values - theta))
    variance = added(share * np.square(u)) + between
    common = added(share * np.square(shared)) + between
    spread = np.sqrt(np.where(known, variance, np.nan))
    ends = shortest_interval(theta, spread, spread, low=0.0, high=most, probability=probability)
    count = counted.sum(axis=0)
    with np.errstate(divide="ignore", invalid="ignore"):
        mean = added(np.where(counted, values, 0.0)) / count
        apart = added(np.where(counted, np.square(values - mean), 0.0)) / (count - 1)
    return {
        "water_content": ends.peak,
        "water_content_u": spread,
        "water_content_u_shared": np.sqrt(np.where(known, common, np.nan)),
        "water_content_lower": ends.lower,
        "water_content_upper": ends.upper,
        "model_spread": np.sqrt(np.where(count > 1, apart, np.nan)),
    }
