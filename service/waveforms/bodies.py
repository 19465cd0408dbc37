"""What POST /v1/waveforms takes."""

from typing import Annotated, Literal

from pydantic import ConfigDict, Field, TypeAdapter

from models.reflection.tdr.record import FEWEST
from service.schemas.words import Body, Number, described

Numbers = list[Number]
Positive = Annotated[Number, Field(gt=0)]
Width = Annotated[Number, Field(ge=0)]
AxisUnit = Literal["m", "cm", "mm", "ns", "ps", "us", "s"]
LENGTHS = frozenset({"probe_offset", "inserted_length", "diameter", "spacing", "length"})
"""Lengths that ``units`` may name beside the quantities; those of an axis have axis_unit."""
MOST_POINTS = 100_000
"""Of one trace."""
MOST_WAVEFORMS = 5_000
"""Of one request by travel time."""
MOST_INVERTED = 50
"""Of one request by inversion of the whole trace."""


class TraceBody(Body):
    """Reflection coefficients on an even axis.

    The axis is start and window with the number of points counted, or every point of axis.
    Lengths are one-way distances as the instrument shows them, times are two-way.
    """

    start: Number | None = Field(None, description="of the first point [axis_unit]")
    window: Positive | None = Field(
        None,
        description="from the first point to the last, which lie window / (points - 1) apart "
        "[axis_unit]",
    )
    points: Annotated[int, Field(strict=True, ge=FEWEST)] | None = Field(
        None, description="how many there are; checked against those that came"
    )
    axis: Numbers | None = Field(
        None, description="every point, in place of start and window [axis_unit]",
        max_length=MOST_POINTS,
    )  # fmt: skip
    axis_unit: AxisUnit = Field(
        "m", description="UCUM code: of a length, one-way and apparent, or of a time, two-way"
    )
    propagation_velocity_factor: Annotated[Number, Field(gt=0, le=1)] = Field(
        1.0,
        description="as it was set on the instrument; 1: distances are apparent lengths. "
        "Means nothing for times.",
    )
    reflection_coefficient: Numbers | None = Field(
        None, max_length=MOST_POINTS,
        description="reflected over incident step [1]: -1 short, 0 matched, 1 open",
    )  # fmt: skip
    level: Numbers | None = Field(
        None, max_length=MOST_POINTS,
        description="in place of reflection_coefficient: volt or counts, whatever the instrument "
        "gives, with level_matched and level_open",
    )  # fmt: skip
    level_matched: Number | None = Field(
        None, description="what level is where nothing is reflected: the incident step"
    )
    level_open: Number | None = Field(
        None, description="what level is where everything is reflected: twice the incident step"
    )
    reflection_coefficient_u: Positive | None = Field(
        None,
        description="standard uncertainty of one point from noise [1]; estimated from the trace "
        "where it is not given",
    )
    averages: Annotated[int, Field(strict=True, ge=1)] | None = Field(
        None, description="how many sweeps were averaged; told for the record only"
    )


class WaveformBody(TraceBody):
    """A trace of the probe, and where there is one a long record of the same medium."""

    time: str | None = Field(None, description=described("time"))
    depth: Number | None = Field(None, description=described("depth"))
    long_record: TraceBody | None = Field(
        None, description="to where all reflections have died away: for conductivity"
    )


class WaterBody(WaveformBody):
    """A trace of the probe in water of a known temperature."""

    temperature: Number = Field(description=described("temperature"))
    temperature_u: Width = Field(0.0, description="standard uncertainty of temperature [K]")


class CalibrationBody(Body):
    """Traces of the same probe, cable and instrument in known media.

    Air and water tell effective length and offset, and for a whole trace the line itself; air
    the scale of the instrument; a short at the end of the rods the resistance of the cable.
    """

    air: WaveformBody | None = None
    water: WaterBody | None = None
    short: WaveformBody | None = None


