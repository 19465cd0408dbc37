"""Stored soils and probes in a request for estimates: a name in place of a description."""

from collections.abc import Mapping
from typing import Any

from service.errors import Unprocessable
from service.faults import Fault, hint, shown
from service.stations.bodies import MODEL_WORDS
from service.stations.documents import Documents
from service.store.interface import Kind

KINDS: tuple[Kind, ...] = ("soil", "probe")


def names_something(document: Mapping[str, Any]) -> bool:
    """Whether a request names a stored soil or probe, so that the store must be asked."""
    return any(isinstance(document.get(kind), str) for kind in KINDS)


def with_stored(document: Mapping[str, Any], documents: Documents) -> dict[str, Any]:
    """The request with descriptions in place of names.

    A stored soil brings its models and what it assumes along; what the request states beats them.
    Raises Unprocessable for a name that is not there.
    """
    found = dict(document)
    for kind in KINDS:
        name = document.get(kind)
        if not isinstance(name, str):
            continue
        stored = documents.find(kind, name)
        if stored is None or stored.body is None:
            near = hint(name, documents.by_kind[kind])
            detail = f"there is no stored {kind} {shown(name)}{near}"
            raise Unprocessable(detail, [Fault(detail, f"#/{kind}")])
        body = {key: value for key, value in stored.body.items() if key != "title"}
        for word in MODEL_WORDS:
            value = body.pop(word, None)
            if value is not None:
                found.setdefault(word, value)
        found[kind] = body
    return found
