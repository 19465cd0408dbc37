"""Ayers and Westcot (1985): the water that must pass below the roots to keep salt where it is.

Conductivities at 25 Cel, S/m: of the water applied, and of the saturated paste extract. Another
method gives another answer: the time-integrated chart of ASCE Manual 71 gives 0.2 where equation 9
gives 0.32 (tomato, water of 3 dS/m).
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.decisions.outcome import Known, Outcome, carried, outcome_by_draws
from models.decisions.yield_response import conductivity_at
from models.relation import Array, Citation, column

SOURCE = Citation(
    authors="Ayers, R. S.; Westcot, D. W.",
    year=1985,
    title="Water quality for agriculture",
    where="FAO Irrigation and Drainage Paper 29, revision 1, section 2.4",
    equation="LR = ECw / (5 ECe - ECw) (9); AW = ET / (1 - LR) (7)",
    note="equation 9 from a secondary copy; equation 7 and the extraction pattern from memory",
)
CONVENTIONAL, FREQUENT = "conventional", "high-frequency"
METHODS = (CONVENTIONAL, FREQUENT)
"""Equation 9 with the extract the crop is to have; or, for drip and daily sprinkling,
ECw / (2 max ECe) with the extract at which it yields nothing."""
WHOLE_YIELD_FROM = 0.15
"""S/m: with a more saline water the target is the extract of the whole yield, else of 90 %."""
DIGITS = 12
"""Of a conductivity in S/m that is compared: 1.5 dS/m is on the edge, not beyond it."""
USUAL_YIELD = 0.9
UPTAKE = (0.4, 0.3, 0.2, 0.1)
"""Share of the water taken up in each quarter of the root zone, from the top."""


@dataclass(frozen=True, slots=True)
class Leaching:
    """One row per question, shape (n,)."""

    requirement: Outcome
    """Share of the applied water that is to pass below the roots; NaN where ``too_saline``."""
    too_saline: NDArray[np.bool_]
    """The water is too saline for this target: no share of it would do."""


def requirement(
    water_conductivity: ArrayLike, extract_conductivity: ArrayLike, *, method: str = CONVENTIONAL
) -> Array:
    """Leaching requirement, elementwise; NaN where no share below 1 would do."""
    water, extract = column(water_conductivity), column(extract_conductivity)
    room = 5.0 * extract - water if method == CONVENTIONAL else 2.0 * extract
    with np.errstate(invalid="ignore", divide="ignore"):
        share = water / room
    return np.where((room > 0) & (share < 1.0), share, np.nan)


def target_yield(water_conductivity: ArrayLike, *, method: str = CONVENTIONAL) -> Array:
    """Relative yield at the extract conductivity that the method aims at, elementwise."""
    if method == FREQUENT:
        return np.zeros_like(column(water_conductivity))
    saline = np.round(column(water_conductivity), DIGITS) > WHOLE_YIELD_FROM
    return np.where(saline, 1.0, USUAL_YIELD)


def target_conductivity(
    relative_yield: Known, threshold: Known, slope: Known
) -> tuple[Array, Array]:
    """Extract conductivity at a relative yield by the line, with its standard uncertainty, S/m."""
    given = {"relative": relative_yield, "threshold": threshold, "slope": slope}
    return carried(conductivity_at, given)


def require_leaching(
    water_conductivity: Known,
    extract_conductivity: Known,
    *,
    method: str = CONVENTIONAL,
    probability: float = 0.95,
) -> Leaching:
    """Leaching requirement with its band, elementwise.

    extract_conductivity: the target; with ``high-frequency`` that at which nothing is left.
    """
    given = {"water": water_conductivity, "extract": extract_conductivity}

    def share(water: Array, extract: Array) -> Array:
        return requirement(water, extract, method=method)

    found = outcome_by_draws(share, given, low=0.0, high=1.0, probability=probability)
    water, extract = (
        column(known[0] if isinstance(known, tuple) else known) for known in given.values()
    )
    numbers = np.isfinite(water) & np.isfinite(extract)
    return Leaching(found, np.isnan(found.value) & numbers)


def applied_water(
    evapotranspiration: Known, leaching_requirement: Known, *, probability: float = 0.95
) -> Outcome:
    """Water to apply so that the crop has its own and the rest leaches (Eq. 7), elementwise, m."""
    given = {"used": evapotranspiration, "share": leaching_requirement}
    return outcome_by_draws(_applied, given, low=0.0, probability=probability)


def water_for(
    evapotranspiration: Known,
    water_conductivity: Known,
    extract_conductivity: Known,
    *,
    method: str = CONVENTIONAL,
    probability: float = 0.95,
) -> Outcome:
    """The same from what the requirement rests on, so that its errors go through once, m."""
    given = {
        "used": evapotranspiration,
        "water": water_conductivity,
        "extract": extract_conductivity,
    }

    def applied(used: Array, water: Array, extract: Array) -> Array:
        return _applied(used, requirement(water, extract, method=method))

    return outcome_by_draws(applied, given, low=0.0, probability=probability)


def _applied(used: Array, share: Array) -> Array:
    return np.where(share < 1.0, used / np.where(share < 1.0, 1.0 - share, 1.0), np.nan)


@dataclass(frozen=True, slots=True)
class LongUse:
    """What a root zone comes to after long use of a water, shape (n,)."""

    soil_water: tuple[Outcome, ...]
    """At the top of each quarter and at the bottom, S/m; the last is that of the drainage."""
    extract: Outcome
    """Mean of the saturation extract, S/m."""
    factor: Outcome
    """That over the conductivity of the water."""


def after_long_use(
    water_conductivity: Known,
    extract_conductivity: Known,
    leaching_fraction: Known,
    *,
    method: str = CONVENTIONAL,
    probability: float = 0.95,
) -> LongUse:
    """Salt down the root zone with its bands, elementwise.

    leaching_fraction: NaN where it is the requirement for ``extract_conductivity``.
    """
    given = {
        "water": water_conductivity,
        "extract": extract_conductivity,
        "share": leaching_fraction,
    }

    def told(measurand: Callable[[Array, Array], Array]) -> Outcome:
        def of_share(water: Array, extract: Array, share: Array) -> Array:
            needed = requirement(water, extract, method=method)
            passing = np.where(np.isnan(share), needed, share)
            return measurand(water, np.where(passing > 0.0, passing, np.nan))

        return outcome_by_draws(of_share, given, low=0.0, probability=probability)

    def node(place: int) -> Outcome:
        return told(lambda water, share: root_zone_profile(water, share)[..., place])

    return LongUse(
        tuple(node(place) for place in range(len(UPTAKE) + 1)),
        told(lambda water, share: water * concentration_factor(share)),
        told(lambda _, share: concentration_factor(share)),
    )


def root_zone_profile(water_conductivity: ArrayLike, leaching_fraction: ArrayLike) -> Array:
    """Conductivity of the soil water at the top of each quarter and at the bottom, S/m.

    Shape (..., 5). Salt stays while roots take up 40, 30, 20 and 10 % of the water, quarter by
    quarter.
    """
    water, share = column(water_conductivity), column(leaching_fraction)
    taken = np.round(np.concatenate([[0.0], np.cumsum(UPTAKE)]), DIGITS)  # ends with 1
    left = 1.0 - taken * (1.0 - share[..., np.newaxis])
    with np.errstate(divide="ignore", invalid="ignore"):
        return water[..., np.newaxis] / left


def concentration_factor(leaching_fraction: ArrayLike) -> Array:
    """Mean extract conductivity of the root zone over that of the water, elementwise.

    The extract is taken as half as saline as the soil water.
    """
    return 0.5 * root_zone_profile(1.0, leaching_fraction).mean(axis=-1)
