"""Laws that hold for any mixing model; a new one is tested by being registered."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.estimate.surroundings import surroundings_of, water_inputs
from models.mixing import MIXING_MODELS
from models.mixing.physical.bounds import hashin_shtrikman
from models.readings import read
from tests.models.soils import basis_for, frequency_for

ITERATIVE = {"dobson-1985", "peplinski-1995"}
NAMES = {
    "topp-1980", "ledieu-1986", "roth-1992-mineral", "roth-1992-organic", "malicki-1996",
    "jacobsen-schjonning-1993", "jacobsen-schjonning-1993-texture", "ferre-1996", "schaap-1997",
    "kellner-lundin-2001", "curtis-2001", "wang-schmugge-1980", "square-root", "polynomial",
    "power-law", "roth-1990", "crim", "complex-refractive", "mironov-2009", "maxwell-garnett",
    "bruggeman", "de-loor-1968", "sihvola", "hanai-bruggeman", "dobson-1985", "peplinski-1995",
}  # fmt: skip


@pytest.fixture(params=MIXING_MODELS.values(), ids=MIXING_MODELS)
def model(request):
    return request.param


@pytest.fixture
def parameters(model):
    """Everything the model takes, at 20 Cel."""
    basis = basis_for(model.key)
    blank = read({"temperature": np.array([20.0])}, {}, {})
    water = water_inputs(basis, surroundings_of(blank, basis), 1, blank.flags.copy())
    supplied = {name: float(given.value[0]) for name, given in water.items()}
    if "frequency" in basis.takes:
        supplied["frequency"] = frequency_for(model)
    if "loss" in basis.takes:
        supplied["loss"] = 1.0
    return basis.values | supplied


@pytest.fixture
def theta(model):
    """The declared range, inside the pores of the soil."""
    known = model.validity["water_content"]
    return np.linspace(max(known.low, 0.001), min(known.high, 0.6), 101)


def test_every_promised_name_is_there():
    assert set(MIXING_MODELS) == NAMES


def test_there_and_back_is_the_identity(model, parameters, theta):
    permittivity = model.to_permittivity(theta, **parameters)
    back = model.to_water_content(permittivity, **parameters)
    assert_allclose(back, theta, atol=1e-6 if model.key in ITERATIVE else 1e-9)


def test_wetter_soil_has_higher_permittivity(model, parameters, theta):
    assert np.all(np.diff(model.to_permittivity(theta, **parameters)) > 0)


def test_nan_in_nan_out(model, parameters):
    assert np.isnan(model.to_water_content(np.nan, **parameters))
    assert np.isnan(model.to_permittivity(np.nan, **parameters))


def test_keeps_the_shape_it_is_given(model, parameters):
    assert model.to_water_content(np.full((2, 3), 20.0), **parameters).shape == (2, 3)
    assert model.to_permittivity(np.full((2, 3), 0.3), **parameters).shape == (2, 3)


def test_takes_columns_of_parameters(model, parameters):
    """A column of equal parameters is the parameter."""
    columns = {n: np.full(4, v) if isinstance(v, float) else v for n, v in parameters.items()}
    epsilon = np.linspace(10, 20, 4)
    one = model.to_water_content(epsilon, **parameters)
    assert_allclose(model.to_water_content(epsilon, **columns), one, rtol=1e-12)


def test_says_where_it_comes_from(model):
    assert model.source.authors
    assert model.equation
    assert model.discrepancy.reason
    assert model.discrepancy.standard_uncertainty > 0
    assert "water_content" in model.validity


PHYSICAL = ["power-law", "roth-1990", "crim", "maxwell-garnett", "bruggeman"]


@pytest.mark.parametrize("key", PHYSICAL)
def test_stays_within_the_hashin_shtrikman_bounds(key):
    """Of porosity 0.45 and solids of 4.7, as the bounds demand of any isotropic mixture."""
    model = MIXING_MODELS[key]
    theta = np.linspace(0.01, 0.44, 44)
    given = dict(basis_for(key).values) | {
        "porosity": 0.45, "solid_permittivity": 4.7, "water_permittivity": 80.0,
    }  # fmt: skip
    lower, upper = hashin_shtrikman(((0.55, 4.7), (theta, 80.0), (0.45 - theta, 1.0)))
    found = model.to_permittivity(theta, **given)
    assert np.all((lower - 1e-9 <= found) & (found <= upper + 1e-9))
