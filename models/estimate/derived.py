"""Soil properties that follow from each other have one error, wherever they are used.

Porosity from densities, or a density from the porosity: the error of the measured one moves both.
So does that of the clay what is estimated from it: surface conduction, and the saturated paste.
"""

from math import sqrt

from models.salinity.texture_defaults import CLAY, OF_CLAY, effect_of_clay
from models.soil.description import Soil


def sources_of(soil: Soil, name: str, uncertainty: float, origin: str) -> dict[str, float]:
    """What moves a parameter, by how much in its own unit, signed.

    uncertainty, origin: of the parameter, as it is used; one that is not the soil's own moves by
    itself.
    """
    if origin == soil.origins.get(name):
        value, u = soil.values, soil.uncertainties
        if origin.startswith("1 - bulk_density"):
            solid = value["particle_density"]
            return {
                "bulk_density": -u["bulk_density"] / solid,
                "particle_density": value["bulk_density"] / solid**2 * u["particle_density"],
            }
        if origin.startswith("(1 - porosity)"):
            return {
                "porosity": -u["porosity"] * value["particle_density"],
                "particle_density": (1.0 - value["porosity"]) * u["particle_density"],
            }
    if origin == CLAY and name in OF_CLAY:
        by_clay = effect_of_clay(name, soil.values["clay"], soil.uncertainties["clay"])
        return {"clay": by_clay, name: sqrt(max(uncertainty**2 - by_clay**2, 0.0))}
    return {name: uncertainty}
