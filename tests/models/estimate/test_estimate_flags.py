"""What an estimate says about itself: flags, numbers withheld, and which way the band leans."""

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.advisories import ADVISORIES
from models.errors import ModelError
from models.estimate import Query, choose, columns_of, estimate, prepare
from models.flags import FLAGS, SLUGS, slugs_of
from models.mixing import MIXING_MODELS
from models.readings import read
from models.soil.description import describe
from tests.models.soils import SPREAD, VALUES, basis_for

SOIL = describe(None, VALUES, SPREAD)
NAN = float("nan")


def told(key="crim", *, soil=SOIL, probe=None, given=None, units=None, assumed=None, **cells):
    """Flags, water content and its ends for one reading."""
    columns = {name: np.array([value]) for name, value in cells.items()}
    query = Query(
        model=key, given=given or {}, soil=soil, columns=frozenset(columns),
        probe={"frequency": 1e9} if probe is None else probe, assumed_temperature=assumed,
    )  # fmt: skip
    answer = estimate(read(columns, units or {}, {}), prepare(query))
    numbers = {name: float(values[0]) for name, values in answer.columns.items()}
    return set(slugs_of(int(answer.flags[0]))), numbers


def test_an_ordinary_reading_has_a_number_and_no_flag():
    flags, found = told(apparent_permittivity=17.2, temperature=14.1)
    assert not flags
    assert found["water_content_lower"] < found["water_content"] < found["water_content_upper"]


@pytest.mark.parametrize(
    ("expected", "cells"),
    [
        ({"no-permittivity", "missing:apparent_permittivity"},
         {"apparent_permittivity": NAN, "temperature": 14.0}),
        ({"missing:temperature"}, {"apparent_permittivity": 17.0, "temperature": NAN}),
        ({"missing:temperature"}, {"apparent_permittivity": 17.0}),
        ({"out-of-gate:temperature"}, {"apparent_permittivity": 17.0, "temperature": 287.0}),
        ({"out-of-gate:apparent_permittivity"},
         {"apparent_permittivity": -9999.0, "temperature": 14.0}),
        ({"out-of-gate:apparent_permittivity"},
         {"apparent_permittivity": 0.5, "temperature": 14.0}),
        ({"permittivity-above-water"}, {"apparent_permittivity": 85.0, "temperature": 14.0}),
        ({"inconsistent"},
         {"apparent_permittivity": 45.0, "temperature": 14.0}),
    ],
)  # fmt: skip
def test_no_number_where_there_is_none_and_the_row_says_why(expected, cells):
    flags, found = told(**cells)
    assert expected <= flags
    assert all(np.isnan(value) for value in found.values())


@pytest.mark.parametrize(
    ("expected", "key", "cells"),
    [
        ("missing:temperature", "topp-1980", {"apparent_permittivity": 17.0, "temperature": NAN}),
        ("out-of-gate:temperature", "topp-1980",
         {"apparent_permittivity": 17.0, "temperature": -9999.0}),
        ("frozen", "crim", {"apparent_permittivity": 9.0, "temperature": -0.5}),
        ("outside-water-range", "crim", {"apparent_permittivity": 5.0, "temperature": -12.0}),
        ("near-freezing", "crim", {"apparent_permittivity": 9.0, "temperature": 0.5}),
        ("drier-than-dry", "crim", {"apparent_permittivity": 2.4, "temperature": 14.0}),
        ("outside-model-range", "topp-1980", {"apparent_permittivity": 2.5, "temperature": 14.0}),
        ("wetter-than-pores", "crim", {"apparent_permittivity": 31.3, "temperature": 14.0}),
    ],
)  # fmt: skip
def test_the_number_stays_and_the_flag_explains_it(expected, key, cells):
    flags, found = told(key, **cells)
    assert expected in flags
    assert np.isfinite(found["water_content"])
    assert 0.0 <= found["water_content_lower"] <= found["water_content"]
    assert found["water_content"] <= found["water_content_upper"] <= 1.0


def test_a_temperature_is_assumed_only_where_the_caller_says_so():
    flags, found = told(apparent_permittivity=17.0, assumed=20.0)
    assert "missing:temperature" not in flags
    given = told(apparent_permittivity=17.0, temperature=20.0)[1]
    assert found["water_content"] == given["water_content"]


def test_an_air_gap_is_outside_what_any_mixture_of_these_phases_can_have():
    flags, _ = told("topp-1980", apparent_permittivity=1.6, temperature=14.0)
    assert "outside-bounds" in flags


CLAY = describe("clay", {"clay": 0.45}, {"clay": 0.03})


