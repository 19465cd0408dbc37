"""Conductivity of the pore water of each reading, and what every source does to it.

Water content and pore-water conductivity come from the same reading, so their errors are one: a
source is moved wherever it works, and what it does to the logarithm of the conductivity is what it
does through the water content plus what it does directly, signs kept.
"""

from collections.abc import Mapping
from functools import cached_property
from typing import Any

import numpy as np

from models.estimate.basis import Basis
from models.estimate.derived import sources_of
from models.estimate.moving import BULK, TEMPERATURE, Moving, moving, moving_permittivity
from models.estimate.permittivity import Permittivity, noise_of
from models.estimate.salt.salinity import Salinity
from models.estimate.surroundings import Surroundings
from models.estimate.water_content import WaterContent
from models.readings import Readings
from models.relation import Array
from models.salinity.complex_refractive import bulk_of_loss
from models.water import kaatze_1989

COMPENSATION = "temperature_compensation"
USUAL = 2.0
"""Coverage factor at which a floor counts."""


class PoreWater:
    """One block on its way from the bulk to the pore water; every source can be moved."""

    def __init__(
        self,
        readings: Readings,
        basis: Basis,
        salinity: Salinity,
        real: Permittivity,
        around: Surroundings,
        content: WaterContent,
    ) -> None:
        self.salinity, self.count, self.soil = salinity, readings.count, basis.query.soil
        unknown = np.full(readings.count, np.nan)
        warmth = unknown if around.temperature is None else around.temperature
        self.inputs: dict[str, Any] = {
            "bulk_conductivity": readings.columns.get("bulk_conductivity", unknown),
            "temperature": np.broadcast_to(warmth, (readings.count,)),
            "water_content": content.told,
            "real_permittivity": real.value,
            "frequency": around.frequency,
        }
        self.by_loss = "bulk_conductivity" not in readings.columns and real.loss is not None
        if self.by_loss:
            self.inputs["loss"] = real.loss
        self.widths = {
            "bulk_conductivity": noise_of(readings, "bulk_conductivity", basis.query.probe),
            "temperature": np.broadcast_to(around.temperature_u, (readings.count,)),
        }
        if self.by_loss and real.loss_u is not None:
            self.widths["loss"] = real.loss_u
        self.real, self.content = real, content

    @cached_property
    def moving(self) -> dict[str, Moving]:
        """Everything the conductivity follows from but the water content."""
        inputs, widths, bound = self.inputs, self.widths, self.salinity.bound
        factor_u = self.salinity.compensation.relative_uncertainty(inputs["temperature"])
        found = {
            "temperature": moving(inputs["temperature"], **{TEMPERATURE: widths["temperature"]}),
            "frequency": moving(inputs["frequency"]),
            "compensation": moving(1.0, **{COMPENSATION: factor_u}),
        }
        source = "loss" if self.by_loss else "bulk_conductivity"
        found[source] = moving(inputs[source], **{BULK: widths.get(source, 0.0)})
        if "real_permittivity" in self.salinity.takes:
            found["real_permittivity"] = moving_permittivity(self.real)
        return found | {
            name: moving(bound.values[name], **sources_of(self.soil, name, u, bound.origins[name]))
            for name, u in bound.uncertainties.items()
            if u > 0
        }

    @property
    def sources(self) -> tuple[str, ...]:
        """What moves the conductivity not only through the water content; in a fixed order."""
        return tuple(dict.fromkeys(name for each in self.moving.values() for name in each.by))

    def moves(self, source: str) -> bool:
        """Whether the source is uncertain in any row."""
        return any(source in each.by and np.any(each.by[source]) for each in self.moving.values())

    def factor(self, temperature: Array) -> Array:
        """From soil temperature to 25 Cel."""
        if temperature is self.inputs["temperature"]:
            return self._factor_here
        return self.salinity.compensation.factor(temperature)

    @cached_property
    def _factor_here(self) -> Array:
        return self.salinity.compensation.factor(self.inputs["temperature"])

    def at_25(self, **moved: Any) -> Array:
        """Conductivity of the pore water at 25 Cel, S/m, with some inputs or parameters moved."""
        at = self.inputs | moved
        takes = self.salinity.takes
        parameters = self.salinity.bound.values | {
            n: v for n, v in moved.items() if n in self.salinity.bound.values
        }
        parameters |= {n: at[n] for n in takes if n in at}
        if "water_loss" in takes:
            water, water_loss = kaatze_1989.parts(at["frequency"], at["temperature"])
            parameters |= {"water_permittivity": water, "water_loss": water_loss}
        to_25 = self.factor(at["temperature"])
        if "compensation" in at:
            to_25 = to_25 * at["compensation"]
        bulk = bulk_of_loss(at["loss"], **parameters) if self.by_loss else at["bulk_conductivity"]
        model = self.salinity.model
        if model.at == "25 Cel":
            return model.to_pore_water(bulk * to_25, **parameters)
        return model.to_pore_water(bulk, **parameters) * to_25

    def logarithm(self, water_content: Array, scores: Mapping[str, Any]) -> Array:
        """Of the conductivity, where sources are so many standard uncertainties off; NaN: none."""
        moved = {
            name: each.at(scores)
            for name, each in self.moving.items()
            if not scores.keys().isdisjoint(each.by)
        }
        return logarithm(self.at_25(water_content=water_content, **moved))

    def gates(self) -> Mapping[str, Any]:
        """Rows in which the answer means nothing, by slug."""
        model, at = self.salinity.model, self.inputs
        bulk = at["bulk_conductivity"]
        if model.at == "25 Cel":
            bulk = bulk * self.factor(at["temperature"])
        taken = {n: at[n] for n in self.salinity.takes if n in at}
        parameters = self.salinity.bound.values | taken | {"water_content": at["water_content"]}
        return model.gates(bulk, **parameters)

    def own_uncertainty(self, value: Array) -> Array:
        """The pore-water model's own, of the logarithm.

        Its floor is an amount, not a factor: in fresh water it reaches as far up as that amount
        does, and no decades beyond.
        """
        stated = self.salinity.query.standard_error
        if stated is not None:
            return np.full(self.count, stated)
        known = self.salinity.model.discrepancy
        share = known.relative_uncertainty(clay=self.salinity.clay, fitted=self.salinity.fitted)
        with np.errstate(invalid="ignore", divide="ignore"):
            floor = np.log1p(USUAL * known.floor / np.where(value > 0, value, np.nan)) / USUAL
        return np.maximum(share, floor)


@np.errstate(all="ignore")
def logarithm(conductivity: Array) -> Array:
    """Elementwise; NaN where there is no conductivity above zero."""
    return np.log(np.where(conductivity > 0, conductivity, np.nan))
