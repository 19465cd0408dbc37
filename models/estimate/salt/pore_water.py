"""Conductivity of the pore water of each reading, and what every input does to it.

Water content and pore-water conductivity come from the same reading, so their errors are one: what
each source does to the logarithm of the conductivity is what it does through the water content plus
what it does directly, signs kept, before anything is squared.
"""

from collections.abc import Callable, Mapping
from typing import Any

import numpy as np

from models.estimate.basis import Basis
from models.estimate.permittivity import Permittivity, noise_of
from models.estimate.salt.salinity import Salinity
from models.estimate.sources import Sources
from models.estimate.surroundings import Surroundings
from models.estimate.water_content import WaterContent
from models.readings import Readings
from models.relation import Array
from models.salinity.complex_refractive import bulk_of_loss
from models.water import kaatze_1989


class PoreWater:
    """One block on its way from the bulk to the pore water; every input can be moved."""

    def __init__(
        self,
        readings: Readings,
        basis: Basis,
        salinity: Salinity,
        real: Permittivity,
        around: Surroundings,
        content: WaterContent,
    ) -> None:
        self.salinity, self.count = salinity, readings.count
        unknown = np.full(readings.count, np.nan)
        warmth = unknown if around.temperature is None else around.temperature
        self.inputs: dict[str, Any] = {
            "bulk_conductivity": readings.columns.get("bulk_conductivity", unknown),
            "temperature": np.broadcast_to(warmth, (readings.count,)),
            "water_content": content.computed,
            "real_permittivity": real.value,
            "frequency": around.frequency,
            "compensation": np.float64(1.0),
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

    def factor(self, temperature: Array) -> Array:
        """From soil temperature to 25 Cel."""
        return self.salinity.compensation.factor(temperature)

    def at_25(self, **moved: Any) -> Array:
        """Conductivity of the pore water at 25 Cel, S/m, with some inputs or parameters moved."""
        at = self.inputs | {n: v for n, v in moved.items() if n in self.inputs}
        parameters = self.salinity.bound.values | {
            n: v for n, v in moved.items() if n not in self.inputs
        }
        parameters |= {n: at[n] for n in self.salinity.takes if n in at}
        if "water_loss" in self.salinity.takes:
            water, water_loss = kaatze_1989.parts(at["frequency"], at["temperature"])
            parameters |= {"water_permittivity": water, "water_loss": water_loss}
        to_25 = self.factor(at["temperature"]) * at["compensation"]
        bulk = at["bulk_conductivity"]
        if self.by_loss:
            bulk = bulk_of_loss(at["loss"], **parameters)
        model = self.salinity.model
        if model.at == "25 Cel":
            return model.to_pore_water(bulk * to_25, **parameters)
        return model.to_pore_water(bulk, **parameters) * to_25

    def gates(self) -> Mapping[str, Any]:
        """Rows in which the answer means nothing, by slug."""
        model, at = self.salinity.model, self.inputs
        bulk = at["bulk_conductivity"]
        if model.at == "25 Cel":
            bulk = bulk * self.factor(at["temperature"])
        taken = {n: at[n] for n in self.salinity.takes if n in at}
        parameters = self.salinity.bound.values | taken | {"water_content": at["water_content"]}
        return model.gates(bulk, **parameters)

    def sensitivities(self, value: Array) -> tuple[Array, Sources]:
        """Slope of ln(sigma_w) over water content, and direct effects of everything else."""
        here = np.log(np.where(value > 0, value, np.nan))

        def effect(**steps: Array) -> Array:
            """Half the difference of the logarithm over both signs of a step."""
            return _half_difference(lambda sign: self._log(sign, steps), here)

        reach = self.content.standard_uncertainty
        slope = np.zeros(self.count)
        if "water_content" in self.salinity.takes:
            with np.errstate(invalid="ignore", divide="ignore"):
                slope = np.where(reach > 0, effect(water_content=reach) / reach, 0.0)
        direct = Sources()
        for name, width in self.widths.items():
            if np.any(width > 0):
                source = "bulk_conductivity" if name == "loss" else name
                direct.per_reading[source] = effect(**{name: width})
        if "real_permittivity" in self.salinity.takes:
            self._of_permittivity(direct, effect)
        factor_u = self.salinity.compensation.relative_uncertainty(self.inputs["temperature"])
        direct.shared["temperature_compensation"] = effect(compensation=factor_u)
        for name, u in self.salinity.bound.uncertainties.items():
            if u > 0:
                direct.shared[name] = effect(**{name: np.full(self.count, u)})
        return slope, direct

    def _of_permittivity(self, direct: Sources, effect: Callable[..., Array]) -> None:
        real = self.real
        if np.any(real.per_reading > 0):
            direct.per_reading["apparent_permittivity"] = effect(real_permittivity=real.per_reading)
        if np.any(real.shared > 0):
            direct.shared["probe_length"] = effect(real_permittivity=real.shared)
        if real.from_loss is not None and np.any(real.from_loss != 0):
            moved = effect(real_permittivity=real.from_loss)
            through_loss = Sources({"bulk_conductivity": moved})
            direct.per_reading = direct.plus(through_loss).per_reading

    def _log(self, sign: float, steps: Mapping[str, Array]) -> Array:
        moved = {
            name: (self.inputs | self.salinity.bound.values)[name] + sign * step
            for name, step in steps.items()
        }
        answer = self.at_25(**moved)
        return np.log(np.where(answer > 0, answer, np.nan))

    def own_uncertainty(self, value: Array) -> Array:
        """The pore-water model's own, of the logarithm."""
        stated = self.salinity.query.standard_error
        if stated is not None:
            return np.full(self.count, stated)
        own = self.salinity.model.discrepancy.standard_uncertainty(
            value, clay=self.salinity.clay, fitted=self.salinity.fitted
        )
        with np.errstate(invalid="ignore", divide="ignore"):
            return own / value


def _half_difference(log: Callable[[float], Array], here: Array) -> Array:
    above, below = log(1.0), log(-1.0)
    both = 0.5 * (above - below)
    astray = np.isnan(both)
    if not astray.any():
        return both
    return np.where(astray, np.where(np.isnan(above), here - below, above - here), both)
