"""What POST /v1/estimates takes beside its readings, and the example of what it answers."""

from collections.abc import Mapping
from types import MappingProxyType
from typing import Annotated, Any, Literal

from pydantic import ConfigDict, Field, TypeAdapter, WithJsonSchema

from models.conductivity import DEFAULT_COMPENSATION, TEMPERATURE_COMPENSATIONS
from models.mixing import MIXING_MODELS
from models.quantity import NOISE, PROBE, QUANTITIES, READING, SOIL, band_names
from models.salinity import PORE_WATER_MODELS
from models.soil import TEXTURES
from service.schemas.words import Body, Number, body_of, described, quantity_fields

ALL = "all"
"""In place of a mixing model: every one that can answer."""
ModelKey = Annotated[str, WithJsonSchema({"type": "string", "enum": [*MIXING_MODELS, ALL]})]
TextureKey = Annotated[
    str, WithJsonSchema({"type": "string", "examples": ["loam"], "enum": list(TEXTURES)})
]
PoreWaterKey = Annotated[str, WithJsonSchema({"type": "string", "enum": list(PORE_WATER_MODELS)})]
CompensationKey = Annotated[
    str, WithJsonSchema({"type": "string", "enum": list(TEMPERATURE_COMPENSATIONS)})
]
ECHOED = ("revision", "water_model", "sources", "model_uncertainty", "saturation_percentage",
          "saturation_percentage_u")  # fmt: skip
"""What an answer adds to the model and soil it echoes; sent back, it is read past."""


class ModelChoice(Body):
    """A mixing model with parameters of the caller's own.

    Parameters stand beside the name, in the unit of the API, each with its `<name>_u`; which
    there are is at /v1/mixing-models/{name}.
    """

    model_config = ConfigDict(extra="allow", frozen=True, hide_input_in_errors=True)

    name: ModelKey
    standard_error: Annotated[Number, Field(ge=0, le=1)] | None = Field(
        None,
        description="Replaces the model's own uncertainty [m3/m3]: a site's own figure, or 0 to "
        "see the share of the inputs alone.",
    )


class PoreWaterChoice(Body):
    """A pore-water model with parameters of the caller's own, as for the mixing model."""

    model_config = ConfigDict(extra="allow", frozen=True, hide_input_in_errors=True)

    name: PoreWaterKey
    standard_error: Annotated[Number, Field(ge=0, le=3)] | None = Field(
        None, description="Replaces the model's own uncertainty, relative to the conductivity."
    )


SoilBody = body_of(
    "Soil",
    "A soil. What is not given, the texture class fills in, and the answer says so.",
    {
        "texture": (TextureKey | None, Field(None, description="USDA texture class, or peat")),
        **quantity_fields(SOIL),
        "sources": (
            dict[str, Annotated[str, Field(max_length=80)]] | None,
            Field(None, description="where each value came from, as an earlier answer echoed it"),
        ),
    },
)

ProbeBody = body_of(
    "Probe",
    "A probe, and the standard uncertainty of what it reads.",
    {
        **quantity_fields(PROBE),
        **{
            f"{name}_u": (
                Annotated[Number, Field(ge=0)] | None,
                Field(None, description=f"of every {name} that states none of its own "
                      f"[{QUANTITIES[name].unit}]"),
            )
            for name in NOISE
        },
    },
)  # fmt: skip


class Assume(Body):
    """What may be assumed where a reading does not say."""

    temperature: Number | None = Field(None, description=described("temperature"))
    temperature_u: Annotated[Number, Field(ge=0)] | None = Field(
        None, description="standard uncertainty of it [K]; 7 unless given"
    )


class Propagation(Body):
    """How uncertainty is carried to the answer.

    First order (JCGM 100) with the equation's own quantiles where it bends, or draws (JCGM 101):
    the same draws for every reading, so that a reading's band does not depend on its neighbours.
    Draws are made of the water content; conductivities keep first-order bands of the logarithm.
    """

    method: Literal["first-order", "monte-carlo"] = "first-order"
    draws: Annotated[int, Field(strict=True, ge=100, le=1_000_000)] = 10_000
    seed: Annotated[int, Field(strict=True, ge=0, le=2**63 - 1)] = 1
    interval: Literal["shortest"] = "shortest"


