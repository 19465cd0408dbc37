"""Volumetric water content of samples whose water was weighed: theta = w rho_b / rho_w."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.decisions.soil_state import WATER_DENSITY
from models.relation import Array


@dataclass(frozen=True, slots=True, eq=False)
class Waters:
    """Water as it was measured, one row a sample, shape (n,); SI."""

    gravimetric: NDArray[np.bool_]
    """Whether the water content is of dry mass; else it is volumetric already."""
    water: Array
    water_u: Array
    density: Array
    """Dry density of the sample itself; NaN: that of all."""
    density_u: Array
    density_of_all: float
    density_of_all_u: float
    """Shared by all samples without a density of their own."""
    shared: Mapping[str, float]
    """Standard uncertainty of errors that all samples share: ``water_content``,
    ``gravimetric_water_content`` and ``bulk_density``."""


@dataclass(frozen=True, slots=True, eq=False)
class Volumetric:
    """Volumetric water content, shape (n,), m3/m3."""

    water_content: Array
    water_content_u: Array
    """Of each sample's own errors."""
    shared: Mapping[str, Array]
    """By how much one standard uncertainty of each shared error moves the samples."""


def volumetric(told: Waters) -> Volumetric:
    """Volumetric water content, its own uncertainty, and what all samples share.

    u(theta)^2 = (rho u(w))^2 + (w u(rho))^2, over the density of water; a density that is the same
    number for all samples moves all of them at once.
    """
    of_all = np.isnan(told.density) & told.gravimetric
    density = np.where(np.isnan(told.density), told.density_of_all, told.density)
    per_mass = np.where(told.gravimetric, density / WATER_DENSITY, 1.0)
    per_density = np.where(told.gravimetric, told.water / WATER_DENSITY, 0.0)
    own_density = np.where(of_all | ~told.gravimetric, 0.0, told.density_u)
    u = np.hypot(per_mass * told.water_u, per_density * own_density)
    one = np.where(of_all, told.density_of_all_u, 0.0)
    shared = {
        "water_content": np.where(told.gravimetric, 0.0, told.shared["water_content"]),
        "gravimetric_water_content": np.where(
            told.gravimetric, per_mass * told.shared["gravimetric_water_content"], 0.0
        ),
        "bulk_density": per_density * np.hypot(one, told.shared["bulk_density"]),
    }
    moving = {name: moved for name, moved in shared.items() if moved.any()}
    return Volumetric(per_mass * told.water, u, moving)
