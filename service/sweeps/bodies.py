"""What POST /v1/reflections and POST /v1/scattering take."""

from typing import Annotated, Any, Literal

from pydantic import BeforeValidator, Field, TypeAdapter

from models.reflection.tip.media import MEDIA
from service.faults import shown
from service.schemas.words import Body, Number, described
from service.sweeps.apparatus import ApertureBody, HolderBody, LineBody, NotNegative, Positive

Numbers = list[Number]


def _number_or_list(given: Any) -> Any:
    """What is neither a number nor a list is told both."""
    if given is None or (isinstance(given, int | float | list) and not isinstance(given, bool)):
        return given
    raise ValueError(f"expected a number, or a list with one for each point, found {shown(given)}")


Uncertainty = Annotated[NotNegative | list[NotNegative], BeforeValidator(_number_or_list)]
Kind = Literal["tip", "filled-line", "cell"]
Method = Literal["least-squares", "non-iterative", "baker-jarvis-1990", "nicolson-ross-weir"]
LENGTHS = frozenset({
    "sample_length", "holder_length", "air_before", "air_length", "gap_width", "grain_size",
    "thickness", "air_gap", "inner_radius", "outer_radius", "inner_conductor", "sample_inner",
    "sample_outer", "outer_conductor",
})  # fmt: skip
"""Lengths that ``units`` may name beside the quantities."""
_MEDIA = ", ".join(
    key + (" (with temperature)" if medium.needs_temperature else "")
    for key, medium in MEDIA.items()
)


class ComplexColumn(Body):
    """Complex numbers under exp(+j w t): real and imaginary parts, or magnitudes and degrees."""

    real: Numbers | None = None
    imaginary: Numbers | None = None
    magnitude: Numbers | None = None
    degrees: Numbers | None = Field(None, description="phase, in degrees, not in radians")


class OnePortSweep(Body):
    """A reflection over frequency: complex numbers, or the text of a Touchstone file."""

    frequency: Numbers | None = Field(
        None, description=f"rising all along; else that of the request. {described('frequency')}"
    )
    reflection: ComplexColumn | list[ComplexColumn] | None = Field(
        None, description="reflection coefficient; a list: the same sweep taken again"
    )
    touchstone: str | list[str] | None = Field(
        None, description="text of a Touchstone 1.1 or 2.0 file of one port; a list: repeats"
    )
    reflection_u: Uncertainty | None = Field(
        None,
        description="standard uncertainty of the real and of the imaginary part of each "
        "reflection, of all points or of each; else that of the request",
    )


class RelaxationBody(Body):
    """One Debye relaxation with conduction, at the temperature of the standard."""

    static_permittivity: Positive
    infinite_permittivity: Positive
    relaxation_time: NotNegative = Field(description="[ps]")
    conductivity: NotNegative = Field(0.0, description="of direct current [dS/m]")


class StandardBody(OnePortSweep):
    """A known medium or end: what it is, and what was read."""

    name: Annotated[str, Field(min_length=1, max_length=80)] = Field(
        description=f"short, open, load; before a tip also {_MEDIA}; or any name with its "
        "permittivity or relaxation. open is the tip in air, or the ideal open end of a line."
    )
    temperature: Number | None = Field(None, description=described("temperature"))
    temperature_u: NotNegative | None = Field(None, description="standard uncertainty [K]")
    conductivity_25: NotNegative | None = Field(
        None, description="of saline, at 25 Cel [dS/m]; sodium chloride is assumed"
    )
    real_permittivity: Number | Numbers | None = Field(
        None, description="of a medium of the caller's own, of all points or of each"
    )
    imaginary_permittivity: Number | Numbers | None = Field(
        None, description="loss eps'' >= 0 of it, conduction included"
    )
    relaxation: RelaxationBody | None = None
    relative_uncertainty: NotNegative | None = Field(
        None,
        description="of its permittivity, k = 1; replaces what is held of the medium; 0: exact",
    )


class SampleBody(OnePortSweep):
    """What is to be measured. A cell is read with short or open, or with both."""

    name: Annotated[str, Field(max_length=80)] | None = None
    short: OnePortSweep | None = Field(None, description="the cell, shorted at its end")
    open: OnePortSweep | None = Field(None, description="the cell, open at its end")
    grain_size: Positive | None = Field(None, description="of the largest grain [m]")
    thickness: Positive | None = Field(None, description="before a tip, to what lies behind [m]")
    air_gap: NotNegative | None = Field(
        None, description="film of air between a tip and the sample [m]; it is taken out"
    )
    air_gap_u: NotNegative | None = Field(None, description="its standard uncertainty [m]")


class Common(Body):
    """What both kinds of sweep share."""

    frequency: Numbers | None = Field(
        None, description=f"of sweeps that bring none. {described('frequency')}"
    )
    reflection_u: Uncertainty | None = Field(
        None, description="standard uncertainty of each part, of sweeps that state none"
    )
    largest_relative_uncertainty: Positive | None = Field(
        None, description="of |eps|: points above it get a flag and no number"
    )
    coverage_probability: Annotated[Number, Field(ge=0.5, le=0.999)] = 0.95
    units: dict[str, str] = Field(
        default_factory=dict,
        description="UCUM codes by quantity, where they differ from the API's own unit; lengths "
        "by their name, as sample_length, which goes for its uncertainty too.",
        examples=[{"frequency": "GHz", "sample_length": "mm"}],
    )


class ReflectionsBody(Common):
    """Reflections of one port, their standards, and the sample."""

    kind: Kind = Field(
        description="tip: a coaxial tip before a medium; filled-line: an air line that goes on, "
        "filled without end; cell: a piece of line of known length, shorted or open"
    )
    sample: SampleBody | list[SampleBody] = Field(
        description="several before a tip: the answer takes the same shape"
    )
    standards: list[StandardBody] = Field(
        default_factory=list,
        description="three or more for a tip; short, open and load for a line, or none where "
        "its reflections are those at the reference plane",
    )
    aperture: ApertureBody = ApertureBody()
    line: LineBody = LineBody()


class TwoPortSweep(Body):
    """S-parameters over frequency: complex numbers, or the text of a Touchstone file."""

    frequency: Numbers | None = Field(None, description=described("frequency"))
    s11: ComplexColumn | None = None
    s21: ComplexColumn | None = None
    s12: ComplexColumn | None = Field(None, description="left out: as s21")
    s22: ComplexColumn | None = Field(None, description="left out: as s11")
    touchstone: str | None = Field(
        None, description="text of a Touchstone 1.1 or 2.0 file of two ports"
    )
    reflection_u: Uncertainty | None = Field(
        None, description="standard uncertainty of each part of each S-parameter"
    )
    grain_size: Positive | None = Field(None, description="of the largest grain [m]")


class ScatteringBody(Common):
    """S-parameters of a filled line, planes and sample described."""

    sample: TwoPortSweep
    line: HolderBody
    method: Method | None = Field(
        None,
        description="left out: least-squares over all four S-parameters, or nicolson-ross-weir "
        "where the sample is magnetic. non-iterative: the square of the index; "
        "baker-jarvis-1990: what passes alone.",
    )


REFLECTIONS = TypeAdapter(ReflectionsBody)
SCATTERING = TypeAdapter(ScatteringBody)


def request_schema(adapter: TypeAdapter[Any]) -> dict[str, Any]:
    """JSON schema of a body, its parts in the components of the description."""
    schema = adapter.json_schema(ref_template="#/components/schemas/{model}")
    schema.pop("$defs", None)
    return schema