@pytest.mark.parametrize("key", ["topp-1980", "ledieu-1986", "malicki-1996", "crim", "roth-1990"])
@pytest.mark.parametrize("excess", [0.07, 0.12, 0.17])
def test_at_50_mhz_in_clay_the_band_holds_the_truth_and_leans_down(key, excess):
    """Published laboratory pairs, ten soils: 0.07 to 0.17 m3/m3 too wet at 50 MHz in clay."""
    flags, found = told(
        key, soil=CLAY, probe={"frequency": 50e6}, apparent_permittivity=24.0, temperature=20.0
    )
    assert "low-frequency" in flags
    truth = found["water_content"] - excess
    assert found["water_content_lower"] < truth
    below = found["water_content"] - found["water_content_lower"]
    assert below > 1.3 * (found["water_content_upper"] - found["water_content"])


def test_sand_at_50_mhz_does_not_lean():
    sand = describe("sand", {"clay": 0.01}, {"clay": 0.005})
    flags, found = told(
        "topp-1980", soil=sand, probe={"frequency": 50e6}, apparent_permittivity=12.0,
        temperature=20.0,
    )  # fmt: skip
    assert "low-frequency" not in flags
    below = found["water_content"] - found["water_content_lower"]
    assert_allclose(below, found["water_content_upper"] - found["water_content"])


def test_clay_and_conduction_widen_the_band():
    plain = told("topp-1980", apparent_permittivity=17.0, temperature=20.0)[1]["water_content_u"]
    clay = told("topp-1980", soil=CLAY, apparent_permittivity=17.0, temperature=20.0)[1]
    saline = told(
        "topp-1980", probe={}, apparent_permittivity=17.0, temperature=20.0, bulk_conductivity=3.0
    )[1]  # fmt: skip
    assert clay["water_content_u"] > 1.5 * plain
    assert saline["water_content_u"] > 1.5 * plain


def test_conduction_is_corrected_where_the_frequency_is_known():
    """Ka of eps' = 20 and 0.2 S/m at 100 MHz is 28.75: by Ka = (|eps| + eps') / 2."""
    loss = 2.0 / 10 / (2 * np.pi * 100e6 * 8.8541878128e-12)
    seen = (np.hypot(20.0, loss) + 20.0) / 2
    probe = {"frequency": 100e6}
    flags, found = told(
        "topp-1980", probe=probe, apparent_permittivity=seen, temperature=20.0,
        bulk_conductivity=2.0,
    )  # fmt: skip
    clean = told("topp-1980", probe=probe, apparent_permittivity=20.0, temperature=20.0)[1]
    assert "lossy" in flags
    assert_allclose(found["water_content"], clean["water_content"], rtol=1e-12)
    raw = told("topp-1980", probe=probe, apparent_permittivity=seen, temperature=20.0)[1]
    assert_allclose(
        found["conduction_correction"], raw["water_content"] - clean["water_content"], rtol=1e-9
    )


def test_too_much_loss_leaves_no_number():
    flags, found = told(
        "topp-1980", probe={"frequency": 50e6}, apparent_permittivity=20.0, temperature=20.0,
        bulk_conductivity=2.0,
    )  # fmt: skip
    assert "too-lossy" in flags
    assert np.isnan(found["water_content"])


def test_travel_time_is_the_apparent_permittivity_of_the_rods():
    """Ka = (c t / 2 L)^2: 10 ns along 0.30 m of rods are 24.97 (c = 0.299792458 m/ns)."""
    expected = (0.299792458 * 10.0 / 0.6) ** 2
    by_time = told("topp-1980", probe={"probe_length": 0.3}, travel_time=10.0)[1]
    by_number = told("topp-1980", apparent_permittivity=expected, probe={})[1]
    assert_allclose(by_time["water_content"], by_number["water_content"], rtol=1e-12)


def test_a_row_does_not_know_of_its_neighbours():
    rng = np.random.default_rng(4)
    columns = {
        "apparent_permittivity": rng.uniform(1.5, 60.0, 300),
        "temperature": rng.uniform(-3.0, 40.0, 300),
    }
    basis = basis_for("crim", probe={"apparent_permittivity_u": 0.3})
    together = estimate(read(columns, {}, {}), basis)
    for row in range(0, 300, 37):
        alone = estimate(read({n: v[row : row + 1] for n, v in columns.items()}, {}, {}), basis)
        assert alone.flags[0] == together.flags[row]
        for name, values in together.columns.items():
            assert_allclose(alone.columns[name][0], values[row], rtol=0, atol=0, equal_nan=True)


def test_the_shared_part_is_a_part():
    basis = basis_for("crim", probe={"apparent_permittivity_u": 0.3, "temperature_u": 0.5})
    columns = {"apparent_permittivity": np.linspace(4, 30, 50), "temperature": np.full(50, 15.0)}
    answer = estimate(read(columns, {}, {}), basis).columns
    assert np.all(answer["water_content_u_shared"] > 0)
    assert np.all(answer["water_content_u_shared"] < answer["water_content_u"])


