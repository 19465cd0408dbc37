"""Soils, probes and stations: revisions, preconditions, and what may not go."""

import pytest

from tests.service.stations.farm import post, put, reading


def test_the_same_content_again_changes_nothing(client):
    first = put(client, "soil", "silt-a", {"texture": "silt"})
    again = put(client, "soil", "silt-a", {"texture": "silt"})
    assert (first.status_code, again.status_code) == (201, 200)
    assert first.headers["etag"] == again.headers["etag"]
    assert first.headers["location"] == "/v1/soils/silt-a"


def test_what_was_answered_can_be_sent_back(client):
    first = put(client, "soil", "silt-b", {"texture": "silt", "bulk_density": 1.3}).json()
    assert put(client, "soil", "silt-b", first).status_code == 200


def test_nobody_overwrites_what_he_has_not_seen(client):
    tag = put(client, "probe", "seen", {"frequency": 1e8}).headers["etag"]
    assert put(client, "probe", "seen", {"frequency": 2e8}).status_code == 428
    changed = put(client, "probe", "seen", {"frequency": 2e8}, **{"If-Match": tag})
    assert changed.status_code == 200
    late = put(client, "probe", "seen", {"frequency": 3e8}, **{"If-Match": tag})
    assert late.status_code == 412
    assert late.headers["etag"] == changed.headers["etag"]
    any_one = put(client, "probe", "seen", {"frequency": 4e8}, **{"If-Match": "*"})
    assert any_one.status_code == 200
    new = put(client, "probe", "never", {"frequency": 4e8}, **{"If-Match": tag})
    assert new.status_code == 412
    taken = put(client, "probe", "seen", {"frequency": 5e8}, **{"If-None-Match": "*"})
    assert taken.status_code == 412


def test_an_unchanged_document_is_304(client):
    tag = put(client, "soil", "tagged", {"clay": 0.2}).headers["etag"]
    answer = client.get("/v1/soils/tagged", headers={"If-None-Match": tag})
    assert (answer.status_code, answer.content) == (304, b"")


def test_old_revisions_stay(client):
    tag = put(client, "soil", "moving", {"clay": 0.2}).headers["etag"]
    put(client, "soil", "moving", {"clay": 0.3}, **{"If-Match": tag})
    then = client.get("/v1/soils/moving", params={"at_revision": tag.strip('"')})
    assert then.json()["clay"] == 0.2
    assert client.get("/v1/soils/moving").json()["clay"] == 0.3
    assert client.delete("/v1/soils/moving").json()["deleted"] is True
    assert client.get("/v1/soils/moving").status_code == 404
    told = [c for c in client.get("/v1/changes").json()["changes"] if c["name"] == "moving"]
    assert [(c["deleted"], (c["body"] or {}).get("clay")) for c in told] == [
        (False, 0.2), (False, 0.3), (True, None),
    ]  # fmt: skip


def test_what_readings_and_stations_refer_to_stays(client):
    post(client, [reading(0)])
    for path in ("/v1/stations/north-1", "/v1/probes/p1", "/v1/soils/loam"):
        answer = client.delete(path)
        assert answer.status_code == 409, path
        assert answer.json()["type"] == "/problems/conflict"


def test_percent_for_a_fraction_is_refused_or_named(client):
    refused = put(client, "soil", "clayey", {"clay": 22})
    (error,) = refused.json()["errors"]
    assert error["pointer"] == "#/clay"
    assert "0.22" in error["detail"]
    named = put(client, "soil", "clayey", {"clay": 22, "units": {"clay": "%"}})
    assert named.json()["clay"] == pytest.approx(0.22, abs=1e-12)


