"""Wrong pairs of every kind: an error that names the pair, and how to mend it."""

import pytest

from tests.service.calibrations.asking import COLUMNS, PERMITTIVITY, ROWS, WATER, asked, with_pairs


def weighed(**more):
    dry = {"apparent_permittivity": PERMITTIVITY, "gravimetric_water_content": WATER}
    return {"pairs": {**dry, **more}}


def rows(place, **pair):
    changed = [dict(row) for row in ROWS["pairs"]]
    changed[place] = pair
    return {"pairs": changed}


@pytest.mark.parametrize(
    ("body", "sentence", "pointer"),
    [
        (with_pairs(water_content=[*WATER[:11], 25.1]), "pair 12: expected water_content from 0 "
         "to 1 m3/m3, found 25.1: that looks like %; send 0.251", "#/pairs/water_content/11"),
        (rows(1, apparent_permittivity=0.4, water_content=0.1),
         "pair 2: expected apparent_permittivity from 1 to 200 1, found 0.4",
         "#/pairs/1/apparent_permittivity"),
        (rows(1, apparent_permittivity=4.0), "pair 2: has neither water_content nor "
         "gravimetric_water_content", "#/pairs/1"),
        (rows(2, apparent_permittivity=4.0, real_permittivity=4.0, water_content=0.1),
         "pair 3: has apparent_permittivity and real_permittivity: give one",
         "#/pairs/2/real_permittivity"),
        (rows(0, apparent_permittivity=4.0, water_content=0.1, water_content_u=-0.01),
         "at least 0", "#/pairs/0/water_content_u"),
        (rows(0, apparent_permittivity=4.0, water_content=0.1, water_content_u=0.01),
         "pair 2: has no water_content_u while other pairs have one",
         "#/pairs/1/water_content_u"),
        (rows(0, apparent_permittivity=4.0, water_content=0.1, bulk_density_u=0.01),
         "pair 1: bulk_density_u stands without bulk_density", "#/pairs/0/bulk_density_u"),
        (rows(0, apparent_permittivity="4", water_content=0.1), "expected a number, found \"4\"",
         "#/pairs/0/apparent_permittivity"),
        (rows(0, aparent_permittivity=4.0, water_content=0.1), "did you mean "
         "apparent_permittivity?", "#/pairs/0/aparent_permittivity"),
        (with_pairs(water_content_u=[-0.01, *[0.01] * 11]), "pair 1: water_content_u must be at "
         "least 0, found -0.01", "#/pairs/water_content_u/0"),
        (with_pairs(water_content=WATER[:11]), "equal length, found apparent_permittivity 12, "
         "water_content 11", "#/pairs"),
        (with_pairs(water_content_u=[0.0, *[0.01] * 11]), "pair 1 is exact while others",
         "#/pairs"),
        (with_pairs(apparent_permittivity=[9.0] * 12), "all 12 pairs have the same permittivity",
         "#/pairs"),
        ({"pairs": ROWS["pairs"][:3]}, "needs at least 4 pairs, found 3", "#/pairs"),
        ({"pairs": ROWS["pairs"][:5], "form": "polynomial", "degree": 3},
         "polynomial-3 has 4 coefficients and needs at least 6 pairs, found 5", "#/pairs"),
        ({"pairs": []}, "needs at least 4 pairs, found 0", "#/pairs"),
        ({}, "pairs is missing", "#/pairs"),
        (weighed(), "pair 1: a gravimetric water content needs a bulk density", "#/pairs"),
        ({**weighed(), "bulk_density": 1400}, "looks like kg/m3; send 1.4", "#/bulk_density"),
        ({**weighed(gravimetric_water_content=[18.0, *WATER[1:]]), "bulk_density": 1.4},
         "make a water content of 25.2 m3/m3, more than 1",
         "#/pairs/gravimetric_water_content/0"),
        ({**COLUMNS, "bulk_density_u": 0.02}, "stands without it", "#/bulk_density_u"),
        ({**COLUMNS, "water_content_u": -0.01}, "at least 0", "#/water_content_u"),
        ({**COLUMNS, "apparent_permittivity_u": 20.0}, "cannot be told apart", "#/pairs"),
        ({**COLUMNS, "form": "square-root", "degree": 2}, "square-root has no degree", "#/degree"),
        ({**COLUMNS, "form": "linear"}, "'square-root' or 'polynomial'", "#/form"),
        ({**COLUMNS, "at": {"apparent_permittivity": [0.5]}}, "from 1 to 200",
         "#/at/apparent_permittivity/0"),
        ({**COLUMNS, "at": {"apparent_permittivity": [5, 6], "apparent_permittivity_u": [1]}},
         "2 permittivities and 1 uncertainties", "#/at/apparent_permittivity_u"),
        ({**COLUMNS, "coverage_probability": 95}, "for 95 % send 0.95", "#/coverage_probability"),
        ({**COLUMNS, "units": {"water_content": "kg"}}, "it takes 1, %, m3/m3",
         "#/units/water_content"),
    ],
)  # fmt: skip
def test_what_cannot_be_used_is_named_and_mended(server, body, sentence, pointer):
    problem = asked(server, body, 422)
    told = [fault["detail"] for fault in problem["errors"] if fault["pointer"] == pointer]
    assert any(sentence in detail for detail in told), problem


def test_a_body_that_is_no_number_says_so(server):
    sent = b'{"pairs": {"apparent_permittivity": [4.0, NaN], "water_content": [0.1, 0.2]}}'
    answer = server.client.post(
        "/v1/calibrations", content=sent, headers={"Content-Type": "application/json"}
    )
    assert answer.status_code == 400
    assert "JSON has no NaN" in answer.json()["detail"]


def test_a_table_is_not_taken(server):
    answer = server.client.post(
        "/v1/calibrations", content=b"a,b\n1,2\n", headers={"Content-Type": "text/csv"}
    )
    assert answer.status_code == 415
    assert answer.headers["Accept"] == "application/json"


def test_many_faults_are_told_at_once_but_not_without_end(server):
    percent = with_pairs(apparent_permittivity=[9.0] * 60, water_content=[30.0] * 60)
    problem = asked(server, percent, 422)
    assert len(problem["errors"]) == 20
    assert problem["errors"][19]["pointer"] == "#/pairs/water_content/19"
