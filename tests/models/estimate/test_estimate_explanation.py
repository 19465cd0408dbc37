"""Effects of temperature on a reading: directions known from physics, sizes by hand."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.estimate import Query, explain, prepare
from models.readings import read
from models.soil.description import describe

CLAY = describe("clay", {"clay": 0.45, "bulk_density": 1400.0}, {})
SAND = describe("sand", {"clay": 0.01, "bulk_density": 1500.0}, {})


def told(soil, warmth, *, model="crim", frequency=1e9, **cells):
    columns = {"apparent_permittivity": 17.0, "temperature": warmth, **cells}
    columns = {n: np.atleast_1d(np.asarray(v, dtype=float)) for n, v in columns.items()}
    query = Query(model=model, soil=soil, probe={"frequency": frequency},
                  columns=frozenset(columns))  # fmt: skip
    return explain(read(columns, {}, {}), prepare(query))


def test_warm_free_water_reads_too_dry_by_half_a_percent_per_kelvin():
    """-0.0005 to -0.0010 per K at 0.2 to 0.4 m3/m3 (Roth et al. 1990, by the water's formula)."""
    found = told(SAND, 30.0)
    slope = found.effects["free-water"][0] / 10.0
    assert -0.0010 < slope < -0.0005


def test_released_bound_water_reads_too_wet_and_takes_over_in_clay_that_is_cold():
    found = told(CLAY, 30.0)
    assert found.effects["bound-water"][0] > 0
    assert abs(told(SAND, 30.0).effects["bound-water"][0]) < 1e-3


def test_warmer_soil_conducts_better_and_reads_too_wet():
    found = told(CLAY, 35.0, frequency=100e6, bulk_conductivity=1.0)
    assert found.effects["conduction"][0] > 0
    assert found.dominant[0] == "conduction"


def test_at_20_cel_nothing_has_an_effect():
    found = told(CLAY, 20.0, bulk_conductivity=0.5)
    for sizes in found.effects.values():
        assert_allclose(sizes, 0.0, atol=1e-12)


@pytest.mark.parametrize("warmth", [float("nan")])
def test_no_temperature_tells_no_effect(warmth):
    assert told(CLAY, warmth).dominant == (None,)


def test_a_curve_without_water_corrects_nothing_and_says_so():
    assert told(SAND, 30.0, model="topp-1980").effects["free-water"][0] == 0.0
