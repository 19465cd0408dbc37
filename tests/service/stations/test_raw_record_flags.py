"""What a kept raw record is flagged by shows in the rows that were made from it."""

from tests.service.stations.farm import post, put
from tests.service.sweeps.asking import two_port_text


def flags_of(client, name, sample_length):
    put(client, "soil", "flag-loam", {"texture": "loam", "porosity": 0.45, "mixing_model": "crim"})
    settings = {"scattering": {"at_frequency": 1e9, "line": {"sample_length": sample_length}}}
    put(client, "probe", name, {"raw_records": settings})
    body = {"installations": [{"probe": name, "soil": "flag-loam", "depth": 0.1}]}
    put(client, "station", name, body)
    record = {"touchstone": two_port_text("loam_30mm")}
    row = {"time": "2026-05-04T06:00:00Z", "probe": name, "temperature": 22.0, "scattering": record}
    assert post(client, [row], name).json()["accepted"] == 1
    answer = client.get(f"/v1/stations/{name}/estimates")
    assert answer.status_code == 200, answer.text
    (found,) = answer.json()["estimates"]
    table = client.get(f"/v1/stations/{name}/estimates", headers={"Accept": "text/csv"}).text
    return found["flags"], table


def test_a_row_says_that_its_record_is_doubtful(client):
    told, table = flags_of(client, "flag-short", 0.02)
    assert "raw-record-flagged" in told
    assert "raw-record-flagged" in table


def test_a_row_of_a_record_in_order_says_nothing(client):
    told, table = flags_of(client, "flag-right", 0.03)
    assert "raw-record-flagged" not in told
    assert "raw-record-flagged" not in table
