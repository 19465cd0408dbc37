"""Bands of pore water and extract: every way to make them, and what they do at their ends."""

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_array_equal

from models.estimate import estimate, prepare
from models.flags import BIT
from models.readings import read
from models.salinity import PORE_WATER_MODELS
from models.soil.description import describe
from models.uncertainty.draws import Draws
from tests.models.estimate.test_estimate_salinity import (
    COLUMNS,
    NOISE,
    basis_for,
    readings_of,
    simulate,
)

PORE, EXTRACT = "pore_water_conductivity", "saturation_extract_conductivity"
ENDS = ("_lower", "_upper")
ALL = [key for key in PORE_WATER_MODELS if key != "complex-refractive"]


def drawing(basis, draws):
    return prepare(replace(basis.query, draws=draws))


@pytest.mark.parametrize("key", ALL)
def test_draws_cover_simulated_truth(key):
    rng = np.random.default_rng(15)
    theta, pore = rng.uniform(0.22, 0.40, 2500), rng.uniform(0.2, 0.5, 2500)
    basis = drawing(basis_for(key, 1e9, own=0.1), Draws(1024))
    sent = readings_of(*simulate(basis, theta, pore, rng.uniform(6.0, 30.0, 2500), rng), rng, NOISE)
    answer = estimate(sent, basis).columns
    known = np.isfinite(answer[PORE])
    inside = (answer[f"{PORE}_lower"] <= pore) & (pore <= answer[f"{PORE}_upper"])
    assert 0.93 < inside[known].mean() < 0.97


@pytest.mark.parametrize("texture", ["sand", "loam", "clay"])
@pytest.mark.parametrize("key", ALL)
def test_quantiles_are_those_of_draws(texture, key):
    """Soil known by its class alone: nine ends in ten within 8 % of the half-width.

    Not so wet that draws beyond the pores are left out, which quantiles do not know of.
    """
    rng = np.random.default_rng(4)
    columns = {
        "apparent_permittivity": rng.uniform(7.0, 20.0, 80),
        "temperature": rng.uniform(3.0, 33.0, 80),
        "bulk_conductivity": rng.uniform(0.1, 3.0, 80),
    }
    plain = basis_for(key, 1e9, error=None, apparent_permittivity_u=0.3, temperature_u=0.5)
    plain = prepare(
        replace(plain.query, soil=describe(texture, {}, {}), columns=frozenset(columns))
    )
    found = estimate(read(columns, {}, {}), plain).columns
    drawn = estimate(read(columns, {}, {}), drawing(plain, Draws(16_384))).columns
    for name in (PORE, EXTRACT):
        if name not in found:
            continue
        known = (drawn[f"{name}_lower"] > 0) & (found[f"{name}_lower"] > 0)
        known &= np.isfinite(drawn[f"{name}_upper"] + found[f"{name}_upper"])
        ours, theirs = ({e: each[f"{name}{e}"][known] for e in ENDS} for each in (found, drawn))
        half = 0.5 * np.log(theirs["_upper"] / theirs["_lower"])
        for end in ENDS:
            off = np.abs(np.log(ours[end] / theirs[end])) / half
            # There the surfaces alone conduct more than the soil in up to one draw of three.
            hard = texture == "clay" and key in {"rhoades-1976", "mualem-friedman-1991"}
            assert np.quantile(off, 0.9) < (0.25 if hard else 0.08)