class EstimatesSettings(Body):
    """Everything of a request but its readings."""

    mixing_model: ModelKey | ModelChoice | None = Field(
        None, description="Left out, the service chooses by declared ranges and says why."
    )
    pore_water_model: PoreWaterKey | PoreWaterChoice | None = Field(
        None,
        description="Left out, one is chosen where the readings hold bulk_conductivity.",
    )
    temperature_compensation: CompensationKey = Field(
        DEFAULT_COMPENSATION, description="brings conductivities to 25 Cel"
    )
    soil: SoilBody = Field(  # type: ignore[valid-type]
        default_factory=SoilBody, description="Inline description of the soil."
    )
    probe: ProbeBody = Field(  # type: ignore[valid-type]
        default_factory=ProbeBody, description="Inline description of the probe."
    )
    coverage_probability: Annotated[Number, Field(ge=0.5, le=0.999)] = 0.95
    propagation: Propagation = Propagation()
    budget: Annotated[bool, Field(strict=True)] = Field(
        default=False,
        description="Adds each input's share of the variance, and what would narrow the band most.",
    )
    validate_first_order: Annotated[bool, Field(strict=True)] = Field(
        default=False,
        alias="validate",
        description="Adds whether the first-order band agrees with draws (JCGM 101, clause 8).",
    )
    explain: Annotated[bool, Field(strict=True)] = Field(
        default=False,
        description="Adds what temperature does to each reading, effect by effect [m3/m3].",
    )
    assume: Assume = Assume()
    units: dict[str, str] = Field(
        default_factory=dict,
        description="UCUM codes by quantity, where they differ from the API's own unit.",
        examples=[{"bulk_conductivity": "mS/m"}],
    )


def model_name(settings: EstimatesSettings) -> str | None:
    """The mixing model that is asked for by name, be it ALL; None: the service chooses."""
    named = settings.mixing_model
    return named.name if isinstance(named, ModelChoice) else named


ESTIMATED = ("water_content", "bulk_conductivity_25", "pore_water_conductivity",
             "saturation_extract_conductivity")  # fmt: skip
"""What an answer holds with a band: conductivities where the readings hold bulk_conductivity."""
SETTINGS = TypeAdapter(EstimatesSettings)
RAW = MappingProxyType({
    "waveform": "/v1/waveforms", "reflection": "/v1/reflections",
    "scattering": "/v1/scattering", "spectrum": "/v1/spectra",
})  # fmt: skip
"""Raw records a reading may carry, and the path that describes them."""


def reading_schema() -> Mapping[str, Any]:
    """JSON schema of the readings: a list of objects, or one object of arrays."""
    number = {"type": ["number", "null"]}
    text = {"type": ["string", "null"]}
    cells: dict[str, Any] = {}
    for name in READING:
        kind = number if QUANTITIES[name].unit else text
        cells[name] = {**kind, "description": described(name)}
        if name in NOISE:
            cells[f"{name}_u"] = {**number, "description": f"standard uncertainty of {name}"}
    for name, where in RAW.items():
        told = f"raw record in place of a permittivity: an item of {where}"
        cells[name] = {"type": ["object", "null"], "description": told}
    row = {"type": "object", "properties": cells, "additionalProperties": False}
    columns = {
        "type": "object",
        "properties": {
            name: {"type": "array", "items": {"type": cell["type"]}} for name, cell in cells.items()
        },
        "additionalProperties": False,
    }
    return {"oneOf": [{"type": "array", "items": row, "minItems": 1}, columns]}


def request_schema() -> dict[str, Any]:
    """JSON schema of the whole JSON body."""
    schema = SETTINGS.json_schema(ref_template="#/components/schemas/{model}")
    schema.pop("$defs", None)
    schema["properties"] = {**schema["properties"], "readings": reading_schema()}
    told = "what the raw records of a kind have in common, as their own path takes it beside them"
    schema["properties"]["raw_records"] = {
        "type": "object",
        "description": told,
        "properties": {name: {"type": "object"} for name in RAW},
    }
    for kind in ("soil", "probe"):
        inline = schema["properties"][kind]
        stored = {"type": "string", "description": f"name of a stored {kind}"}
        about = {key: inline.pop(key) for key in ("description", "default") if key in inline}
        schema["properties"][kind] = {"anyOf": [inline, stored], **about}
    schema["required"] = ["readings"]
    return schema


def answer_schema() -> dict[str, Any]:
    """JSON schema of the JSON answer."""
    row = {
        "type": "object",
        "properties": {
            **{
                name: {"type": ["number", "null"]}
                for quantity in ESTIMATED
                for name in band_names(quantity)
            },
            "flags": {"type": "array", "items": {"type": "string"}},
        },
    }
    advisory = {
        "type": "object",
        "properties": {"code": {"type": "string"}, "text": {"type": "string"}},
    }
    return {
        "type": "object",
        "required": ["estimates", "units", "mixing_model", "soil", "advisories"],
        "properties": {
            "estimates": {
                "description": "rows, or columns of equal length: as the readings came",
                "oneOf": [{"type": "array", "items": row}, {"type": "object"}],
            },
            "units": {"type": "object", "additionalProperties": {"type": "string"}},
            "mixing_model": {"type": "object"},
            "soil": {"type": "object"},
            "probe": {"type": "object"},
            "assume": {"type": "object"},
            "coverage_probability": {"type": "number"},
            "propagation": {"type": "object"},
            "advisories": {"type": "array", "items": advisory},
        },
    }
