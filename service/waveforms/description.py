"""How OpenAPI describes POST /v1/waveforms."""

from typing import Any

from models.quantity import BANDED
from service.waveforms.answer import BANDED as QUANTITIES_WITH_BANDS
from service.waveforms.answer import FIGURE_UNITS
from service.waveforms.bodies import WAVEFORMS

JSON = "application/json"
_NUMBER = {"type": ["number", "null"]}


def request_schema() -> dict[str, Any]:
    """JSON schema of the body, its parts in the components of the description."""
    schema = WAVEFORMS.json_schema(ref_template="#/components/schemas/{model}")
    schema.pop("$defs", None)
    return schema


def answer_schema() -> dict[str, Any]:
    """JSON schema of the answer."""
    names = [name + suffix for name in QUANTITIES_WITH_BANDS for suffix in BANDED]
    names += ["frequency", "frequency_u", "travel_time"]
    names += [
        part + u for part in ("real_permittivity", "imaginary_permittivity") for u in ("", "_u")
    ]
    read_from = {name: {**_NUMBER, "description": f"[{u}]"} for name, u in FIGURE_UNITS.items()}
    row = {
        "type": "object",
        "properties": {
            **dict.fromkeys(names, _NUMBER),
            "read_from": {
                "type": "object", "properties": read_from,
                "description": "times (two-way, from the launch of the step), levels and quality "
                "figures that the numbers were read from",
            },
            "whole_trace": {"type": "object", "description": "of the fit: every section of the "
                            "rods, its parameters as fitted and their covariance"},
            "flags": {"type": "array", "items": {"type": "string"}},
        },
    }  # fmt: skip
    return {
        "type": "object",
        "required": ["waveforms", "units", "probe", "advisories"],
        "properties": {
            "waveforms": {"oneOf": [{"type": "array", "items": row}, row]},
            "units": {"type": "object", "additionalProperties": {"type": "string"}},
            "method": {"type": "string"},
            "probe": {"type": "object", "description": "as it was used; what calibration traces "
                      "told, each with its standard uncertainty"},
            "coverage_probability": {"type": "number"},
            "advisories": {"type": "array", "items": {"type": "object"}},
        },
    }  # fmt: skip


DESCRIPTION: dict[str, Any] = {
    "requestBody": {
        "required": True,
        "description": "One waveform or a list of them, of one probe; the probe by description, by "
        "traces in air, in water and shorted, or both. Permittivity is the square of the mean "
        "index of two ways of reading the end (tangents, steepest slope), and half their "
        "difference is part of its uncertainty. Where the end cannot be seen there is no number "
        "and the flag no-end-reflection; whole-trace fits the line there.",
        "content": {JSON: {"schema": request_schema()}},
    },
    "responses": {
        "200": {
            "description": "One answer per waveform, in the shape they came. Intervals are "
            "value -+ k u, and end where no medium can be beyond.",
            "content": {JSON: {"schema": answer_schema()}},
        }
    },
}
