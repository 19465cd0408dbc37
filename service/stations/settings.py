"""From a stored soil and probe to the settings of a request for estimates, and to its basis."""

from collections.abc import Mapping
from functools import lru_cache
from typing import Any

import orjson

from models.estimate import Basis
from service.errors import Unprocessable
from service.faults import Fault
from service.formats.raw_records import SETTINGS as RAW_SETTINGS
from service.schemas.estimates import EstimatesSettings
from service.schemas.query import basis_of, settings_of
from service.stations.bodies import MODEL_WORDS

Body = Mapping[str, Any]


def settings_document(soil: Body, probe: Body, asked: Body) -> dict[str, Any]:
    """A request for estimates without readings; what is asked beats what is stored.

    soil: where ``asked`` names one, that one.
    """
    words = {key: soil[key] for key in MODEL_WORDS if soil.get(key) is not None}
    plain = {k: v for k, v in soil.items() if k not in MODEL_WORDS and k != "title"}
    own = {key: value for key, value in probe.items() if key not in {"title", RAW_SETTINGS}}
    document: dict[str, Any] = {**words, **asked}
    for model in MODEL_WORDS[:2]:
        choice = asked.get(model)
        if isinstance(choice, Mapping) and choice.get("name") is None:
            document[model] = {**_as_choice(model, soil), **choice, "name": _named(model, soil)}
    words_of_soil = asked.get("soil", {})
    document["soil"] = {**plain, **({} if isinstance(words_of_soil, str) else words_of_soil)}
    document["probe"] = {**own, **asked.get("probe", {})}
    return document


def _as_choice(model: str, soil: Body) -> Body:
    stored = soil.get(model)
    return stored if isinstance(stored, Mapping) else {}


def _named(model: str, soil: Body) -> str:
    """The model of a soil whose parameters a question replaces."""
    stored = soil.get(model)
    name = stored.get("name") if isinstance(stored, Mapping) else stored
    if not isinstance(name, str):
        detail = f"a standard_error replaces that of a named model: name a {model} beside it"
        raise Unprocessable(detail, [Fault(detail, f"?{model}")])
    return name


def basis_for(
    soil: Body, probe: Body, asked: Body, columns: frozenset[str]
) -> tuple[EstimatesSettings, Basis]:
    """What estimates of readings with these columns rest on; the same bodies, the same basis.

    Raises Unprocessable, ModelError.
    """
    document = settings_document(soil, probe, asked)
    return _basis(orjson.dumps(document, option=orjson.OPT_SORT_KEYS), tuple(sorted(columns)))


@lru_cache(maxsize=512)
def _basis(document: bytes, columns: tuple[str, ...]) -> tuple[EstimatesSettings, Basis]:
    settings = settings_of(orjson.loads(document))
    basis = basis_of(settings, columns)
    if not isinstance(basis, Basis):
        detail = "one mixing model at a time; all of them side by side are at POST /v1/estimates"
        raise Unprocessable(detail, [Fault(detail, "?mixing_model")])
    return settings, basis
