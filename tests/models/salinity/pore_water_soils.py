"""A loam at 20 Cel that every pore-water model can work in."""

from models.salinity import PORE_WATER_MODELS

LOAM = {
    "water_content": 0.30,
    "real_permittivity": 17.0,
    "temperature": 20.0,
    "frequency": 1e8,
    "water_permittivity": 80.2,
    "water_loss": 0.45,
    "clay": 0.20,
    "sand": 0.40,
    "bulk_density": 1400.0,
    "particle_density": 2650.0,
    "porosity": 0.47,
    "transmission_slope": 1.35,
    "transmission_intercept": -0.085,
    "surface_conductivity": 0.04391,
    "cation_exchange_capacity": 3.0,
}
OPTIONAL = {"rhoades-1989": {"surface_conductivity"}}
"""What a model works out by itself."""


def loam(key, **other):
    """Every parameter of the model, defaults included, with others in place of some."""
    model = PORE_WATER_MODELS[key]
    names = {parameter.name for parameter in model.parameters} - OPTIONAL.get(key, set())
    given = {name: value for name, value in LOAM.items() if name in names}
    return model.bind(given | other)
