"""What the science knows, as the API tells it."""

import json

import pytest

from models.mixing import MIXING_MODELS
from models.quantity import QUANTITIES
from models.relation import Citation, Parameter, Range, ranges
from models.soil import TEXTURES
from service.routes.catalogues import CATALOGUES
from service.schemas.catalogue import converted, entry_of, shown

PATHS = [catalogue.path for catalogue in CATALOGUES]


@pytest.fixture(params=PATHS)
def path(request):
    return f"/v1/{request.param}"


def listed(server, path):
    (entries,) = server.client.get(path).json().values()
    return entries


def test_every_member_is_listed_and_has_its_own_address(server, path):
    entries = listed(server, path)
    catalogue = next(c for c in CATALOGUES if path.endswith(c.path))
    assert len(entries) == sum(len(registry) for registry in catalogue.registries)
    for entry in entries:
        assert server.client.get(f"{path}/{entry['name']}").json()["name"] == entry["name"]


def test_a_member_nobody_knows_is_404_with_the_nearest(server):
    answer = server.client.get("/v1/mixing-models/topp-1908")
    assert answer.status_code == 404
    assert answer.json()["detail"].endswith("did you mean topp-1980?")


def test_a_catalogue_is_json_without_nan(server, path):
    text = server.client.get(path).text
    json.loads(text, parse_constant=pytest.fail)


def test_whoever_has_it_gets_304(server, path):
    tag = server.client.get(path).headers["etag"]
    assert tag.startswith('"')
    for known in (tag, f"W/{tag}", f'"other", {tag}', "*"):
        answer = server.client.get(path, headers={"If-None-Match": known})
        assert answer.status_code == 304
        assert answer.content == b""
        assert answer.headers["etag"] == tag
    assert server.client.get(path, headers={"If-None-Match": '"other"'}).status_code == 200


def test_catalogues_differ_in_their_tags(server):
    assert len({server.client.get(f"/v1/{p}").headers["etag"] for p in PATHS}) == len(PATHS)


def test_every_relation_names_its_source_inputs_and_range(server):
    for path in ("mixing-models", "water-models", "temperature-compensations"):
        for entry in listed(server, f"/v1/{path}"):
            assert {"title", "equation", "revision", "validity"} <= entry.keys()
            assert {"authors", "year", "title", "where"} <= entry["citation"].keys()
            assert entry["inputs"]


def test_every_mixing_model_gives_a_reason_for_its_uncertainty(server):
    for entry in listed(server, "/v1/mixing-models"):
        assert entry["default_model_uncertainty"]["reason"]
        assert "published_standard_error" in entry
        assert entry["inputs"][0] in QUANTITIES


def test_flags_and_advisories_tell_which_they_are(server):
    assert {entry["kind"] for entry in listed(server, "/v1/flags")} == {"flag", "advisory"}


def test_densities_are_shown_in_the_unit_of_the_api():
    loam = entry_of(TEXTURES["loam"])
    assert loam["bulk_density"] == TEXTURES["loam"].bulk_density / 1000
    assert loam["bulk_density_u"] == TEXTURES["loam"].bulk_density_u / 1000
    assert loam["units"]["bulk_density"] == "g/cm3"


def test_a_parameter_that_is_a_quantity_is_converted_and_another_is_not():
    density = Parameter(name="bulk_density", meaning="", range=Range(800.0, 1900.0),
                        default=1300.0, default_u=50.0)  # fmt: skip
    own = Parameter(name="exponent", meaning="", range=Range(0.3, 0.7), default=0.5)
    assert shown(density) | {"range": None} == shown(density) | {
        "default": 1.3, "default_u": 0.05, "unit": "g/cm3", "range": None,
    }  # fmt: skip
    assert shown(density)["range"] == {"low": 0.8, "high": 1.9, "unit": "g/cm3"}
    assert shown(own)["range"] == {"low": 0.3, "high": 0.7}
    assert shown(own)["unit"] is None


def test_conductivities_lose_no_digit_on_the_way():
    assert converted(ranges(bulk_conductivity=(0.03, 0.07)), "validity") == {
        "bulk_conductivity": {"low": 0.3, "high": 0.7, "unit": "dS/m"}
    }


def test_what_is_not_a_number_is_null():
    assert converted(float("inf"), "high") is None
    assert converted(float("nan"), "temperature") is None
    assert shown(Citation(authors="A", year=1, title="t", where="w"))["equation"] is None


def test_no_mixing_model_has_lost_a_field():
    entry = entry_of(MIXING_MODELS["topp-1980"])
    assert entry["name"] == "topp-1980"
    assert entry["citation"]["year"] == 1980
    assert not any("to_" in name for name in entry)


def test_a_mixing_model_tells_how_its_own_error_grows(server):
    """The terms are those of the band: clay that a model does not take, and no others."""
    entries = {e["name"]: e for e in listed(server, "/v1/mixing-models")}
    grows = {name: " ".join(e["default_model_uncertainty"]["grows"]) for name, e in entries.items()}
    assert all(grows.values())
    assert "clay" in grows["topp-1980"]
    assert "25 to 35 % clay" not in grows["mironov-2009"]
    assert "correcting for conduction would be" in grows["mironov-2009"]
    assert "per K" in grows["topp-1980"]
    assert "per K" not in grows["crim"]
    (entries,) = server.client.get("/v1/pore-water-models").json().values()
    assert {e["default_model_uncertainty"]["floor_unit"] for e in entries} == {"S/m"}
