"""What can be asked beside an estimate: draws, budget, validation, every model side by side."""

import io
import json
import math

import numpy as np
import polars as pl
import pytest
from scipy import stats

LOAM = {"texture": "loam", "porosity": 0.46, "porosity_u": 0.02}
PROBE = {"frequency": 1e9, "apparent_permittivity_u": 0.3}
READINGS = [
    {"apparent_permittivity": 17.2, "temperature": 14.1},
    {"apparent_permittivity": 8.0, "temperature": 14.1},
    {"apparent_permittivity": None, "temperature": 14.1},
]
CSV = b"apparent_permittivity,temperature\n17.2,14.1\n8.0,14.1\n,14.1\n"


def ask(server, **changes):
    request = {"mixing_model": "crim", "soil": LOAM, "probe": PROBE, "readings": READINGS}
    return server.client.post("/v1/estimates", json=request | changes, timeout=60)


def answered(server, **changes):
    answer = ask(server, **changes)
    assert answer.status_code == 200, answer.text
    return answer.json()


def drawn(draws, seed=1):
    return {"method": "monte-carlo", "draws": draws, "seed": seed}


def test_draws_agree_with_first_order_where_the_equation_is_nearly_straight(server):
    """JCGM 101, clause 8: for a nearly linear measurand both methods agree."""
    by_order = answered(server)["estimates"][0]
    by_draws = answered(server, propagation=drawn(50_000))["estimates"][0]
    assert by_draws["water_content"] == by_order["water_content"]
    assert math.isclose(by_draws["water_content_u"], by_order["water_content_u"], rel_tol=0.02)
    half = (by_order["water_content_upper"] - by_order["water_content_lower"]) / 2
    for end in ("water_content_lower", "water_content_upper"):
        assert abs(by_draws[end] - by_order[end]) < 0.03 * half


def test_a_row_without_a_number_has_none_by_draws_either(server):
    row = answered(server, propagation=drawn(1000))["estimates"][2]
    assert row["water_content"] is None
    assert row["water_content_lower"] is None
    assert "no-permittivity" in row["flags"]


def test_draws_are_the_same_in_any_order_and_any_company(server):
    together = answered(server, propagation=drawn(2000))["estimates"]
    turned = answered(server, propagation=drawn(2000), readings=READINGS[::-1])["estimates"]
    alone = answered(server, propagation=drawn(2000), readings=READINGS[1:2])["estimates"]
    assert together == turned[::-1]
    assert together[1] == alone[0]


def test_another_seed_gives_other_ends_within_the_noise_of_draws(server):
    ends = [
        answered(server, propagation=drawn(2000, seed))["estimates"][0]["water_content_upper"]
        for seed in (1, 2)
    ]
    assert ends[0] != ends[1]
    assert math.isclose(*ends, rel_tol=0.02)


def test_impossible_draws_are_counted_and_said(server):
    """A permittivity of dry soil: two in five draws are drier than dry."""
    dry = [{"apparent_permittivity": 2.6, "temperature": 14.1}]
    row = answered(server, propagation=drawn(2000), readings=dry)["estimates"][0]
    assert "draws-left-out" in row["flags"]
    assert row["water_content_lower"] >= 0.0


def test_draws_say_what_they_are_not_made_of(server):
    salty = [{"apparent_permittivity": 17.2, "temperature": 14.1, "bulk_conductivity": 0.6}]
    answer = answered(server, propagation=drawn(1000), readings=salty)
    assert "bulk-not-drawn" in {said["code"] for said in answer["advisories"]}


def test_more_draws_than_one_request_may_have_are_refused_before_they_are_made(server):
    many = {"apparent_permittivity": [17.2] * 2000, "temperature": [14.1] * 2000}
    answer = ask(server, readings=many, propagation=drawn(1_000_000))
    assert answer.status_code == 422
    (fault,) = answer.json()["errors"]
    assert fault["pointer"] == "#/propagation/draws"
    assert "at most 150000 draws" in fault["detail"]


