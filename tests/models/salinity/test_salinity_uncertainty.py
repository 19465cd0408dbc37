"""How far pore-water conductivity is known: declared discrepancies and simulated readings."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_less

from models.salinity import PORE_WATER_MODELS
from models.salinity.hilhorst_2000 import OFFSET_U
from models.salinity.texture_defaults import surface_conductivity
from models.uncertainty.first_order import Input, propagate
from tests.models.salinity.pore_water_soils import loam
from tests.published import table

DRAWS = 200_000
RHOADES, HILHORST = PORE_WATER_MODELS["rhoades-1989"], PORE_WATER_MODELS["hilhorst-2000"]


def summary(pore_water):
    """Coefficient of variation in percent, and the ends of the central 90 % in dS/m."""
    low, high = np.quantile(pore_water, [0.05, 0.95]) / 0.1
    return np.array([100 * pore_water.std() / pore_water.mean(), low, high])


def test_offset_leaves_open_what_it_is_said_to():
    printed = table("hilhorst_2000_offset")
    epsilon, step = printed["permittivity"].values, 1e-4
    answer = [
        HILHORST.to_pore_water(0.08, **loam("hilhorst-2000", real_permittivity=epsilon, offset=o))
        for o in (4.1 - step, 4.1, 4.1 + step)
    ]
    share = 100 * OFFSET_U * (answer[2] - answer[0]) / (2 * step) / answer[1]
    assert_array_less(np.abs(share - printed["share"].values), printed["share"].tolerance)


@pytest.mark.parametrize("permittivity", [12.0, 17.0, 30.0])
def test_offset_and_discrepancy_of_hilhorst_2000_make_the_default_band_together(permittivity):
    """sqrt(0.15^2 + (1.65 / (eps' - 4.1))^2), to first order."""
    soil = loam("hilhorst-2000", real_permittivity=np.array([permittivity]))
    offset = Input("offset", soil.pop("offset"), shared=OFFSET_U)
    value = HILHORST.to_pore_water(0.08, **soil, offset=offset.value)
    spread = propagate(lambda **at: HILHORST.to_pore_water(0.08, **soil, **at), [offset], value)
    own = HILHORST.discrepancy.standard_uncertainty(value, clay=0.2)
    total = np.sqrt(spread.shared + own**2) / value
    assert_allclose(total, np.hypot(0.15, 1.65 / (permittivity - 4.1)), rtol=0.05)


def test_fitted_parameters_narrow_the_band():
    assert HILHORST.discrepancy.relative_uncertainty(clay=0.2, fitted=True) == 0.12
    assert RHOADES.discrepancy.relative_uncertainty(clay=0.2, fitted=True) == 0.10
    unfitted = PORE_WATER_MODELS["malicki-walczak-1999"].discrepancy
    assert unfitted.relative_uncertainty(clay=0.2, fitted=True) == 0.25


def test_rhoades_1989_is_10_percent_off_in_sand_and_45_in_clay_but_never_below_its_floor():
    own = RHOADES.discrepancy
    assert_allclose(own.relative_uncertainty(clay=[0.03, 0.2, 0.58]), [0.10, 0.30, 0.45])
    assert_allclose(own.standard_uncertainty([0.01, 1.0], clay=0.03), [0.03, 0.10])


def test_simulated_readings_in_a_loam_by_rhoades_1989():
    random = np.random.default_rng(1)
    clay = random.normal(0.20, 0.04, DRAWS)
    pore_water = RHOADES.to_pore_water(
        0.08 * random.normal(1, 0.03, DRAWS),
        water_content=random.normal(0.30, 0.02, DRAWS), clay=clay,
        bulk_density=random.normal(1400, 100, DRAWS), particle_density=2650.0,
        surface_conductivity=surface_conductivity(clay) * random.normal(1, 0.1, DRAWS),
    )  # fmt: skip
    expected = [column.values[0] for column in table("pore_water_monte_carlo").values()]
    assert_allclose(summary(pore_water), expected, rtol=0.03)
    assert_allclose(pore_water.mean() / 0.1, 3.94, rtol=0.01)


def test_simulated_readings_in_a_loam_by_hilhorst_2000():
    random = np.random.default_rng(2)
    pore_water = HILHORST.to_pore_water(
        0.08 * random.normal(1, 0.03, DRAWS), temperature=20.0,
        real_permittivity=random.normal(17, 0.6, DRAWS), offset=random.uniform(1.9, 7.6, DRAWS),
    )  # fmt: skip
    expected = [column.values[1] for column in table("pore_water_monte_carlo").values()]
    assert_allclose(summary(pore_water), expected, rtol=0.03)