@pytest.mark.parametrize(
    ("kind", "body", "pointer"),
    [
        ("soil", {"claay": 0.2}, "#/claay"),
        ("soil", {"mixing_model": "nobody-1900"}, "#/mixing_model"),
        ("probe", {"frequency": "fast"}, "#/frequency"),
        ("probe", {"probe_length": 150}, "#/probe_length"),
        ("station", {"zone": "Mars/Olympus"}, "#/zone"),
        ("station", {"sentinels": {"colour": [1]}}, "#/sentinels/colour"),
        ("station", {"position": {"longitude": 200, "latitude": 0}}, "#/position/longitude"),
        ("station", {"installations": [{"probe": "p9", "soil": "loam", "depth": 0.1}]},
         "#/installations/0/probe"),
        ("station", {"installations": [{"probe": "p1", "soil": "loam", "depth": 0.1,
                                        "from": "2026-05-04T06:00:00"}]}, "#/installations/0/from"),
        ("station", {"installations": [{"probe": "p1", "soil": "loam", "depth": 0.1},
                                       {"probe": "p1", "soil": "loam", "depth": 0.3}]},
         "#/installations/1/probe"),
    ],
)  # fmt: skip
def test_a_fault_is_told_where_it_is(client, kind, body, pointer):
    answer = put(client, kind, "faulty", body)
    assert answer.status_code == 422
    assert pointer in [error["pointer"] for error in answer.json()["errors"]]
    assert client.get(f"/v1/{kind}s/faulty").status_code == 404


@pytest.mark.parametrize(
    "name",
    ["x'; DROP TABLE reading; --", "../../etc/passwd", "=HYPERLINK(1)", "<script>", "1a", "a" * 65],
)
def test_a_name_is_a_word(client, name):
    answer = client.put("/v1/soils/" + name.replace("/", "%2F"), json={})
    assert answer.status_code in {404, 422}


def test_markup_in_a_title_stays_text(client):
    title = "<script>alert(1)</script> & 'co'"
    put(client, "station", "marked", {"title": title, "installations": []})
    assert client.get("/v1/stations/marked").json()["title"] == title
    chart = client.get("/v1/stations/marked/chart.svg").text
    assert "<script" not in chart
    assert "&lt;script&gt;" in chart


@pytest.mark.parametrize(
    ("body", "told"),
    [
        ({"porosity": 0.3, "bulk_density": 1.0}, "contradict each other"),
        ({"texture": "sand", "clay": 0.6}, "clay 0.6 is far from a soil called sand"),
        ({"texture": "clay", "sand": 0.9, "clay": 0.05}, "sand 0.9 is far"),
    ],
)
def test_a_soil_that_contradicts_itself_is_kept_and_told(client, body, told):
    name = f"odd-{len(told)}"
    for answer in (client.put(f"/v1/soils/{name}", json=body), client.get(f"/v1/soils/{name}")):
        assert answer.status_code in {200, 201}
        assert any(told in one["text"] for one in answer.json()["advisories"])
    again = client.put(f"/v1/soils/{name}", json=answer.json())
    assert again.json()["revision"] == answer.json()["revision"]


def test_a_soil_in_harmony_with_itself_has_no_advisories(client):
    body = {"texture": "loam", "clay": 0.22, "porosity": 0.46, "bulk_density": 1.42}
    assert "advisories" not in client.put("/v1/soils/even", json=body).json()


def test_a_field_capacity_below_the_wilting_point_is_refused(client):
    body = {"field_capacity": 0.1, "wilting_point": 0.3}
    answer = client.put("/v1/soils/inverted", json=body)
    assert answer.status_code == 422
    assert answer.json()["errors"][0]["pointer"] == "#/field_capacity"
    assert client.put(
        "/v1/soils/upright", json={"field_capacity": 0.3, "wilting_point": 0.1}
    ).is_success


def test_messages_about_names_tags_and_revisions_say_what_to_send(client):
    made = client.put("/v1/soils/tagged-once", json={"texture": "loam"})
    number = made.json()["revision"]
    unquoted = client.put("/v1/soils/tagged-once", json={"texture": "clay"},
                          headers={"If-Match": str(number)})  # fmt: skip
    assert (unquoted.status_code, f'If-Match: "{number}"' in unquoted.json()["detail"]) == (
        412,
        True,
    )
    spaced = client.put("/v1/soils/a%20name", json={"texture": "loam"})
    assert (spaced.status_code, "a letter, then at most 63" in spaced.json()["detail"]) == (
        422,
        True,
    )
    early = client.get("/v1/soils/tagged-once", params={"at_revision": number - 1})
    assert (early.status_code, f"at revision {number - 1}" in early.json()["detail"]) == (404, True)
    title = client.put("/v1/soils/titled", json={"title": "a\x00b", "texture": "loam"})
    assert (title.status_code, "control characters" in title.json()["detail"]) == (422, True)
    slash = client.get("/v1/soils/tagged-once/")
    assert (slash.status_code, "ask for /v1/soils/tagged-once" in slash.json()["detail"]) == (
        404,
        True,
    )