def test_draws_of_a_table_are_those_of_json(server):
    query = (
        "?mixing_model=crim&texture=loam&porosity=0.46&porosity_u=0.02&frequency=1e9"
        "&apparent_permittivity_u=0.3&propagation=monte-carlo&draws=2000&seed=7"
    )
    answer = server.client.post(
        f"/v1/estimates{query}", content=CSV, headers={"Content-Type": "text/csv"}
    )
    assert answer.status_code == 200, answer.text
    table = pl.read_csv(io.BytesIO(answer.content))
    rows = answered(server, propagation=drawn(2000, 7))["estimates"]
    told = table["water_content_upper"].to_list()
    assert told == [row["water_content_upper"] for row in rows]


def test_the_budget_adds_up_and_names_what_would_narrow_the_band(server):
    budget = answered(server, budget=True)["budget"]
    total = np.sum([shares[:2] for shares in budget["share"].values()], axis=0)
    assert np.allclose(total, 1.0, rtol=1e-9)
    assert all(shares[2] is None for shares in budget["share"].values())
    assert "variance" in budget["largest"][0]
    assert budget["largest"][2] is None


def test_the_salt_has_a_budget_of_its_own(server):
    """The offset of Hilhorst (2000) works on the salt alone; ice has no salt to speak of."""
    salty = [
        {"apparent_permittivity": 17.2, "temperature": 14.1, "bulk_conductivity": 0.6},
        {"apparent_permittivity": 17.2, "temperature": -3.0, "bulk_conductivity": 0.6},
    ]
    budget = answered(server, budget=True, readings=salty, pore_water_model="hilhorst-2000")
    water, salt = budget["budget"], budget["budget"]["pore_water_conductivity"]
    assert np.isclose(sum(shares[0] for shares in salt["share"].values()), 1.0, rtol=1e-9)
    assert "offset" in salt["share"]
    assert "offset" not in water["share"]
    assert salt["largest"][1] is None


def test_the_budget_follows_what_is_known(server):
    exact = LOAM | {"solid_permittivity": 4.7, "porosity_u": 0.0}
    model = {"name": "crim", "standard_error": 0.0}
    budget = answered(server, soil=exact, mixing_model=model, budget=True)["budget"]
    assert set(budget["share"]) == {"apparent_permittivity", "water_model"}
    assert "apparent_permittivity makes 100%" in budget["largest"][0]


def test_first_order_is_validated_against_draws(server):
    found = answered(server, validate=True)["validation"]
    assert found["first_order_holds"] == [True, True, False]
    assert found["tolerance"][:2] == [
        0.0005,
        0.0005,
    ]  # JCGM 101 7.9.2: half a unit of the second digit
    assert found["tolerance"][2] is None


def test_first_order_does_not_hold_where_the_equation_bends(server):
    """Solids hardly known, a wide permittivity, and an equation that bends."""
    model = {"name": "maxwell-garnett", "standard_error": 0.0}
    soil = {"porosity": 0.46, "porosity_u": 0.06, "solid_permittivity": 4.7,
            "solid_permittivity_u": 1.5}  # fmt: skip
    found = answered(
        server, mixing_model=model, soil=soil, validate=True,
        readings=[{"apparent_permittivity": 5.0, "apparent_permittivity_u": 1.2,
                   "temperature": 14.1}],
    )["validation"]  # fmt: skip
    assert found["first_order_holds"] == [False]


def test_validation_of_too_many_readings_is_refused(server):
    many = {"apparent_permittivity": [17.2] * 1001, "temperature": [14.1] * 1001}
    answer = ask(server, readings=many, validate=True)
    assert answer.status_code == 422
    assert answer.json()["errors"][0]["pointer"] == "#/validate"


