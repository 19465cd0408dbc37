"""A stored soil or probe by its name in a request for estimates."""

import pytest

from service.errors import Unprocessable
from service.stations.documents import Documents
from service.stations.named import names_something, with_stored
from service.store.interface import Document

DOCUMENTS = Documents().with_changes([
    Document("soil", "loam", 1, 0, None, {"title": "x", "clay": 0.2, "mixing_model": "crim"}),
    Document("probe", "rod", 2, 0, None, {"frequency": 1e9}),
])  # fmt: skip


def test_names_become_descriptions_and_bring_their_model():
    sent = {"soil": "loam", "probe": "rod", "coverage_probability": 0.9}
    assert names_something(sent)
    assert with_stored(sent, DOCUMENTS) == {
        "soil": {"clay": 0.2}, "probe": {"frequency": 1e9}, "mixing_model": "crim",
        "coverage_probability": 0.9,
    }  # fmt: skip


def test_what_the_request_states_beats_what_is_stored():
    assert with_stored({"soil": "loam", "mixing_model": "topp-1980"}, DOCUMENTS) == {
        "soil": {"clay": 0.2}, "mixing_model": "topp-1980",
    }  # fmt: skip


def test_descriptions_are_left_as_they_are():
    sent = {"soil": {"texture": "loam"}, "probe": {"frequency": 2e9}}
    assert not names_something(sent)
    assert with_stored(sent, DOCUMENTS) == sent


def test_an_unknown_name_is_told_with_the_nearest():
    with pytest.raises(Unprocessable) as refused:
        with_stored({"soil": "laom"}, DOCUMENTS)
    (fault,) = refused.value.errors
    assert fault.pointer == "#/soil"
    assert "did you mean loam?" in fault.detail


def test_a_stored_description_means_the_same_whatever_units_the_request_is_in():
    documents = DOCUMENTS.with_changes([
        Document("soil", "cold", 3, 0, None, {"bulk_density": 1.4, "bulk_density_u": 0.1,
                                              "assume": {"temperature": 10, "temperature_u": 2}}),
    ])  # fmt: skip
    units = {"frequency": "MHz", "bulk_density": "kg/m3", "temperature": "K"}
    found = with_stored({"soil": "cold", "probe": "rod", "units": units}, documents)
    assert found["probe"] == {"frequency": pytest.approx(1000.0)}
    assert found["soil"] == {
        "bulk_density": pytest.approx(1400),
        "bulk_density_u": pytest.approx(100),
    }
    assert found["assume"] == {"temperature": pytest.approx(283.15), "temperature_u": 2}


def test_a_stored_probe_brings_what_its_raw_records_are_read_with():
    settings = {"probe": {"probe_length": 0.2}, "method": "whole-trace"}
    documents = DOCUMENTS.with_changes([
        Document("probe", "rod", 3, 0, None, {"probe_length": 0.1, "raw_records": {
            "waveform": settings, "reflection": {"at_frequency": 1e9}}}),
        Document("probe", "bare", 4, 0, None, {"probe_length": 0.1, "probe_length_u": 0.001}),
    ])  # fmt: skip
    sent = {"probe": "rod", "readings": [{"waveform": {}}]}
    found = with_stored(sent, documents)
    assert (found["probe"], found["raw_records"]) == ({"probe_length": 0.1}, {"waveform": settings})
    own = {"waveform": {"probe": {"probe_length": 0.3}}}
    assert with_stored({**sent, "raw_records": own}, documents)["raw_records"] == own
    described = with_stored({**sent, "probe": "bare"}, documents)["raw_records"]["waveform"]
    assert described == {"probe": {"probe_length": 0.1, "probe_length_u": 0.001}}
    assert "raw_records" not in with_stored({"probe": "rod", "readings": [{}]}, documents)
    with pytest.raises(Unprocessable) as refused:
        with_stored({**sent, "units": {"probe_length": "cm"}}, documents)
    assert refused.value.errors[0].pointer == "#/units/probe_length"
