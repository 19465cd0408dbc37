"""Water stored over a depth, from sensors at some depths, by a named rule, with its band."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from models.errors import Complaint, ParameterError
from models.relation import Array, column
from models.series.bounds import Bounds
from models.series.rules import STORAGE_RULES
from models.uncertainty.aggregation import Aggregate, weighted_sum


@dataclass(frozen=True, slots=True)
class Storage:
    """Water per area, m (1 m = 1000 mm = 1000 L/m2); one row per profile."""

    rule: str
    """Key of ``STORAGE_RULES``."""
    value: Array
    """NaN where a sensor that counts has no number."""
    standard_uncertainty: Array
    shared: Array
    """The part of it that all sensors share: it adds up in full."""
    lower: Array
    upper: Array
    depth: Array
    """Of the sensors, m, from the top down."""
    thickness: Array
    """m of soil that each of them stands for; they add up to ``reached``."""
    by_sensor: Array
    """m of water in each of those, shape (..., sensors)."""
    reached: float
    """m, how far down the sum goes: not below the deepest sensor."""
    coverage_fraction: float
    """Of the depth that was asked for."""


@dataclass(frozen=True, slots=True)
class Profile:
    """Sensors of one place, at one time or at several."""

    depth: ArrayLike
    """m, shape (d,), in any order, all different."""
    water_content: ArrayLike
    """m3/m3, shape (d,), or (t, d): one row per time."""
    standard_uncertainty: ArrayLike
    """Both parts together; like the water content, or to be broadcast to it."""
    shared: ArrayLike
    """The part of it that sensors with the same source share."""
    sources: ArrayLike | None = None
    """Who shares an error with whom, 0, 1, 2, ..., shape (d,); None: all sensors do."""


def store_water(
    profile: Profile,
    *,
    to_depth: float,
    rule: str = "layer",
    high: float = 1.0,
    probability: float = 0.95,
) -> Storage:
    """Water between the surface and a depth.

    high: m3/m3, the most that is physically possible. probability: of the band.

    The band holds the sensors' uncertainty, not what the soil does between them: compare the rules.
    Raises UnknownName for a rule that is none; ParameterError when depths repeat or are above the
    surface, the depth asked for is not below it, or a shared part exceeds the whole.
    """
    sensors = np.atleast_1d(column(profile.depth))
    thickness = layers_of(sensors, to_depth=to_depth, rule=rule)
    content = column(profile.water_content)
    if content.ndim not in {1, 2} or content.shape[-1] != sensors.size:
        detail = f"needs one for each of {sensors.size} sensors, found shape {content.shape}"
        raise ParameterError("storage", [Complaint("water_content", detail)])
    found = _summed(profile, content, thickness)
    reached = min(to_depth, float(sensors.max()))
    u = np.where(np.isnan(found.value), np.nan, found.standard_uncertainty)
    band = Bounds(0.0, high * reached, probability).band(found.value, u)
    order = np.argsort(sensors)
    return Storage(
        rule=rule,
        value=found.value,
        standard_uncertainty=u,
        shared=np.where(np.isnan(u), np.nan, found.shared),
        lower=band.lower,
        upper=band.upper,
        depth=sensors[order],
        thickness=thickness[order],
        by_sensor=(content * thickness)[..., order],
        reached=reached,
        coverage_fraction=reached / to_depth,
    )


def _summed(profile: Profile, content: Array, thickness: Array) -> Aggregate:
    """Sums over the sensors that count, from the top down, one per profile."""
    order = np.argsort(column(profile.depth).ravel())
    counts = order[thickness[order] > 0]
    profiles = content.size // thickness.size

    def flat(part: ArrayLike) -> Array:
        return np.broadcast_to(column(part), content.shape)[..., counts].ravel()

    sources = 0 if profile.sources is None else np.asarray(profile.sources)
    return weighted_sum(
        flat(content),
        flat(profile.standard_uncertainty),
        flat(profile.shared),
        weights=flat(thickness),
        groups=np.repeat(np.arange(profiles), counts.size),
        sources=np.broadcast_to(sources, content.shape)[..., counts].ravel(),
    )


def layers_of(depth: ArrayLike, *, to_depth: float, rule: str = "layer") -> Array:
    """Thickness of soil that each sensor stands for, m, shape (d,), in the order of the sensors.

    Raises as ``store_water``.
    """
    sensors = np.atleast_1d(column(depth))
    _check(sensors, to_depth)
    order = np.argsort(sensors)
    z = sensors[order]
    thickness = np.empty(z.shape)
    if STORAGE_RULES[rule].key == "layer":
        edges = np.concatenate([[0.0], 0.5 * (z[1:] + z[:-1]), [z[-1]]])
        thickness[order] = np.diff(np.minimum(edges, to_depth))
    else:
        thickness[order] = _hats(z, min(to_depth, float(z[-1])))
    return thickness


def _hats(z: Array, reached: float) -> Array:
    """Integral of each sensor's share of the line, from the surface down to ``reached``."""
    top = np.concatenate([[0.0], z[:-1]])
    height = z - top
    inside = np.clip(reached - top, 0.0, height)
    with np.errstate(invalid="ignore", divide="ignore"):
        rising = np.where(height > 0, np.square(inside) / (2.0 * height), 0.0)
    rising[0] = inside[0]
    falling = np.append((inside - rising)[1:], 0.0)
    return rising + falling


def _check(sensors: Array, to_depth: float) -> None:
    complaints = []
    if sensors.ndim != 1 or not sensors.size or not np.all(sensors >= 0):
        complaints.append(Complaint("depth", "needs the depth of each sensor, m, at least 0"))
    elif np.unique(sensors).size < sensors.size:
        complaints.append(Complaint("depth", "two sensors are at one depth: which counts?"))
    if not to_depth > 0 or not np.isfinite(to_depth):
        detail = f"takes to_depth above 0 m, found {to_depth:g}"
        complaints.append(Complaint("to_depth", detail))
    if complaints:
        raise ParameterError("storage", complaints)