def test_all_models_stand_side_by_side(server):
    answer = answered(server, mixing_model="all")
    combined, models = answer["estimates"], answer["models"]
    weights = {name: [row["weight"] for row in rows] for name, rows in models.items()}
    assert math.isclose(sum(w[0] for w in weights.values()), 1.0)
    assert sum(w[2] for w in weights.values()) == 0.0
    names = {row["name"] for row in answer["mixing_models"]}
    assert names == set(models)
    assert {row["name"] for row in answer["not_answering"]} >= {"square-root", "polynomial"}
    values = [rows[0]["water_content"] for n, rows in models.items() if weights[n][0] > 0]
    assert min(values) < combined[0]["water_content"] < max(values)
    assert math.isclose(combined[0]["model_spread"], float(np.std(values, ddof=1)), rel_tol=1e-9)


def test_the_combination_is_the_weighted_mean_with_the_spread_between(server):
    """The law of total variance, against numpy and scipy's own weighted statistics."""
    answer = answered(server, mixing_model="all")
    rows = [model[0] for model in answer["models"].values() if model[0]["weight"] > 0]
    weight, theta, u = (
        np.array([row[name] for row in rows])
        for name in ("weight", "water_content", "water_content_u")
    )
    mean = np.average(theta, weights=weight)
    variance = np.average(u**2, weights=weight) + np.average((theta - mean) ** 2, weights=weight)
    combined = answer["estimates"][0]
    assert math.isclose(combined["water_content"], mean, rel_tol=1e-9)
    assert math.isclose(combined["water_content_u"], math.sqrt(variance), rel_tol=1e-9)
    reach = stats.norm.ppf(0.975) * math.sqrt(variance)
    assert math.isclose(combined["water_content_upper"], mean + reach, rel_tol=1e-4)


def test_models_for_other_soils_are_shown_and_weigh_nothing(server):
    models = answered(server, mixing_model="all")["models"]
    for name in ("roth-1992-organic", "kellner-lundin-2001", "schaap-1997"):
        assert models[name][0]["water_content"] is not None
        assert models[name][0]["weight"] == 0.0


def test_all_takes_no_parameters_and_nothing_beside(server):
    own = ask(server, mixing_model={"name": "all", "slope": 0.11})
    assert own.status_code == 422
    assert own.json()["errors"][0]["pointer"] == "#/mixing_model/slope"
    beside = ask(server, mixing_model="all", budget=True)
    assert beside.json()["errors"][0]["pointer"] == "#/budget"


def test_all_models_of_a_table_give_their_combination(server):
    answer = server.client.post(
        "/v1/estimates?mixing_model=all&texture=loam&porosity=0.46&porosity_u=0.02&frequency=1e9"
        "&apparent_permittivity_u=0.3",
        content=CSV, headers={"Content-Type": "text/csv"},
    )  # fmt: skip
    table = pl.read_csv(io.BytesIO(answer.content))
    rows = answered(server, mixing_model="all")["estimates"]
    assert table["model_spread"].to_list() == [row["model_spread"] for row in rows]
    assert answer.headers["Mixing-Model"] == "all"


@pytest.mark.parametrize("model", ["crim", "all"])
def test_a_table_says_in_headers_what_its_cells_cannot(server, model):
    answer = server.client.post(
        "/v1/estimates",
        json={"mixing_model": model, "soil": LOAM, "probe": PROBE, "readings": READINGS},
        headers={"Accept": "text/csv"},
    )
    assert answer.headers["Row-Count"] == "3"
    assert int(answer.headers["Flagged-Count"]) >= 1
    assert "indirect-measurement" in answer.headers["Advisories"]
    assert "water_content=m3/m3" in answer.headers["Units"]
    basis = json.loads(answer.headers["Estimate-Basis"])
    assert basis["soil"]["porosity"] == 0.46
    assert len(answer.headers["Estimate-Basis"]) < 4096


def test_what_only_json_can_say_is_refused_for_a_table(server):
    answer = server.client.post(
        "/v1/estimates",
        json={"mixing_model": "crim", "soil": LOAM, "readings": READINGS, "budget": True},
        headers={"Accept": "text/csv"},
    )
    assert answer.status_code == 422
    assert "Accept: application/json" in answer.json()["detail"]