class CableBody(Body):
    """The cable between instrument and probe."""

    length: Positive | None = Field(None, description="[m]")
    impedance: Positive = Field(50.0, description="[Ohm]")
    resistance: Width | None = Field(
        None, description="to direct current, there and back [Ohm/m]; 0.05 where not given"
    )
    skin_resistance: Width | None = Field(
        None,
        description="what skin effect adds, over the root of the complex frequency "
        "[Ohm.s^0.5/m]; 1e-4 where not given",
    )


class HeadBody(Body):
    """The piece between cable and rods."""

    length: Positive = Field(description="[m]")
    impedance: Positive = Field(100.0, description="if it were filled with air [Ohm]")
    permittivity: Annotated[Number, Field(ge=1)] = Field(1.0, description="of its filling")


class RodsBody(Body):
    """Geometry of the rods, in place of their impedance."""

    count: Literal[2, 3]
    diameter: Positive = Field(description="[m]")
    spacing: Positive = Field(description="between neighbouring axes [m]")


class WaveformProbeBody(Body):
    """A probe with its cable; what calibration traces tell need not be given."""

    model_config = ConfigDict(extra="forbid", frozen=True, hide_input_in_errors=True)

    probe_length: Positive = Field(description=described("probe_length"))
    probe_length_u: Width = Field(0.0, description="standard uncertainty of probe_length [m]")
    probe_impedance: Positive | None = Field(
        None, description="of the rods in air [Ohm]: with probe_length gives probe_constant"
    )
    rods: RodsBody | None = None
    probe_constant: Positive | None = Field(None, description=described("probe_constant"))
    probe_constant_u: Width = Field(0.0, description="standard uncertainty of it [1/m]")
    probe_offset: Width | None = Field(
        None,
        description="apparent length from the first reflection to the beginning of the rods [m]",
    )
    probe_offset_u: Width = Field(0.0, description="standard uncertainty of it [m]")
    series_resistance: Width | None = Field(
        None, description="of cable and contacts [Ohm]; found from a short where there is one"
    )
    series_resistance_u: Width = Field(0.0, description="standard uncertainty of it [Ohm]")
    instrument_impedance: Positive = Field(50.0, description="[Ohm]")
    rise_time: Positive | None = Field(None, description="of the step, 10 to 90 % [ns]")
    cable: CableBody = CableBody()
    head: HeadBody | None = None


class WaveformSettings(Body):
    """Everything of a request but its waveforms."""

    probe: WaveformProbeBody
    calibration: CalibrationBody = CalibrationBody()
    method: Literal["travel-time", "whole-trace"] = Field(
        "travel-time",
        description="travel-time reads where the rods end, and refuses where that cannot be seen; "
        "whole-trace fits the line and gives permittivity there too.",
    )
    frequency: Positive | None = Field(
        None, description="at which whole-trace states permittivity [Hz]; 1e9 unless given"
    )
    relaxations: Annotated[int, Field(strict=True, ge=1, le=3)] | None = Field(
        None,
        description="of the fitted soil; left out: that of its water and a spectrum of slower "
        "ones, as much of it as the trace asks for",
    )
    sections: Literal[1, 2] = Field(
        1,
        description="2: another soil from some depth on, as above and below a wetting front; "
        "the row tells of the lower one, its sections of both (whole-trace)",
    )
    inserted_length: Positive | None = Field(
        None, description="of the rods in the soil, the rest in air (whole-trace) [m]"
    )


class WaveformsBody(WaveformSettings):
    """Waveforms of one probe, one or a list of them."""

    waveforms: list[WaveformBody] | WaveformBody
    coverage_probability: Annotated[Number, Field(ge=0.5, le=0.999)] = 0.95
    units: dict[str, str] = Field(
        default_factory=dict,
        description="UCUM codes by quantity, where they differ from the API's own unit; lengths "
        "by their name, as probe_offset. The axis of a trace has its axis_unit.",
        examples=[{"bulk_conductivity": "mS/m"}],
    )


SETTINGS = TypeAdapter(WaveformSettings)
WAVEFORM = TypeAdapter(WaveformBody)
WAVEFORMS = TypeAdapter(WaveformsBody)