def test_columns_of_an_answer_depend_on_the_basis_alone():
    basis = basis_for("crim")
    for value in (17.0, NAN):
        columns = {"apparent_permittivity": np.array([value]), "temperature": np.array([14.0])}
        assert tuple(estimate(read(columns, {}, {}), basis).columns) == columns_of(basis)


def test_the_choice_says_why_and_depends_on_the_soil():
    query = Query(model="", soil=SOIL, probe={"frequency": 1e9},
                  columns=frozenset({"apparent_permittivity", "temperature"}))  # fmt: skip
    mineral = choose(query)
    assert mineral.advice[0].code == "model-chosen"
    assert mineral.model.key in mineral.advice[0].text
    peat = choose(replace(query, soil=describe("peat", {}, {})))
    assert peat.model.soils != "mineral"
    cold = choose(replace(query, columns=frozenset({"apparent_permittivity"})))
    assert cold.model.water is None


def test_where_no_model_holds_at_the_frequency_the_choice_says_so():
    query = Query(model="", soil=SOIL, probe={"frequency": 40e9},
                  columns=frozenset({"apparent_permittivity"}))  # fmt: skip
    assert "None of them is made for this frequency" in choose(query).advice[0].text


@pytest.mark.parametrize(
    ("expected", "soil", "probe", "columns"),
    [
        ("crim", SOIL, {"frequency": 1e9}, {"apparent_permittivity", "temperature"}),
        ("crim", SOIL, {"frequency": 1e9}, {"real_permittivity", "temperature"}),
        ("malicki-1996", SOIL, {"frequency": 1e9}, {"apparent_permittivity"}),
        ("topp-1980", describe(None, {}, {}), {}, {"apparent_permittivity"}),
        ("roth-1992-organic", describe("peat", {}, {}), {}, {"apparent_permittivity"}),
        ("mironov-2009", SOIL, {"frequency": 1e8}, {"apparent_permittivity"}),
    ],
)
def test_the_choice_for_usual_soils_is_the_usual_one(expected, soil, probe, columns):
    query = Query(model="", soil=soil, probe=probe, columns=frozenset(columns))
    assert choose(query).model.key == expected


@pytest.mark.parametrize("key", ["crim", "topp-1980", "de-loor-1968"])
def test_measured_loss_needs_no_frequency(key):
    """eps' = 18.5 beside eps'' = 22.35: Ka = 23.8 must not be taken for the low-loss Ka."""
    cells = {"real_permittivity": 18.5, "imaginary_permittivity": 22.35, "temperature": 20.0}
    stated = told(key, probe={"frequency": 1e9}, **cells)[1]["water_content"]
    unstated = told(key, probe={}, **cells)[1]["water_content"]
    assert_allclose(unstated, stated, rtol=1e-3)


def test_a_curve_that_holds_its_own_loss_is_not_corrected_for_it():
    """Mironov (2009) at 100 MHz, clay 0.30: its own Ka gives its own water content back."""
    model = MIXING_MODELS["mironov-2009"]
    seen = model.to_permittivity(0.25, frequency=1e8, clay=0.30)
    found = told("mironov-2009", soil=describe(None, {"clay": 0.30}, {}),
                 probe={"frequency": 1e8}, apparent_permittivity=float(seen), temperature=20.0,
                 bulk_conductivity=1.0)[1]  # fmt: skip
    assert_allclose(found["water_content"], 0.25, atol=1e-9)


@pytest.mark.parametrize("time", [0.5, 1.0])
def test_a_travel_time_faster_than_light_is_no_reading(time):
    """Along 0.30 m of rods there and back light itself needs 2.0 ns."""
    flags, found = told("topp-1980", probe={"probe_length": 0.3}, travel_time=time)
    assert "out-of-gate:travel_time" in flags
    assert np.isnan(found["water_content"])


def test_a_missing_frequency_is_not_taken_for_a_known_one():
    cells = {"apparent_permittivity": 24.0, "temperature": 20.0, "bulk_conductivity": 3.0}
    unknown = told("topp-1980", probe={}, frequency=NAN, **cells)[1]
    assert np.isnan(unknown["conduction_correction"])
    dry = told("topp-1980", probe={}, **(cells | {"bulk_conductivity": 0.0}))[1]
    assert unknown["water_content_lower"] < dry["water_content_lower"] - 0.005


def test_what_is_missing_is_named_with_where_to_say_it():
    with pytest.raises(ModelError, match=r"needs porosity .*soil\.bulk_density or soil\.texture"):
        prepare(Query(model="crim", soil=describe(None, {}, {})))