@pytest.mark.parametrize("draws", [None, Draws(256)], ids=["quantiles", "draws"])
@pytest.mark.parametrize("key", ["hilhorst-2000", "rhoades-1976", "rhoades-1989"])
def test_a_row_has_the_same_band_wherever_it_stands(key, draws, monkeypatch):
    """Whatever the order, the neighbours, and where a table is cut into blocks."""
    rng = np.random.default_rng(6)
    columns = {
        "apparent_permittivity": rng.uniform(6.0, 34.0, 60),
        "temperature": rng.uniform(2.0, 35.0, 60),
        "temperature_u": np.where(rng.uniform(size=60) < 0.5, 0.0, 1.0),
        "bulk_conductivity": rng.uniform(0.05, 3.0, 60),
    }
    given = {"offset": 4.1, "offset_u": 1.65} if key == "hilhorst-2000" else {}
    query = basis_for(key, 1e9, apparent_permittivity_u=0.4, bulk_conductivity_u=0.01).query
    query = replace(
        query, draws=draws, columns=COLUMNS | {"temperature_u"}, standard_error=None,
        salinity=replace(query.salinity, given=given),
    )  # fmt: skip
    basis = prepare(query)

    def of(rows):
        return estimate(read({n: v[rows] for n, v in columns.items()}, {}, {}), basis).columns

    order = rng.permutation(60)
    together, shuffled = of(np.arange(60)), of(order)
    halves = of(np.arange(30)), of(np.arange(30, 60))
    monkeypatch.setattr("models.estimate.pipeline.BLOCK", 7)
    cut = of(np.arange(60))
    for name, values in together.items():
        assert_array_equal(shuffled[name], values[order], err_msg=name)
        assert_array_equal(cut[name], values, err_msg=name)
        assert_array_equal(np.concatenate([half[name] for half in halves]), values, err_msg=name)


@pytest.mark.parametrize("draws", [None, Draws(2048)], ids=["quantiles", "draws"])
def test_a_permittivity_at_the_offset_leaves_no_upper_end(draws):
    """Permittivity 7.3, offset 4.1 with 1.65 (k = 1): 1.94 of it away from dividing by zero."""
    query = basis_for("hilhorst-2000", 1e9, mixing="topp-1980").query
    given = {"offset": 4.1, "offset_u": 1.65}
    basis = prepare(replace(query, draws=draws, salinity=replace(query.salinity, given=given)))
    sent = readings_of(np.array([7.3, 20.0]), np.array([0.01, 0.05]), np.array([20.0, 20.0]))
    answer = estimate(sent, basis)
    assert np.isnan(answer.columns[f"{PORE}_upper"][0])
    assert np.isfinite(answer.columns[f"{PORE}_lower"]).all()
    assert np.isfinite(answer.columns[PORE]).all()
    assert ((answer.flags & BIT["no-upper-end"]) != 0).tolist() == [True, False]


def test_loss_that_the_readings_tell_is_drawn_row_by_row():
    """More readings than a block of draws holds, in a model that takes the loss."""
    basis = drawing(
        basis_for("complex-refractive", 1e9, mixing="complex-refractive", error=None,
                  apparent_permittivity_u=0.3), Draws(4096),
    )  # fmt: skip
    ka = np.linspace(8.0, 25.0, 40)
    answer = estimate(readings_of(ka, np.full(40, 0.05), np.full(40, 20.0)), basis).columns
    assert np.isfinite(answer["water_content_u"]).all()
    assert np.all(np.diff(answer["water_content_lower"]) > 0)


@pytest.mark.parametrize("key", ["rhoades-1976", "mualem-friedman-1991"])
@pytest.mark.parametrize("draws", [None, Draws(2048)], ids=["quantiles", "draws"])
def test_dry_soil_whose_surfaces_conduct_as_it_does_is_covered(key, draws):
    """Where more errors than the band leaves out leave no salt at all, its lower end is 0."""
    rng = np.random.default_rng(12)
    count = 1500 if draws else 8000
    theta, pore = rng.uniform(0.16, 0.22, count), rng.uniform(0.02, 0.1, count)
    basis = basis_for(key, 1e9, own=0.1)
    basis = drawing(basis, draws) if draws else basis
    sent = readings_of(
        *simulate(basis, theta, pore, rng.uniform(6.0, 30.0, count), rng), rng, NOISE
    )
    answer = estimate(sent, basis)
    told = answer.columns
    known = np.isfinite(told[PORE])
    upper = np.where(np.isnan(told[f"{PORE}_upper"]), np.inf, told[f"{PORE}_upper"])
    inside = (told[f"{PORE}_lower"] <= pore) & (pore <= upper)
    assert 0.92 < inside[known].mean() < 0.985
    open_below = (answer.flags & BIT["no-lower-end"]) != 0
    assert (told[f"{PORE}_lower"][open_below & known] == 0.0).any()


