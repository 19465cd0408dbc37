"""Phase relations: what water content and dry density say of the state of a soil.

Exact definitions: mass and volume of solids, water and air. Gravimetric water content is per dry
mass and may exceed 1; volumetric is per total volume.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.decisions.outcome import Known, Outcome, outcome
from models.relation import Array

WATER_DENSITY = 1000.0
"""kg/m3, as the definitions are commonly used; at 20 Cel it is 998.2."""


@dataclass(frozen=True, slots=True)
class SoilState:
    """One row per soil, shape (n,); fractions and kg/m3."""

    gravimetric_water_content: Outcome
    porosity: Outcome
    void_ratio: Outcome
    degree_of_saturation: Outcome
    """Not cut at 1: see ``contradicts``."""
    air_content: Outcome
    """Of the total volume; not cut at 0."""
    total_density: Outcome
    zero_air_density: Outcome
    """Dry density this soil would have at this gravimetric water content without air."""
    compaction: Outcome | None
    """Dry density over the largest one, where that was given."""
    contradicts: NDArray[np.bool_]
    """More water than pores: water content, dry density or particle density is wrong."""


def soil_state(
    water_content: Known,
    dry_density: Known,
    particle_density: Known,
    *,
    largest_dry_density: Known | None = None,
    probability: float = 0.95,
) -> SoilState:
    """State of soils from volumetric water content (m3/m3) and densities (kg/m3), elementwise.

    Every number comes with the uncertainty of all that enters it, each input once.
    """
    given = {"theta": water_content, "dry": dry_density, "solid": particle_density}

    def told(
        measurand: Callable[..., Array], low: float = -np.inf, high: float = np.inf
    ) -> Outcome:
        return outcome(measurand, given, low=low, high=high, probability=probability)

    air = told(_air_content)
    return SoilState(
        gravimetric_water_content=told(_gravimetric, 0.0),
        porosity=told(_porosity, 0.0, 1.0),
        void_ratio=told(_void_ratio, 0.0),
        degree_of_saturation=told(_saturation, 0.0),
        air_content=air,
        total_density=told(_total_density, 0.0),
        zero_air_density=told(_zero_air_density, 0.0),
        compaction=None if largest_dry_density is None else outcome(
            _compaction, {"dry": dry_density, "largest": largest_dry_density},
            low=0.0, probability=probability,
        ),
        contradicts=air.value < 0.0,
    )  # fmt: skip


def _gravimetric(theta: Array, dry: Array, solid: Array) -> Array:  # noqa: ARG001 - one signature
    return theta * WATER_DENSITY / dry


def _porosity(theta: Array, dry: Array, solid: Array) -> Array:  # noqa: ARG001
    return np.where(dry <= solid, 1.0 - dry / solid, np.nan)


def _void_ratio(theta: Array, dry: Array, solid: Array) -> Array:  # noqa: ARG001
    return np.where(dry <= solid, solid / dry - 1.0, np.nan)


def _saturation(theta: Array, dry: Array, solid: Array) -> Array:
    return np.where(dry < solid, theta / (1.0 - dry / solid), np.nan)


def _air_content(theta: Array, dry: Array, solid: Array) -> Array:
    return _porosity(theta, dry, solid) - theta


def _total_density(theta: Array, dry: Array, solid: Array) -> Array:  # noqa: ARG001
    return dry + theta * WATER_DENSITY


def _zero_air_density(theta: Array, dry: Array, solid: Array) -> Array:
    return solid / (1.0 + _gravimetric(theta, dry, solid) * solid / WATER_DENSITY)


def _compaction(dry: Array, largest: Array) -> Array:
    return dry / largest
