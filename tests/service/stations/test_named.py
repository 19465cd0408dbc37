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