@pytest.mark.parametrize("probability", [0.5, 0.68, 0.95, 0.99, 0.999])
@pytest.mark.parametrize("draws", [None, Draws(4096)], ids=["quantiles", "draws"])
def test_the_value_lies_in_its_band_and_every_end_is_told(probability, draws):
    """An empty upper end has its flag, and no end is on the wrong side."""
    rng = np.random.default_rng(8)
    columns = {
        "apparent_permittivity": rng.uniform(4.0, 34.0, 120),
        "apparent_permittivity_u": rng.uniform(0.0, 2.0, 120),
        "temperature": rng.uniform(2.0, 35.0, 120),
        "bulk_conductivity": rng.uniform(0.01, 3.0, 120),
        "bulk_conductivity_u": rng.uniform(0.0, 0.3, 120),
    }
    for key in ("rhoades-1976", "rhoades-1989", "hilhorst-2000", "mualem-friedman-1991"):
        query = basis_for(key, 1e9).query
        query = replace(
            query, draws=draws, probability=probability, columns=frozenset(columns),
            standard_error=None, soil=describe("clay", {}, {}),
            salinity=replace(query.salinity, given={}, standard_error=None),
        )  # fmt: skip
        answer = estimate(read(columns, {}, {}), prepare(query))
        unbounded = (answer.flags & BIT["no-upper-end"]) != 0
        for name in (PORE, EXTRACT):
            value, lower, upper = (answer.columns[f"{name}{e}"] for e in ("", "_lower", "_upper"))
            known = np.isfinite(value)
            assert known.any()
            assert np.isfinite(lower[known]).all()
            assert (lower[known] <= value[known]).all()
            assert (np.isnan(upper) <= unbounded)[known].all()
            bounded = known & ~np.isnan(upper)
            assert (upper[bounded] >= value[bounded]).all()


def test_one_density_moves_porosity_water_and_extract_together():
    """The answers at both ends of the bulk density say what its share of the variance is."""

    def of(density, spread):
        soil = describe(
            None,
            {"bulk_density": density, "particle_density": 2650.0, "solid_permittivity": 4.7,
             "saturation_percentage": 0.45, "clay": 0.2},
            {"bulk_density": spread},
        )  # fmt: skip
        query = basis_for("archie-1942", 1e9, error=0.0, own=0.0).query
        exact = {"cementation_exponent": 1.5, "saturation_exponent": 2.0, "tortuosity": 1.0}
        query = replace(query, soil=soil, salinity=replace(query.salinity, given=exact))
        sent = readings_of(np.array([15.0]), np.array([0.002]), np.array([25.0]))
        return estimate(sent, prepare(query)).columns

    found, without = of(1400.0, 40.0), of(1400.0, 0.0)
    low, high = of(1360.0, 0.0), of(1440.0, 0.0)
    for name in ("water_content", PORE, EXTRACT):
        half = np.abs(np.log(high[name][0] / low[name][0])) / 2
        whole, rest = (each[f"{name}_u"][0] / each[name][0] for each in (found, without))
        # In the pore water it cancels to a hundredth, and what it bends is of the same size.
        within = 1.0 if name == PORE else 0.04
        assert whole**2 - rest**2 == pytest.approx(half**2, rel=within)


@pytest.mark.parametrize("mixing", ["roth-1992-mineral", "jacobsen-schjonning-1993", "topp-1980"])
@pytest.mark.parametrize("key", ["archie-1942", "hilhorst-2000", "rhoades-1989"])
def test_a_band_holds_its_value_however_poor_the_reading(mixing, key):
    """A cubic turns back where a permittivity is known to a quarter or worse."""
    query = basis_for(key, 1e9, mixing=mixing, error=None).query
    query = replace(query, soil=describe("loam", {}, {}))
    rng = np.random.default_rng(8)
    columns = {
        "apparent_permittivity": rng.uniform(20, 45, 300),
        "temperature": np.full(300, 15.0),
        "bulk_conductivity": rng.uniform(0.2, 2, 300),
    }
    columns["apparent_permittivity_u"] = columns["apparent_permittivity"] * rng.uniform(
        0.2, 0.5, 300
    )
    found = estimate(read(columns, {}, {}), prepare(query)).columns
    for name in ("water_content", PORE, EXTRACT):
        value, lower, upper = (found[f"{name}{end}"] for end in ("", "_lower", "_upper"))
        told = ~np.isnan(value)
        assert told.any()
        assert (lower[told] <= value[told]).all()
        assert not (upper[told] < value[told]).any()
        assert np.isfinite(found[f"{name}_u"][told]).all()