def test_an_echoed_soil_sent_again_is_no_measured_one(server):
    """A default stays a default: the advisory holds as long as its condition does."""
    first = answered(server, soil={"texture": "loam"})
    again = answered(server, soil=first["soil"])
    assert again["estimates"] == first["estimates"]
    assert again["soil"] == first["soil"]
    for answer in (first, again):
        assert "texture-defaults" in {said["code"] for said in answer["advisories"]}


def test_a_pore_water_that_is_left_open_is_told(server):
    """Little conduction in a soil known by its texture alone: the ends are decades apart."""
    dry = [{"apparent_permittivity": 12.0, "temperature": 14.1, "bulk_conductivity": 0.02}]
    answer = answered(server, soil={"texture": "silt-loam"}, readings=dry)
    (row,) = answer["estimates"]
    told = {said["code"] for said in answer["advisories"]}
    upper = row["pore_water_conductivity_upper"]
    assert upper is None or upper > 100 * row["pore_water_conductivity_lower"]
    assert "pore-water-open" in told


def test_a_table_names_the_columns_that_were_read(server):
    answer = server.client.post(
        "/v1/estimates?mixing_model=topp-1980",
        content=b"apparent_permittivity,temperatur\n17.2,14.1\n",
        headers={"Content-Type": "text/csv"},
    )
    assert answer.headers["Columns-Read"] == "apparent_permittivity"


def test_a_flag_about_a_quantity_is_found_under_its_whole_name(server):
    answer = server.client.get("/v1/flags/missing:temperature")
    assert answer.status_code == 200
    assert answer.json()["name"] == "missing"
    assert server.client.get("/v1/mixing-models/crim:temperature").status_code == 404


def weights(answer):
    return {key: rows[0]["weight"] for key, rows in answer["models"].items()}


def test_all_models_answer_in_clay_at_low_frequency(server):
    """Where each of them leans, leaning takes no weight away: its band reaches down for it."""
    answer = answered(
        server, mixing_model="all", soil={"texture": "clay"}, probe={"frequency": 70e6},
        readings=[{"apparent_permittivity": 25, "temperature": 20}],
    )  # fmt: skip
    (row,) = answer["estimates"]
    within = [key for key, weight in weights(answer).items() if weight > 0]
    told = [answer["models"][key][0]["water_content"] for key in within]
    assert min(told) <= row["water_content"] <= max(told)
    assert row["flags"] == ["low-frequency"]


def test_where_no_model_holds_a_flag_says_so(server):
    answer = answered(
        server, mixing_model="all", soil={"texture": "loam"}, probe={"frequency": 1e9},
        readings=[{"apparent_permittivity": 80, "temperature": 14}],
    )  # fmt: skip
    (row,) = answer["estimates"]
    assert row["water_content"] is None
    assert "no-model-in-range" in row["flags"]
    assert not any(weights(answer).values())


def test_one_of_two_models_that_are_one_counts(server):
    """The power law at 1/2 is CRIM, and nu = 2 is Bruggeman: Sihvola (1999), from memory."""
    found = answered(server, mixing_model="all")
    for one, other in (("crim", "power-law"), ("bruggeman", "sihvola")):
        same = [found["models"][key][0]["water_content"] for key in (one, other)]
        assert same[0] == pytest.approx(same[1], rel=1e-6)
        assert weights(found)[one] > 0
        assert weights(found)[other] == 0


@pytest.mark.parametrize("salty", [
    {"pore_water_model": "hilhorst-2000"},
    {"readings": [{"apparent_permittivity": 17.2, "temperature": 14.1, "bulk_conductivity": 0.6}]},
], ids=["named", "measured"])  # fmt: skip
def test_all_models_tell_water_alone_and_say_so(server, salty):
    answer = answered(server, mixing_model="all", **salty)
    assert "pore_water_conductivity" not in answer["estimates"][0]
    assert "all-without-salt" in {said["code"] for said in answer["advisories"]}
