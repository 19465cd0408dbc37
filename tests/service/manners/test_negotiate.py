"""Accept with q-values and specificity; ?format= beats it."""

import pytest

from service.errors import NotAcceptable
from service.negotiate import choose

OFFERED = {"json": "application/json", "csv": "text/csv", "ndjson": "application/x-ndjson"}


@pytest.mark.parametrize(
    ("accept", "expected"),
    [
        (None, "json"),
        ("", "json"),
        ("*/*", "json"),
        ("text/csv", "csv"),
        ("TEXT/CSV ; Q=1", "csv"),
        ("text/csv;q=0.2, application/x-ndjson;q=0.9", "ndjson"),
        ("text/*", "csv"),
        ("text/html, */*;q=0.8", "json"),
        ("*/*, text/csv", "csv"),
        ("application/json;q=0, */*", "csv"),
        ("text/*;q=1, text/csv;q=0.1, application/json;q=0.5", "json"),
        ("text/csv;charset=utf-8;q=0.5, */*;q=0.4", "csv"),
        ("nonsense, text/csv;q=nan, application/x-ndjson;q=0.001", "ndjson"),
    ],
)
def test_the_most_wanted_type_is_chosen(accept, expected):
    assert choose(accept, None, OFFERED) == OFFERED[expected]


@pytest.mark.parametrize("name", OFFERED)
def test_format_beats_accept(name):
    assert choose("image/png", name, OFFERED) == OFFERED[name]


@pytest.mark.parametrize(
    ("accept", "name"),
    [("image/png", None), ("*/*;q=0", None), ("json", None), ("text/csv;q=2", None),
     (None, "xml"), ("*/*", ""), ("text/csv", "x" * 1000)],
)  # fmt: skip
def test_what_cannot_be_had_is_refused_with_what_can(accept, name):
    with pytest.raises(NotAcceptable) as caught:
        choose(accept, name, OFFERED)
    for short, media_type in OFFERED.items():
        assert f"{media_type} (format={short})" in caught.value.detail
    assert caught.value.headers == {"Vary": "Accept"}
    assert len(caught.value.detail) < 400