def test_every_flag_can_be_carried_and_every_advisory_filled_in():
    assert {slug.partition(":")[0] for slug in SLUGS} == set(FLAGS)
    assert len(SLUGS) <= 64
    for advisory in ADVISORIES.values():
        filled = advisory.text.format(**dict.fromkeys(advisory.places, "x"))
        assert "{" not in filled.replace('{"x": "x"}', "")


def test_a_model_that_holds_conduction_says_that_it_corrects_for_none():
    """At 70 MHz 0.1 S/m are a loss of 26, which leaves an eps' of 7 of a Ka of 17.2."""
    loam, probe = describe("loam", {}, {}), {"frequency": 70e6}
    calm, little = told("mironov-2009", soil=loam, probe=probe, apparent_permittivity=17.2,
                        temperature=20.0, bulk_conductivity=0.0)  # fmt: skip
    told_so, found = told("mironov-2009", soil=loam, probe=probe, apparent_permittivity=17.2,
                          temperature=20.0, bulk_conductivity=1.0)  # fmt: skip
    assert "conduction-not-corrected" in told_so - calm
    assert found["water_content"] == little["water_content"]
    assert found["water_content_lower"] < little["water_content_lower"] - 0.005


@pytest.mark.parametrize("key", ["mironov-2009", "crim", "topp-1980"])
def test_no_permittivity_is_left_below_half_of_the_loss(key):
    """Ka = (|eps| + eps') / 2 is never below eps'' / 2: here eps'' is 103 at 4 dS/m."""
    flags, found = told(
        key, soil=describe("loam", {}, {}), probe={"frequency": 70e6},
        apparent_permittivity=17.2, temperature=20.0, bulk_conductivity=4.0,
    )  # fmt: skip
    assert "too-lossy" in flags
    assert np.isnan(found["water_content"])


def test_a_temperature_outside_the_water_model_explains_no_missing_number():
    soil = describe("loam", {"bulk_density": 2300.0}, {"bulk_density": 100.0})
    for warmth in (40.0, 45.0):
        flags, found = told("peplinski-1995", soil=soil, probe={"frequency": 7e8},
                            apparent_permittivity=3.9, temperature=warmth)  # fmt: skip
        assert np.isnan(found["water_content"])
        assert "no-solution" in flags


@pytest.mark.parametrize("key", ["kellner-lundin-2001", "schaap-1997", "roth-1992-organic"])
def test_a_curve_of_peat_is_out_of_place_in_a_mineral_class(key):
    """A texture class other than peat says as much as a small content of organic matter."""
    loam, organic = describe("loam", {}, {}), describe("loam", {"organic_matter": 0.02}, {})
    by_class, one = told(key, soil=loam, apparent_permittivity=18.0, temperature=15.0)
    by_content, other = told(key, soil=organic, apparent_permittivity=18.0, temperature=15.0)
    assert "outside-model-range" in by_class & by_content
    assert one["water_content_u"] == pytest.approx(other["water_content_u"], rel=0.03)
    assert "outside-model-range" not in told(
        key, soil=describe("peat", {}, {}), apparent_permittivity=40.0, temperature=15.0
    )[0]  # fmt: skip


def test_a_content_that_the_class_cannot_have_is_told():
    """Sand has at most a tenth of clay in every triangle of texture; loam 7 to 27 % (USDA)."""

    def said(texture, **given):
        query = Query(model="crim", soil=describe(texture, given, {}), columns=frozenset())
        return [each.text for each in prepare(query).advice if each.code == "texture-disagrees"]

    assert "clay 0.6 is not that of the texture class sand" in said("sand", clay=0.6)[0]
    assert said("loam", clay=0.7)
    assert not said("loam", clay=0.27)
    assert not said("clay", clay=0.55, sand=0.2)


def test_less_than_pure_water_conducts_is_no_salt():
    """5.5e-8 S/cm at 25 Cel: the self-ionisation of water, as handbooks have it."""
    flags, found = told(
        "crim", soil=describe("loam", {}, {}), apparent_permittivity=17.2, temperature=25.0,
        bulk_conductivity=1e-6,
    )  # fmt: skip
    assert "no-pore-water" in flags
    assert np.isnan(found["pore_water_conductivity"])


def test_salt_goes_with_the_water_that_is_told():
    """ECe = ECp theta / (SP rho_b), with the water content beside it: the pores hold no more."""
    values = {"porosity": 0.40, "bulk_density": 1590.0, "saturation_percentage": 0.4}
    soil = describe("loam", values, {"porosity": 0.01})
    flags, found = told("crim", soil=soil, apparent_permittivity=28.0, apparent_permittivity_u=2.0,
                        temperature=25.0, bulk_conductivity=1.0)  # fmt: skip
    assert "wetter-than-pores" in flags
    paste = found["pore_water_conductivity"] * found["water_content"] / (0.4 * 1.59)
    assert found["saturation_extract_conductivity"] == pytest.approx(paste, rel=1e-9)
