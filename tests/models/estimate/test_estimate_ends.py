"""Ends of the band against draws of the same inputs made here, over a grid of soils and probes.

Three levels of uncertainty, dry to wet, cold to warm, tight to loose: 180 scenarios a model, with
scipy's scrambled Sobol points and numpy's quantiles as the reference.
"""

import itertools

import numpy as np
import pytest
from scipy.special import ndtri
from scipy.stats import qmc

from models.estimate import Query, SalinityQuery, estimate, prepare
from models.mixing import MIXING_MODELS
from models.mixing.apparent import to_apparent
from models.readings import read
from models.soil.description import describe
from models.water import kaatze_1989

LEVELS = {"good": (0.01, 0.3, 0.01, 0.2), "typical": (0.03, 1.0, 0.02, 0.4),
          "poor": (0.06, 3.0, 0.05, 1.0)}  # fmt: skip
"""Relative permittivity, temperature, porosity, solid permittivity."""
GRID = list(itertools.product((8.0, 11.0, 16.0, 24.0, 36.0), (3.0, 18.0, 33.0),
                              (0.40, 0.44, 0.48, 0.52)))  # fmt: skip
Z = ndtri(qmc.Sobol(4, rng=np.random.default_rng(1)).random_base2(16))


def drawn(model, permittivity, temperature, porosity, level):
    """The 2.5 and 97.5 per cent quantiles of the equation itself."""
    of_permittivity, of_temperature, of_porosity, of_solid = level
    given = {
        "porosity": porosity + of_porosity * Z[:, 2],
        "solid_permittivity": 4.7 + of_solid * Z[:, 3],
        "host": "water",
        "aspect_ratio": 1.0,
    }
    member = MIXING_MODELS[model]
    names = {parameter.name for parameter in member.parameters}
    own = {name: value for name, value in given.items() if name in names}
    if "water_permittivity" in names:
        parts = kaatze_1989.parts(1e9, temperature + of_temperature * Z[:, 1])
        apparent = member.permittivity == "apparent"
        own["water_permittivity"] = to_apparent(*parts) if apparent else parts[0]
    read_off = permittivity * (1.0 + of_permittivity * Z[:, 0])
    return np.nanquantile(member.to_water_content(read_off, **own), [0.025, 0.975])


def scenario(model, permittivity, temperature, porosity, level):
    of_permittivity, of_temperature, of_porosity, of_solid = level
    columns = {
        "apparent_permittivity": np.array([permittivity]),
        "apparent_permittivity_u": np.array([of_permittivity * permittivity]),
        "temperature": np.array([temperature]),
        "temperature_u": np.array([of_temperature]),
    }
    soil = describe(
        None,
        {"porosity": porosity, "solid_permittivity": 4.7},
        {"porosity": of_porosity, "solid_permittivity": of_solid},
    )
    basis = prepare(
        Query(
            model=model, standard_error=0.0, soil=soil, probe={"frequency": 1e9},
            columns=frozenset(columns), salinity=SalinityQuery(),
        )
    )  # fmt: skip
    found = estimate(read(columns, {}, {}), basis).columns
    return found["water_content_lower"][0], found["water_content_upper"][0]


@pytest.mark.parametrize(
    ("model", "within"), [("topp-1980", 0.01), ("crim", 0.01), ("maxwell-garnett", 0.03)]
)
@pytest.mark.parametrize("level", list(LEVELS))
def test_ends_are_those_of_draws(model, within, level):
    """Where neither end is cut by the range. Maxwell Garnett bends most where it is dry."""
    compared = 0
    for permittivity, temperature, porosity in GRID:
        case = (model, permittivity, temperature, porosity, LEVELS[level])
        lower, upper = drawn(*case)
        half = (upper - lower) / 2
        limit = porosity + 1.96 * LEVELS[level][2]
        if lower < 0.8 * half or upper > limit - 0.8 * half:
            continue
        ends = scenario(*case)
        if np.isnan(ends).any():
            continue
        compared += 1
        assert np.allclose(ends, (lower, upper), rtol=0.0, atol=within * half), case
    assert compared >= 10
