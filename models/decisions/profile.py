"""Water and salt of a root zone, from sensors at some depths."""

from dataclasses import dataclass

import numpy as np

from models.decisions.outcome import Outcome, within
from models.errors import Complaint, ParameterError
from models.relation import Array, column
from models.series.storage import layers_of
from models.uncertainty.aggregation import weighted_sum

SALT_OF_CONDUCTIVITY = 6.4
"""kg/m3 of dissolved salt for 1 S/m: 640 mg/L for 1 dS/m, a common rule."""
SALT_OF_CONDUCTIVITY_U = 0.20 * SALT_OF_CONDUCTIVITY / float(np.sqrt(3.0))
"""The mix of ions moves it by 20 % either way: a rectangle."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Sensors:
    """Sensors of one place, shape (d,) each, SI; NaN where one has no number."""

    depth: Array
    water_content: Array
    water_content_u: Array
    """Both parts together."""
    water_content_shared: Array
    """The part of it that all of them share."""
    pore_water_conductivity: Array
    pore_water_conductivity_u: Array
    temperature: Array


@dataclass(frozen=True, slots=True)
class Profile:
    """What the sensors say of the soil from the surface down to ``reached``."""

    sensors: Sensors
    """From the top down."""
    thickness: Array
    """m of soil that each of them stands for."""
    reached: float
    """m."""
    coverage_fraction: float
    """Of the depth of the root zone."""
    water_content: float
    """Mean over ``reached``, m3/m3; NaN where a sensor that counts has no number."""
    water_content_u: float
    frozen: bool
    """Whether a sensor that counts was at or below 0 Cel."""

    def storage(self, *, probability: float) -> Outcome:
        """Water down to ``reached``, m, shape (1,)."""
        value, u = self.water_content * self.reached, self.water_content_u * self.reached
        return _one(value, u, probability)

    @property
    def by_sensor(self) -> Array:
        """Water in the layer of each sensor, m."""
        return self.sensors.water_content * self.thickness

    def wetter_than(self, porosity: float, *, probability: float) -> bool:
        """Whether a sensor that counts shows more water than pores."""
        counts, sensors = self.thickness > 0, self.sensors
        content, u = sensors.water_content[counts], sensors.water_content_u[counts]
        return wetter_than(porosity, content, u, probability=probability)

    @property
    def salty(self) -> bool:
        """Whether a sensor that counts has a conductivity of its pore water."""
        counts = self.thickness > 0
        return bool(np.any(np.isfinite(self.sensors.pore_water_conductivity[counts])))


def profile_of(sensors: Sensors, root_depth: float, *, rule: str, extended: bool) -> Profile:
    """Mean water content of a root zone, by a rule of ``models.series.STORAGE_RULES``.

    extended: the deepest sensor stands for everything below it, too; otherwise the profile ends
        there, and ``coverage_fraction`` says so.
    Raises UnknownName for a rule that is none; ParameterError when depths repeat or are above the
    surface.
    """
    order = np.argsort(sensors.depth)
    ordered = Sensors(**{name: getattr(sensors, name)[order] for name in Sensors.__slots__})
    thickness = layers_of(ordered.depth, to_depth=root_depth, rule=rule)
    if ordered.depth[0] > root_depth:
        detail = (
            f"the shallowest sensor is at {ordered.depth[0]:g} m, below the root zone of "
            f"{root_depth:g} m: give a sensor in it, or depths in m"
        )
        raise ParameterError("profile", [Complaint("depth", detail)])
    deepest = float(ordered.depth[-1])
    if extended and deepest < root_depth:
        thickness[-1] += root_depth - deepest
    reached = root_depth if extended else min(root_depth, deepest)
    counts = thickness > 0
    found = weighted_sum(
        ordered.water_content[counts],
        ordered.water_content_u[counts],
        ordered.water_content_shared[counts],
        weights=thickness[counts] / reached if reached else 0.0,
    )
    value = float(found.value[0]) if reached else np.nan
    return Profile(
        sensors=ordered,
        thickness=thickness,
        reached=reached,
        coverage_fraction=reached / root_depth,
        water_content=value,
        water_content_u=np.nan if np.isnan(value) else float(found.standard_uncertainty[0]),
        frozen=bool(np.any(ordered.temperature[counts] <= 0.0)),
    )


def wetter_than(porosity: float, water_content: Array, u: Array, *, probability: float) -> bool:
    """Whether one of the water contents is above the pores by more than its own interval."""
    lowest = within(water_content, u, probability=probability).lower
    return bool(np.any(lowest > porosity))


@dataclass(frozen=True, slots=True)
class Salt:
    """Dissolved salt of one profile, shape (1,)."""

    storage: Outcome
    """kg/m2."""
    by_sensor: Array
    """kg/m2 in the layer of each sensor, shape (d,)."""
    conductivity: Outcome
    """Of the pore water, mean by water, S/m."""


def salt_of(profile: Profile, *, probability: float) -> Salt:
    """Salt in the pore water of a profile, and its mean conductivity weighed by the water.

    The conductivities are taken to err together from sensor to sensor, as the water contents do by
    their shared part: one model made them all. Of one sensor both count as independent.
    """
    sensors, thickness = profile.sensors, profile.thickness
    counts = thickness > 0
    theta, salty = sensors.water_content[counts], sensors.pore_water_conductivity[counts]
    water = theta * thickness[counts]
    carried = float(np.sum(water * salty))
    whole = float(np.sum(water))
    mean = carried / whole if whole > 0 else np.nan
    shared = sensors.water_content_shared[counts]
    own = np.sqrt(np.maximum(np.square(sensors.water_content_u[counts]) - np.square(shared), 0.0))
    by_salt = float(np.sum(water * sensors.pore_water_conductivity_u[counts]))

    def spread(weight: Array) -> float:
        """Of the sum of weight x water content."""
        apart = np.sum(np.square(weight * own))
        return float(np.sqrt(apart + np.square(np.sum(weight * shared))))

    carried_u = np.hypot(spread(thickness[counts] * salty), by_salt)
    mean_u = np.hypot(spread(thickness[counts] * (salty - mean)), by_salt) / (whole or np.nan)
    k, k_u = SALT_OF_CONDUCTIVITY, SALT_OF_CONDUCTIVITY_U
    return Salt(
        storage=_one(k * carried, np.hypot(k * carried_u, k_u * carried), probability),
        by_sensor=k * sensors.water_content * thickness * sensors.pore_water_conductivity,
        conductivity=_one(mean, mean_u, probability),
    )


def _one(value: float, u: float, probability: float) -> Outcome:
    return within(column([value]), column([u]), low=0.0, probability=probability)
