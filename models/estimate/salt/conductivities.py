"""Three conductivities of each reading, with bands: bulk at 25 Cel, pore water, saturation extract.

Bands of the pore water and of the extract are those of a lognormal distribution, positive by
construction: what is left open there is a factor. That of the bulk conductivity is a normal one
restricted to what is not negative.
"""

import numpy as np

from models.estimate.salt.pore_water import PoreWater
from models.estimate.salt.salinity import Salinity
from models.estimate.sources import Sources
from models.estimate.water_content import WaterContent
from models.relation import Array
from models.salinity.saturation_extract import to_extract
from models.uncertainty.coverage import coverage_factor, shortest_interval

Columns = dict[str, Array]


def conductivities_of(
    pore: PoreWater, salinity: Salinity, through: Sources, content: WaterContent, probability: float
) -> Columns:
    """Columns of all three conductivities, S/m; NaN where an input is missing.

    through: what each source does to the water content.
    """
    columns = _bulk_at_25(pore, probability)
    value = pore.at_25()
    slope, effects = pore.sensitivities(value)
    effects = effects.plus(through, slope)
    effects.shared["pore_water_model"] = pore.own_uncertainty(value)
    with np.errstate(invalid="ignore", divide="ignore"):
        columns |= _lognormal("pore_water_conductivity", value, effects, probability)
        if salinity.paste is None or salinity.density is None:
            return columns
        density, density_u = salinity.density
        theta = content.computed
        extract = to_extract(
            value,
            water_content=theta,
            saturation_percentage=salinity.paste.value,
            bulk_density=density,
        )
        every = np.ones(theta.shape)
        paste = salinity.paste.standard_uncertainty / salinity.paste.value
        dry = Sources(
            shared={
                "bulk_density": -density_u / density * every,
                "saturation_percentage": -paste * every,
            }
        )
        effects = effects.plus(through, 1.0 / theta).plus(dry)
        columns |= _lognormal("saturation_extract_conductivity", extract, effects, probability)
    return columns


def _bulk_at_25(pore: PoreWater, probability: float) -> Columns:
    bulk, warmth = pore.inputs["bulk_conductivity"], pore.inputs["temperature"]
    factor = pore.factor(warmth)
    value = bulk * factor
    warmer = bulk * pore.factor(warmth + pore.widths["temperature"]) - value
    spread = np.square(factor * pore.widths["bulk_conductivity"]) + np.square(warmer)
    shared = value * pore.salinity.compensation.relative_uncertainty(warmth)
    total = np.sqrt(spread + np.square(shared))
    ends = shortest_interval(value, total, total, low=0.0, high=np.inf, probability=probability)
    return {
        "bulk_conductivity_25": value, "bulk_conductivity_25_u": total,
        "bulk_conductivity_25_u_shared": shared, "bulk_conductivity_25_lower": ends.lower,
        "bulk_conductivity_25_upper": ends.upper,
    }  # fmt: skip


def _lognormal(name: str, value: Array, effects: Sources, probability: float) -> Columns:
    total, shared = effects.uncertainties()
    k = coverage_factor(probability)
    known = np.where(value > 0, value, np.nan)
    return {
        name: known, f"{name}_u": known * total, f"{name}_u_shared": known * shared,
        f"{name}_lower": known * np.exp(-k * np.asarray(total)),
        f"{name}_upper": known * np.exp(k * np.asarray(total)),
    }  # fmt: skip
