"""Ends of the band against draws of the same inputs made here, over a grid of soils and probes.

Three levels of uncertainty, dry to wet, cold to warm, tight to loose: 180 scenarios a model, with
scipy's scrambled Sobol points and numpy's quantiles as the reference.
"""

import itertools

import numpy as np
import pytest
from scipy.constants import epsilon_0
from scipy.special import ndtri
from scipy.stats import qmc

from models.conductivity import TEMPERATURE_COMPENSATIONS
from models.estimate import Query, SalinityQuery, estimate, prepare
from models.mixing import MIXING_MODELS
from models.mixing.apparent import to_apparent
from models.readings import read
from models.soil.description import describe
from models.water import kaatze_1989
from models.water.kaatze_1989 import KAATZE_1989

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


@pytest.mark.parametrize("model", ["topp-1980", "crim", "maxwell-garnett"])
@pytest.mark.parametrize("level", list(LEVELS))
def test_ends_are_those_of_draws(model, level):
    """Where neither end is cut by the range."""
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
        assert np.allclose(ends, (lower, upper), rtol=0.0, atol=0.01 * half), case
    assert compared >= 10


SALTY = ndtri(qmc.Sobol(7, rng=np.random.default_rng(2)).random_base2(16))
SALT_LEVELS = {"good": (0.01, 0.3, 0.02, 0.01, 0.2, 0.15),
               "typical": (0.03, 1.0, 0.05, 0.02, 0.4, 0.3),
               "poor": (0.06, 3.0, 0.10, 0.05, 1.0, 0.6)}  # fmt: skip
"""Relative permittivity, temperature, relative bulk conductivity, porosity, solids, offset."""
SALT_GRID = list(itertools.product((8.0, 11.0, 16.0, 24.0, 36.0), (3.0, 18.0, 33.0), (0.02, 0.15),
                                   (0.40, 0.52)))  # fmt: skip
"""Permittivity, temperature, S/m, porosity: 60 at each of three levels, fresh and saline."""
OF_WATER = KAATZE_1989.static_uncertainty
COMPENSATION = TEMPERATURE_COMPENSATIONS["corwin-lesch-2005"]


def salty(case, level, mixing, salt, frequency, loss=None):
    """The service's bands of one reading, all of its own errors of models stated as none."""
    permittivity, temperature, bulk, porosity = case
    of_permittivity, of_temperature, of_bulk, of_porosity, of_solid, of_offset = level
    columns = {
        "apparent_permittivity": np.array([permittivity]),
        "apparent_permittivity_u": np.array([of_permittivity * permittivity]),
        "temperature": np.array([temperature]), "temperature_u": np.array([of_temperature]),
    }  # fmt: skip
    if loss is None:
        columns |= {
            "bulk_conductivity": np.array([10.0 * bulk]),
            "bulk_conductivity_u": np.array([10.0 * of_bulk * bulk]),
        }
    else:
        columns |= {
            "imaginary_permittivity": np.array([loss]),
            "imaginary_permittivity_u": np.array([of_bulk * loss]),
        }
    soil = describe(
        None,
        {"porosity": porosity, "solid_permittivity": 4.7},
        {"porosity": of_porosity, "solid_permittivity": of_solid},
    )
    offset = {"offset": 4.1, "offset_u": of_offset} if salt == "hilhorst-2000" else {}
    basis = prepare(
        Query(
            model=mixing, standard_error=0.0, soil=soil, probe={"frequency": frequency},
            columns=frozenset(columns),
            salinity=SalinityQuery(model=salt, standard_error=0.0, given=offset),
        )
    )  # fmt: skip
    return estimate(read(columns, {}, {}), basis).columns


def compare(found, name, draws, case):
    """Whether the service's ends are those of the draws, to 1 per cent of the half-width."""
    lower, upper = np.quantile(draws, [0.025, 0.975])
    ends = found[f"{name}_lower"][0], found[f"{name}_upper"][0]
    if np.isnan(ends[0]):
        return 0
    assert np.allclose(ends, (lower, upper), rtol=0.0, atol=0.01 * (upper - lower) / 2), case
    return 1


