"""Laws that hold for any pore-water model; a new one is tested by being registered."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from models.errors import ParameterError, UnknownName
from models.quantity import QUANTITIES
from models.salinity import DEFAULT_PORE_WATER_MODEL, PORE_WATER_MODELS
from models.salinity.family import BELOW_SURFACE, OFFSET_TOO_CLOSE, TOO_DRY
from tests.models.salinity.pore_water_soils import LOAM, loam

NAMES = {
    "hilhorst-2000", "rhoades-1976", "rhoades-1989", "malicki-walczak-1999",
    "mualem-friedman-1991", "archie-1942", "waxman-smits-1968", "complex-refractive",
}  # fmt: skip
AT_SOIL_TEMPERATURE = {"hilhorst-2000", "complex-refractive"}
WITH_A_SURFACE = {
    "rhoades-1976", "malicki-walczak-1999", "mualem-friedman-1991", "waxman-smits-1968",
}  # fmt: skip
WITHOUT_WATER_CONTENT = {"hilhorst-2000", "malicki-walczak-1999"}
PORE_WATER = np.geomspace(1e-2, 10, 301)
ODD = np.array(
    [-np.inf, -1e300, -1.0, -0.0, 0.0, 1e-300, 0.04, 0.3, 1.0, 80, 1e300, np.inf, np.nan]
)


@pytest.fixture(params=PORE_WATER_MODELS.values(), ids=PORE_WATER_MODELS)
def model(request):
    return request.param


@pytest.fixture
def soil(model):
    return loam(model.key)


def test_every_promised_name_is_there():
    assert set(PORE_WATER_MODELS) == NAMES
    assert DEFAULT_PORE_WATER_MODEL in NAMES
    with pytest.raises(UnknownName, match="pore-water model"):
        PORE_WATER_MODELS["salt-o-meter"]


def test_there_and_back_is_the_identity(model, soil):
    bulk = model.to_bulk(PORE_WATER, **soil)
    assert_allclose(model.to_pore_water(bulk, **soil), PORE_WATER, rtol=1e-9)


def test_back_and_there_is_the_identity(model, soil):
    bulk = np.geomspace(0.055, 1.0, 301)
    pore_water = model.to_pore_water(bulk, **soil)
    assert_allclose(model.to_bulk(pore_water, **soil), bulk, rtol=1e-9)


def test_there_and_back_over_soils_at_random(model):
    random = np.random.default_rng(76)
    rows = 3000
    soil = loam(
        model.key,
        **{
            name: values
            for name, values in {
                "water_content": random.uniform(0.12, 0.45, rows),
                "real_permittivity": random.uniform(9, 40, rows),
                "clay": random.uniform(0, 0.6, rows),
                "porosity": random.uniform(0.45, 0.6, rows),
                "temperature": random.uniform(0, 40, rows),
                "frequency": 10 ** random.uniform(7.5, 9.5, rows),
                "water_loss": random.uniform(0, 12, rows),
            }.items()
            if name in {parameter.name for parameter in model.parameters}
        },
    )
    pore_water = random.uniform(0.05, 5, rows)
    back = model.to_pore_water(model.to_bulk(pore_water, **soil), **soil)
    assert_allclose(back, pore_water, rtol=1e-9)


def test_saltier_water_makes_a_better_conductor(model, soil):
    assert np.all(np.diff(model.to_bulk(PORE_WATER, **soil)) > 0)
    assert np.all(np.diff(model.to_pore_water(np.geomspace(0.055, 1, 300), **soil)) > 0)


def test_bulk_soil_conducts_less_than_its_water(model, soil):
    saline = PORE_WATER[PORE_WATER > 0.3]
    assert np.all(model.to_bulk(saline, **soil) < saline)


def test_wetter_soil_conducts_better(model):
    if model.key in WITHOUT_WATER_CONTENT:
        wetter = loam(model.key, real_permittivity=np.linspace(9.5, 40, 100))
    else:
        wetter = loam(model.key, water_content=np.linspace(0.08, 0.45, 100))
    assert np.all(np.diff(model.to_bulk(0.4, **wetter)) > 0)


def test_nan_in_nan_out(model, soil):
    assert np.isnan(model.to_pore_water(np.nan, **soil))
    assert np.isnan(model.to_bulk(np.nan, **soil))
    for name in soil:
        lost = soil | {name: np.nan}
        assert np.isnan(model.to_pore_water(0.08, **lost)), name
        assert np.isnan(model.to_bulk(0.4, **lost)), name


@pytest.mark.parametrize("shape", [(), (0,), (3,), (2, 3)])
def test_keeps_the_shape_it_is_given(model, soil, shape):
    assert np.shape(model.to_pore_water(np.full(shape, 0.08), **soil)) == shape
    assert np.shape(model.to_bulk(np.full(shape, 0.4), **soil)) == shape
    for marked in model.gates(np.full(shape, 0.08), **soil | {"water_content": 0.3}).values():
        assert marked.shape == shape
        assert marked.dtype == bool


def test_takes_columns_of_parameters(model, soil):
    columns = {name: np.full(5, value) for name, value in soil.items()}
    bulk = np.linspace(0.06, 0.3, 5)
    one = model.to_pore_water(bulk, **soil)
    assert_allclose(model.to_pore_water(bulk, **columns), one, rtol=1e-12)
    assert_allclose(model.to_bulk(one, **columns), bulk, rtol=1e-9)
    spread = {name: values[:, None] for name, values in columns.items()}
    assert model.to_pore_water(bulk, **spread).shape == (5, 5)


def test_no_warning_whatever_the_numbers(model, soil):
    model.to_pore_water(ODD, **soil)
    model.to_bulk(ODD, **soil)
    for name in soil:
        odd = soil | {name: ODD[:, None]}
        model.to_pore_water(ODD, **odd)
        model.to_bulk(ODD, **odd)
        model.gates(ODD, **{"water_content": 0.3} | odd)


def test_a_moist_loam_passes_every_gate(model, soil):
    for marked in model.gates(0.08, **soil | {"water_content": 0.3}).values():
        assert not marked


def test_dry_soil_says_nothing_of_its_water(model, soil):
    assert model.gates(0.08, **soil | {"water_content": 0.04})[TOO_DRY]


def test_a_soil_that_conducts_less_than_its_surfaces_says_so(model, soil):
    marked = model.gates(0.004, **soil | {"water_content": 0.3})
    assert (BELOW_SURFACE in marked) == (model.key in WITH_A_SURFACE)
    assert bool(marked.get(BELOW_SURFACE)) == (model.key in WITH_A_SURFACE)
    if BELOW_SURFACE in marked:
        answer = model.to_pore_water(0.004, **soil)
        assert np.isnan(answer) or answer < 0, "not clipped to zero"


def test_what_is_not_known_is_marked_by_no_gate(model, soil):
    unknown = dict.fromkeys(soil | {"water_content": 0.3}, np.nan)
    for marked in model.gates(np.nan, **unknown).values():
        assert not marked


def test_gates_have_names_that_are_known(model, soil):
    marked = model.gates(0.08, **soil | {"water_content": 0.3})
    assert set(marked) <= {TOO_DRY, OFFSET_TOO_CLOSE, BELOW_SURFACE}
    assert (OFFSET_TOO_CLOSE in marked) == (model.key in WITHOUT_WATER_CONTENT)


def test_says_where_it_comes_from_and_how_far_off_it_is(model):
    assert model.source.authors
    assert model.source.note, "says how its numbers were confirmed"
    assert model.equation
    assert model.published_error
    assert model.discrepancy.reason
    assert set(model.validity) <= set(QUANTITIES)
    known = {parameter.name for parameter in model.parameters}
    assert set(model.discrepancy.fitted_parameters) <= known


def test_says_at_which_temperature_its_conductivities_are(model):
    at = "soil temperature" if model.key in AT_SOIL_TEMPERATURE else "25 Cel"
    assert model.at == at


def test_defaults_lie_in_their_ranges(model):
    for parameter in model.parameters:
        assert parameter.range is not None
        if parameter.default is not None:
            assert not parameter.range.excludes(parameter.default), parameter.name
            assert parameter.default_u >= 0


def test_refuses_a_parameter_in_the_unit_of_the_field_book(model):
    if model.key not in {"rhoades-1976", "rhoades-1989", "mualem-friedman-1991"}:
        return
    with pytest.raises(ParameterError, match="surface_conductivity"):
        loam(model.key, surface_conductivity=0.44)  # dS/m


def test_says_what_is_estimated_from_texture_or_clay(model):
    for parameter in model.parameters:
        if parameter.name not in LOAM and parameter.default is None:
            assert "unless given" in parameter.meaning
        if parameter.name.startswith(("transmission", "cementation", "surface")):
            assert "estimated from" in parameter.meaning


def test_uncertainty_grows_with_clay_and_clay_that_is_not_known_counts_as_most(model):
    clay = np.array([0.0, 0.03, 0.1, 0.2, 0.4, 0.58, 1.0, np.nan])
    share = model.discrepancy.relative_uncertainty(clay=clay)
    assert np.all(share > 0)
    assert np.all(np.diff(share) >= 0)
    assert_array_equal(share[-1], model.discrepancy.relative_uncertainty())
    value = np.array([0.0, 0.001, 0.4, np.nan])
    spread = model.discrepancy.standard_uncertainty(value, clay=0.2)
    assert_array_equal(np.isnan(spread), [0, 0, 0, 1])
    assert spread[0] == model.discrepancy.floor > 0
    assert_allclose(spread[2], max(0.4 * share[3], spread[0]))
