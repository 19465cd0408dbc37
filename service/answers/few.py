"""Which requests are small and plain enough to be answered together with others."""

from collections.abc import Mapping
from types import MappingProxyType
from typing import Any

import orjson

from service.answers.prepared import Prepared, prepared
from service.answers.together import Rows
from service.formats.json.readings import NUMBER_TYPES, NUMBERS, TEXT_TYPES, TEXTS

FEW = 64
"""Readings up to which a request is a small one."""
COSTLY = frozenset({"raw_records", "propagation", "budget", "validate", "explain"})
"""Keys that may make few readings costly."""

_TAKEN: Mapping[str, frozenset[Any]] = MappingProxyType(
    {**dict.fromkeys(TEXTS, TEXT_TYPES), **dict.fromkeys(NUMBERS, NUMBER_TYPES)}
)
_NOTHING: frozenset[Any] = frozenset()


def few_readings(document: dict[str, Any], most: int) -> tuple[Prepared, Rows] | None:
    """What a small request rests on, and its readings; None where it is none, or is in doubt.

    most: how many readings a JSON body may hold.
    What is wrong with readings is left to those who can say where. Raises Unprocessable and
    ModelError for what is wrong beside them.
    """
    rows = document["readings"]
    if type(rows) is not list or not 0 < len(rows) <= min(FEW, most) or COSTLY & document.keys():
        return None
    if not _alike(rows):
        return None
    rest = {name: value for name, value in document.items() if name != "readings"}
    said = prepared(orjson.dumps(rest), tuple(rows[0]))
    return None if said is None else (said, rows)


def _alike(rows: list[Any]) -> bool:
    """Whether all rows are objects with the same keys, and every cell is of the right type."""
    if type(rows[0]) is not dict:
        return False
    keys = rows[0].keys()
    for row in rows:
        if type(row) is not dict or row.keys() != keys:
            return False
        for name, value in row.items():
            if type(value) not in _TAKEN.get(name, _NOTHING):
                return False
    return True
