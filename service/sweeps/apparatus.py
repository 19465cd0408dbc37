"""The apparatus of a sweep: the aperture of a tip, a line or a cell, the holder of a sample."""

from typing import Annotated

from pydantic import Field, WithJsonSchema

from models.reflection.tip.aperture import MODELS
from service.schemas.words import Body, Number

NotNegative = Annotated[Number, Field(ge=0)]
Positive = Annotated[Number, Field(gt=0)]
ApertureKey = Annotated[str, WithJsonSchema({"type": "string", "enum": list(MODELS)})]
Impedance = Annotated[Number, Field(ge=1, le=1000)]
LINE_IMPEDANCE = 50.0
"""ohm, of the empty line where a request does not say it."""


class ApertureBody(Body):
    """The aperture of a tip. Radii bring C0, sensing depth and the effect of an air gap."""

    model: ApertureKey | None = Field(
        None,
        description="left out: fitted where four or more standards are given, else aperture-field "
        "with radii, else capacitive; what another model would say is then in the uncertainty. "
        + "; ".join(f"{k}: {v}" for k, v in MODELS.items()),
    )
    inner_radius: Positive | None = Field(None, description="of the inner conductor [m]")
    outer_radius: Positive | None = Field(None, description="inside of the outer conductor [m]")
    fill_permittivity: Positive = Field(2.1, description="of the dielectric between them")


class GapBody(Body):
    """Diameters of a sample that does not touch the conductors of its coaxial line [m]."""

    inner_conductor: Positive
    sample_inner: Positive
    sample_outer: Positive
    outer_conductor: Positive


class LineBody(Body):
    """A filled line or a cell."""

    sample_length: Positive | None = Field(None, description="[m]; a cell needs it")
    sample_length_u: NotNegative | None = Field(None, description="[m]")
    air_length: NotNegative = Field(0.0, description="between reference plane and sample [m]")
    air_length_u: NotNegative | None = Field(None, description="[m]")
    impedance: Impedance = Field(
        LINE_IMPEDANCE,
        description="of the line while it is empty [Ohm]. A Touchstone file that refers to "
        "another one (R, [Reference]) is brought to it, with an advisory that says so; columns "
        "of numbers are taken as referring to it.",
    )
    gap_width: Positive | None = Field(None, description="between the conductors [m]")
    air_gaps: GapBody | None = Field(None, description="their effect is taken out")
    guess: Positive | None = Field(None, description="real permittivity at the lowest frequency")


class HolderBody(Body):
    """The sample in its holder, an air line."""

    sample_length: Positive = Field(description="[m]")
    sample_length_u: NotNegative | None = Field(None, description="[m]")
    holder_length: Positive | None = Field(
        None,
        description="between the reference planes [m]; left out: they are at the sample's faces",
    )
    holder_length_u: NotNegative | None = Field(None, description="[m]")
    air_before: NotNegative | None = Field(
        None,
        description="air line before the sample [m]; left out, the position is found from the "
        "two reflections",
    )
    impedance: Impedance = Field(
        LINE_IMPEDANCE,
        description="of the line while it is empty [Ohm]. A Touchstone file that refers to "
        "another one (R, [Reference]) is brought to it, with an advisory that says so; columns "
        "of numbers are taken as referring to it.",
    )
    gap_width: Positive | None = Field(None, description="between the conductors [m]")
    guess: Positive | None = Field(None, description="real permittivity at the lowest frequency")