def test_the_uncertainty_follows_the_band_where_the_answer_nearly_ends():
    """Bulk conductivities whose step down by one of their u nears what the surfaces conduct."""
    query = basis_for("rhoades-1976", 7e8, error=None, apparent_permittivity_u=0.3).query
    query = replace(query, soil=describe("loam", {}, {}))
    steps = np.linspace(0.15, 0.25, 201)
    columns = {"apparent_permittivity": np.full(201, 18.0), "temperature": np.full(201, 18.0),
               "bulk_conductivity": np.full(201, 0.6), "bulk_conductivity_u": steps}  # fmt: skip
    found = estimate(read(columns, {}, {}), prepare(query)).columns
    u = found[f"{PORE}_u"]
    assert (np.abs(np.diff(u)) < 0.1 * u[:-1]).all()
    widest = np.log(found[f"{PORE}_upper"] / found[PORE])
    assert (u <= widest * found[PORE]).all()


@pytest.mark.parametrize("texture", ["sand", "loamy-sand", "sandy-loam", "silt", "silty-clay-loam"])
def test_fresh_soil_with_little_clay_has_the_ends_of_draws(texture):
    """What clay does to the surfaces bends sharply there: no second order describes it."""
    columns = {
        "apparent_permittivity": np.repeat([14.0, 22.0], 6), "temperature": np.full(12, 18.0),
        "bulk_conductivity": np.tile([0.03, 0.06, 0.1, 0.15, 0.3, 0.9], 2),
    }  # fmt: skip
    columns["bulk_conductivity_u"] = 0.05 * columns["bulk_conductivity"]
    plain = basis_for("rhoades-1989", 1e9, error=None, apparent_permittivity_u=0.5).query
    plain = replace(plain, soil=describe(texture, {}, {}), columns=frozenset(columns))
    found = estimate(read(columns, {}, {}), prepare(plain)).columns
    drawn = estimate(read(columns, {}, {}), drawing(prepare(plain), Draws(32_768))).columns
    half = 0.5 * np.log(drawn[f"{PORE}_upper"] / drawn[f"{PORE}_lower"])
    for end in ENDS:
        off = np.abs(np.log(found[PORE + end] / drawn[PORE + end])) / half
        assert (off < 0.2).all(), (end, off)


def test_clay_is_one_error_in_the_surfaces_and_in_the_paste():
    """All exact but clay: more of it takes from the pore water and adds to the paste."""

    def of(clay, spread=0.0):
        soil = describe(
            None, {"clay": clay, "sand": 0.4, "bulk_density": 1400.0, "porosity": 0.47},
            {"clay": spread},
        )  # fmt: skip
        query = basis_for("rhoades-1989", 1e9, error=0.0, own=0.0).query
        columns = {"apparent_permittivity": np.array([15.0]), "temperature": np.array([25.0]),
                   "bulk_conductivity": np.array([0.4])}  # fmt: skip
        query = replace(query, soil=soil, columns=frozenset(columns))
        return {n: v[0] for n, v in estimate(read(columns, {}, {}), prepare(query)).columns.items()}

    found, more, less = of(0.2, 0.01), of(0.21), of(0.19)
    assert more["water_content"] == less["water_content"]
    by_clay = np.log(less[EXTRACT] / more[EXTRACT]) / 2
    by_line = 0.20  # of the line itself, relative
    whole = found[f"{EXTRACT}_u"] / found[EXTRACT]
    assert whole == pytest.approx(np.hypot(by_clay, by_line), rel=0.02)
