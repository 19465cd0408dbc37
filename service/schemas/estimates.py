"""What POST /v1/estimates takes beside its readings."""

from types import MappingProxyType
from typing import Annotated, Any, Literal, get_args

from pydantic import ConfigDict, Field, TypeAdapter, WithJsonSchema, model_validator

from models.conductivity import DEFAULT_COMPENSATION, TEMPERATURE_COMPENSATIONS
from models.mixing import MIXING_MODELS
from models.quantity import NOISE, PROBE, QUANTITIES, SOIL
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


Method = Literal["first-order", "monte-carlo"]


def _or_its_method(schema: dict[str, Any]) -> None:
    """Let a schema take the name of a method in place of the object."""
    inner, named = dict(schema), {"type": "string", "enum": list(get_args(Method))}
    schema.clear()
    schema["anyOf"] = [inner, named]


class Propagation(Body):
    """How uncertainty is carried to the answer.

    First order (JCGM 100) with the equation's own quantiles where it bends, or draws (JCGM 101):
    the same draws for every reading, so that a reading's band does not depend on its neighbours.
    Draws go from the reading to the water content, the pore water and the extract; the bulk
    conductivity at 25 Cel keeps its first-order band.
    The name of the method alone will do, too.
    """

    model_config = ConfigDict(json_schema_extra=_or_its_method)

    method: Method = "first-order"
    draws: Annotated[int, Field(strict=True, ge=100, le=1_000_000)] = 10_000
    seed: Annotated[int, Field(strict=True, ge=0, le=2**63 - 1)] = 1
    interval: Literal["shortest"] = Field("shortest", description="Of the water content.")
    pore_water_interval: Literal["symmetric"] = Field(
        "symmetric",
        description="Of pore water and extract: the same probability is left on both sides.",
    )

    @model_validator(mode="before")
    @classmethod
    def _method_alone(cls, given: Any) -> Any:
        return {"method": given} if isinstance(given, str) else given


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
        description="Adds each input's share of the variance of the water content, and of the "
        "pore water where there is one, and what would narrow each band most.",
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
        description="UCUM codes by quantity, where they differ from the API's own unit; "
        "conduction_correction and model_spread are told in that of water_content.",
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
