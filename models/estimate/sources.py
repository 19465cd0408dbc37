"""Where an uncertainty comes from: signed effects of each source, by who shares it."""

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from models.estimate.derived import sources_of
from models.estimate.equation import OWN
from models.estimate.moving import BULK, TEMPERATURE, WATER_MODEL, moving_permittivity
from models.estimate.permittivity import Permittivity
from models.estimate.water_content import WaterContent
from models.relation import Array
from models.uncertainty.first_order import Input

CONDUCTION = "conduction_correction"
"""What a correction for conduction leaves open; part of the error of the equation itself."""


@dataclass(slots=True)
class Sources:
    """Signed effects of one standard uncertainty of each source, by who shares it."""

    per_reading: dict[str, Array] = field(default_factory=dict)
    shared: dict[str, Array] = field(default_factory=dict)

    def plus(self, other: "Sources", weight: Array | float = 1.0) -> "Sources":
        """These effects and ``weight`` times the other's; the same source adds up with its sign."""
        return Sources(
            _sum(self.per_reading, other.per_reading, weight),
            _sum(self.shared, other.shared, weight),
        )

    def uncertainties(self) -> tuple[Array | float, Array | float]:
        """Standard uncertainty in all, and its shared part."""
        shared = sum(np.square(effect) for effect in self.shared.values())
        per_reading = sum(np.square(effect) for effect in self.per_reading.values())
        return np.sqrt(per_reading + shared), np.sqrt(shared)


def _sum(
    one: Mapping[str, Array], other: Mapping[str, Array], weight: Array | float
) -> dict[str, Array]:
    total = dict(one)
    for name, effect in other.items():
        total[name] = total[name] + weight * effect if name in total else weight * effect
    return total


def of_water_content(
    found: Permittivity, water: Mapping[str, Input], content: WaterContent
) -> Sources:
    """What each source does to the water content, from the contributions of its inputs.

    Temperature works through the permittivity of the water, bulk conductivity through the loss.
    """
    effects = Sources()
    for name, effect in content.contributions.items():
        if name == "permittivity":
            width = np.sqrt(np.square(found.of_reading) + np.square(found.shared))
            unit = np.divide(effect, width, out=np.zeros_like(effect), where=width > 0)
            effects.per_reading["apparent_permittivity"] = unit * found.per_reading
            if np.any(found.shared):
                effects.shared[found.shared_by] = unit * found.shared
            if found.from_loss is not None:
                effects.per_reading["bulk_conductivity"] = unit * found.from_loss
        elif name == "loss":
            effects.per_reading["bulk_conductivity"] = effect
        elif name in water:
            effects = effects.plus(_of_water(effect, water[name]))
        else:
            for source, share in _shares(content, name).items():
                moved = effect * share
                known = effects.shared.get(source)
                effects.shared[source] = moved if known is None else known + moved
    return effects.plus(_of_equation(content))


def _of_equation(content: WaterContent) -> Sources:
    """What the equation leaves open itself, and what conduction does beside it."""
    parts = Sources(shared={OWN: content.of_model})
    if content.of_conduction is not None:
        parts.shared[CONDUCTION] = content.of_conduction
    return parts


def _of_water(effect: Array, given: Input) -> Sources:
    """Of one property of the water: temperature moves it, and its model leaves some of it open."""
    width = given.total
    unit = np.divide(effect, width, out=np.zeros_like(effect), where=width > 0)
    parts = Sources()
    if np.any(given.per_reading):
        parts.per_reading["temperature"] = unit * given.per_reading
    if np.any(given.shared):
        parts.shared["water_model"] = unit * given.shared
    return parts


def _shares(content: WaterContent, name: str) -> dict[str, float]:
    """What moves a parameter of the mixing model, over its standard uncertainty; signed."""
    basis = content.equation.basis
    u = basis.uncertainties[name]
    moved = sources_of(basis.query.soil, name, u, basis.origins[name])
    return {source: width / u for source, width in moved.items() if width}


def bends_of_water_content(
    found: Permittivity, water: Mapping[str, Input], content: WaterContent
) -> dict[str, Array]:
    """How far the middle over both signs of each source is off, m3/m3.

    An input that several sources move bends by the square of what each has in it.
    """
    bends: dict[str, Array] = {}
    for name, bend in content.bends.items():
        if name == "permittivity":
            moved = moving_permittivity(found).by
        elif name == "loss":
            moved = {BULK: 1.0}
        elif name in water:
            moved = {TEMPERATURE: water[name].per_reading, WATER_MODEL: water[name].shared}
        else:
            moved = _shares(content, name)
        whole = sum(np.square(width) for width in moved.values()) + np.zeros_like(bend)
        part = np.divide(bend, whole, out=np.zeros_like(bend), where=whole > 0)
        part = np.nan_to_num(part)
        for source, width in moved.items():
            if np.any(width):
                bends[source] = bends.get(source, 0.0) + part * np.square(width)
    return bends
