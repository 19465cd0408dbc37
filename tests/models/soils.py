"""An invented soil that every mixing model can work in, with the uncertainty of each property."""

from models.estimate import Query, prepare
from models.mixing import MIXING_MODELS
from models.soil.description import describe

VALUES = {
    "porosity": 0.47,
    "bulk_density": 1404.5,
    "particle_density": 2650.0,
    "clay": 0.20,
    "sand": 0.40,
    "organic_matter": 0.02,
    "solid_permittivity": 4.7,
}
SPREAD = {
    "porosity": 0.015,
    "bulk_density": 40.0,
    "particle_density": 20.0,
    "clay": 0.02,
    "sand": 0.03,
    "organic_matter": 0.004,
    "solid_permittivity": 0.3,
}
ORGANIC = {**VALUES, "organic_matter": 0.6, "porosity": 0.80, "bulk_density": 330.0,
           "particle_density": 1650.0}  # fmt: skip
OWN = {
    "square-root": {"slope": 0.115, "intercept": -0.176, "slope_u": 0.002, "intercept_u": 0.005},
    "polynomial": {"constant": -0.05, "linear": 0.03, "quadratic": -5.5e-4, "cubic": 4.3e-6,
                   "constant_u": 0.005},
}  # fmt: skip


def soil_for(model):
    """The soil, organic where the model is made for organic soils."""
    return describe(None, ORGANIC if model.soils == "organic" else VALUES, SPREAD)


def basis_for(key, *, columns=("apparent_permittivity", "temperature"), probe=None, **more):
    """A basis of the model in its soil, at a frequency inside its range."""
    model = MIXING_MODELS[key]
    return prepare(
        Query(
            model=key,
            given=OWN.get(key, {}),
            soil=soil_for(model),
            probe={"frequency": frequency_for(model)} | (probe or {}),
            columns=frozenset(columns),
            **more,
        )
    )


def frequency_for(model):
    """1 GHz, or the nearest the model vouches for."""
    known = model.validity.get("frequency")
    return 1e9 if known is None else min(max(1e9, known.low), known.high)