@pytest.mark.parametrize("level", list(SALT_LEVELS))
def test_ends_of_pore_water_are_those_of_draws(level):
    """Hilhorst (2000) written out: a ratio, and the compensation to 25 Cel with its own error."""
    of_permittivity, of_temperature, of_bulk, _, _, of_offset = SALT_LEVELS[level]
    compared = 0
    for case in SALT_GRID:
        permittivity, temperature, bulk, _ = case
        found = salty(case, SALT_LEVELS[level], "topp-1980", "hilhorst-2000", 1e12)
        warmth = temperature + of_temperature * SALTY[:, 1]
        factor = COMPENSATION.factor(warmth) * (
            1.0 + COMPENSATION.relative_uncertainty(temperature) * SALTY[:, 4]
        )
        rise = permittivity * (1.0 + of_permittivity * SALTY[:, 0]) - 4.1 - of_offset * SALTY[:, 5]
        salt = bulk * (1.0 + of_bulk * SALTY[:, 2]) * (80.3 - 0.37 * (warmth - 20.0)) / rise
        compared += compare(found, "pore_water_conductivity", salt * factor, case)
    assert compared >= 50


@np.errstate(invalid="ignore")
def jointly(permittivity, loss, water, porosity, solid):
    """Water content, and loss by conduction in its water: two indices, one quadratic equation.

    Ka and eps'' tell sqrt(eps) = sqrt(Ka) - j eps'' / (2 sqrt(Ka)); less that of solids and air it
    is theta (sqrt(eps_w) - 1), of which the real part of eps_w is known.
    """
    real, excess_of_water = np.sqrt(permittivity), water.real - 1.0
    across = -loss / (2.0 * real)
    along = real - (1.0 - porosity) * np.sqrt(solid) - porosity
    square = along**2 - across**2
    inverse = excess_of_water / (along + np.sqrt(along**2 + square * excess_of_water))
    in_water = (1.0 + (along + 1j * across) * inverse) ** 2
    return 1.0 / inverse, water.imag - in_water.imag


@pytest.mark.parametrize("level", list(SALT_LEVELS))
def test_ends_of_the_joint_inversion_are_those_of_draws(level):
    """Water and salt from one complex index, at 300 MHz; epsilon0 is that of CODATA."""
    of_permittivity, of_temperature, of_bulk, of_porosity, of_solid, _ = SALT_LEVELS[level]
    compared, frequency = {"water_content": 0, "pore_water_conductivity": 0}, 300e6
    for case in SALT_GRID:
        permittivity, temperature, bulk, porosity = case
        loss = bulk / (2.0 * np.pi * frequency * epsilon_0) + 0.05 * permittivity
        found = salty(case, SALT_LEVELS[level], "complex-refractive", "complex-refractive",
                      frequency, loss)  # fmt: skip
        warmth = temperature + of_temperature * SALTY[:, 1]
        parts = kaatze_1989.parts(frequency, warmth)
        theta, in_water = jointly(
            permittivity * (1.0 + of_permittivity * SALTY[:, 0]),
            loss * (1.0 + of_bulk * SALTY[:, 2]),
            parts[0] + OF_WATER * SALTY[:, 6] - 1j * parts[1],
            porosity + of_porosity * SALTY[:, 3],
            4.7 + of_solid * SALTY[:, 5],
        )
        factor = COMPENSATION.factor(warmth) * (
            1.0 + COMPENSATION.relative_uncertainty(temperature) * SALTY[:, 4]
        )
        salt = 2.0 * np.pi * frequency * epsilon_0 * in_water * factor
        limit = porosity + 1.96 * of_porosity
        if np.isnan(theta).any() or theta.min() < 0.0 or salt.min() < 0.0:
            continue
        high = np.quantile(theta, 0.9999)
        compared["pore_water_conductivity"] += compare(found, "pore_water_conductivity", salt, case)
        if high < limit:
            compared["water_content"] += compare(found, "water_content", theta, case)
    assert min(compared.values()) >= 8
