"""What POST /v1/spectra takes."""

from typing import Annotated, Any, Literal

from pydantic import Field, TypeAdapter, WithJsonSchema

from models.spectrum.relaxation import RELAXATIONS
from models.spectrum.views import VIEWS
from models.spectrum.water.mixtures import DEFAULT_MIXTURE, MIXTURES
from service.schemas.estimates import Assume, ModelChoice, SoilBody
from service.schemas.words import Body, Number, described
from service.spectra.circuits import CircuitBody, GeometryBody

Numbers = list[Number]
Kind = Annotated[str, WithJsonSchema({"type": "string", "enum": list(RELAXATIONS)})]
ViewKey = Literal["permittivity", "modulus", "impedance", "admittance"]
MixtureKey = Annotated[str, WithJsonSchema({"type": "string", "enum": list(MIXTURES)})]


class ComplexNumbers(Body):
    """Complex numbers under exp(+j w t): real and imaginary parts, or magnitudes and degrees."""

    real: Numbers | None = None
    imaginary: Numbers | None = None
    magnitude: Numbers | None = None
    degrees: Numbers | None = Field(None, description="phase, in degrees, not in radians")


def _view(key: str) -> Any:
    about = VIEWS[key]
    cell = "; needs cell" if about.unit != "1" else ""
    return Field(None, description=f"{about.symbol} as complex numbers [{about.unit}]{cell}")


class SpectrumBody(Body):
    """A permittivity over frequency, in one of several forms, and how uncertain it is.

    Send real_permittivity and imaginary_permittivity, or one of permittivity, modulus, impedance
    and admittance as complex numbers.
    """

    frequency: Numbers = Field(description="rising or falling all along [Hz]")
    real_permittivity: Numbers | None = Field(None, description=described("real_permittivity"))
    imaginary_permittivity: Numbers | None = Field(
        None, description="loss eps'' of eps = eps' - j eps'', conduction included [1]"
    )
    permittivity: ComplexNumbers | None = _view("permittivity")
    modulus: ComplexNumbers | None = _view("modulus")
    impedance: ComplexNumbers | None = _view("impedance")
    admittance: ComplexNumbers | None = _view("admittance")
    real_permittivity_u: Number | Numbers | None = Field(
        None, description="standard uncertainty of eps', of each point or of all"
    )
    imaginary_permittivity_u: Number | Numbers | None = Field(
        None, description="standard uncertainty of eps'', of each point or of all"
    )
    relative_u: Annotated[Number, Field(gt=0, lt=1)] | None = Field(
        None,
        description="standard uncertainty over the size of each part, where neither of the above "
        "is given; a part below 1 % of |eps| counts as 1 % of it",
    )


class FormBody(Body):
    """Terms of the fit; an empty list fits none."""

    terms: list[Kind] | None = Field(
        None, description="kinds of the relaxation terms, at most 4; left out, they are chosen"
    )
    conduction: bool | None = Field(
        None,
        description="a direct-current conductivity; left out: as the spectrum asks, or with "
        "named terms, yes",
    )
    electrode: bool | None = Field(
        None,
        description="polarised electrodes in series; left out: as the spectrum asks, or with "
        "named terms, no",
    )


class CellBody(Body):
    """The measuring cell."""

    capacitance: Annotated[Number, Field(gt=0)] = Field(description="of the empty cell [F]")


class ChartBody(Body):
    """What `Accept: image/svg+xml` draws."""

    view: ViewKey = "permittivity"
    plane: Literal["frequency", "complex"] = Field(
        "frequency", description="both parts against frequency, or one against the other"
    )


class SpectraBody(Body):
    """A spectrum, and what is asked of it."""

    spectrum: SpectrumBody | None = None
    circuit: CircuitBody | None = Field(
        None,
        description="In place of a spectrum: the answer is the material behind it, and its "
        "spectrum at the frequencies given beside it.",
    )
    frequency: Annotated[Numbers, Field(max_length=10_000)] | None = Field(
        None, description="at which the spectrum of a circuit is wanted [Hz]"
    )
    geometry: GeometryBody | None = Field(
        None,
        description="Of two materials in three paths: adds the pairs of materials that make "
        "the fitted relaxation, where it is one Debye term with conduction.",
    )
    model: FormBody = Field(
        default_factory=FormBody,
        description="Left out, the simplest form within 4 of the smallest AICc.",
    )
    cell: CellBody | None = Field(
        None,
        description="for impedances; left out, a cube of 1 m, so that conductance in S is "
        "conductivity in S/m",
    )
    views: list[ViewKey] = Field(
        default_factory=list, description="adds the spectrum and its fit in these views, as data"
    )
    chart: ChartBody = ChartBody()
    soil: SoilBody | None = Field(  # type: ignore[valid-type]
        None, description="A soil: adds water content, pore-water conductivity and bound water."
    )
    mixing_model: MixtureKey | ModelChoice = Field(
        DEFAULT_MIXTURE, description="for the inversion of the whole band"
    )
    temperature: Number | None = Field(None, description=described("temperature"))
    temperature_u: Annotated[Number, Field(ge=0)] | None = Field(
        None, description="standard uncertainty of temperature [K]"
    )
    assume: Assume = Assume()
    coverage_probability: Annotated[Number, Field(ge=0.5, le=0.999)] = 0.95
    units: dict[str, str] = Field(
        default_factory=dict,
        description="UCUM codes by quantity, where they differ from the API's own unit.",
        examples=[{"frequency": "MHz"}],
    )


SPECTRA = TypeAdapter(SpectraBody)
