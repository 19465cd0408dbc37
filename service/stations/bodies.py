"""What PUT takes for a soil, a probe and a station."""

import re
from collections.abc import Mapping
from typing import Annotated, Any
from zoneinfo import ZoneInfo

from pydantic import AfterValidator, Field, TypeAdapter

from models.conductivity import DEFAULT_COMPENSATION
from models.quantity import NOISE, PROBE, QUANTITIES, SOIL
from service.faults import shown
from service.schemas.estimates import (
    RAW,
    Assume,
    CompensationKey,
    ModelChoice,
    ModelKey,
    PoreWaterChoice,
    PoreWaterKey,
    TextureKey,
)
from service.schemas.words import Body, Number, body_of, described, quantity_fields
from service.stations.times import TimeError, microseconds
from service.store.interface import VALUES, Kind

NAME = r"^[A-Za-z][A-Za-z0-9._-]{0,63}$"


def name_of(text: str) -> str:
    """The name of something stored; raises ValueError for what is none."""
    if not re.fullmatch(NAME, text):
        rule = "a letter, then at most 63 letters, digits, . _ or -"
        raise ValueError(f"expected a name: {rule}, found {shown(text)}")
    return text


def _plain(text: str) -> str:
    if any(ord(letter) < 32 for letter in text):  # below are no letters
        raise ValueError(f"expected text without control characters, found {shown(text)}")
    return text


Name = Annotated[str, Field(json_schema_extra={"pattern": NAME}), AfterValidator(name_of)]
Text = Annotated[str, Field(min_length=1, max_length=200), AfterValidator(_plain)]

MODEL_WORDS = ("mixing_model", "pore_water_model", "temperature_compensation", "assume")
"""Keys of a stored soil that stand beside the soil in a request for estimates."""


def _moment(text: str) -> str:
    try:
        microseconds(text)
    except TimeError as error:
        raise ValueError(f"{error}, found {shown(text)}") from None
    return text


def _zone(name: str) -> str:
    try:
        ZoneInfo(name)
    except (OSError, ValueError, KeyError):
        expected = "expected an IANA zone such as UTC or Europe/Berlin"
        raise ValueError(f"{expected}, found {shown(name)}") from None
    return name


Moment = Annotated[str, Field(max_length=40), AfterValidator(_moment)]

StoredSoil = body_of(
    "StoredSoil",
    "A soil, and how its water content is worked out; what is not given, the texture class fills "
    "in, and the answer says so.",
    {
        "title": (Text | None, Field(None, description="for people")),
        "texture": (TextureKey | None, Field(None, description="USDA texture class, or peat")),
        **quantity_fields(SOIL),
        "mixing_model": (
            ModelKey | ModelChoice | None,
            Field(None, description="a name, or a calibration of this soil's own"),
        ),
        "pore_water_model": (PoreWaterKey | PoreWaterChoice | None, Field(None)),
        "temperature_compensation": (
            CompensationKey | None,
            Field(None, description=f"{DEFAULT_COMPENSATION} unless given"),
        ),
        "assume": (Assume | None, Field(None, description="where a reading does not say")),
    },
)

StoredProbe = body_of(
    "StoredProbe",
    "A probe, and the standard uncertainty of what it reads.",
    {
        "title": (Text | None, Field(None, description="for people")),
        **quantity_fields(PROBE),
        **{
            f"{name}_u": (
                Annotated[Number, Field(ge=0)] | None,
                Field(None, description=f"of every {name} that states none of its own "
                      f"[{QUANTITIES[name].unit}]"),
            )
            for name in NOISE
        },
        "raw_records": (
            dict[str, dict[str, Any]] | None,
            Field(None, description="how raw records that its readings carry are read, by kind "
                  f"({', '.join(RAW)}), as in POST /v1/estimates; in the unit of the API. A "
                  "waveform needs no more than probe_length"),
        ),
    },
)  # fmt: skip


class Position(Body):
    """Where a station stands, WGS 84."""

    longitude: Annotated[Number, Field(ge=-180, le=180)]
    latitude: Annotated[Number, Field(ge=-90, le=90)]
    altitude: Annotated[Number, Field(ge=-500, le=9000)] | None = Field(
        None, description="above the ellipsoid [m]"
    )


class InstallationBody(Body):
    """A probe in a soil at a depth, from a moment until another."""

    probe: Name
    soil: Name
    depth: Annotated[Number, Field(ge=-1, le=1000)] = Field(description=described("depth"))
    start: Moment | None = Field(None, alias="from", description="left out: since ever")
    until: Moment | None = Field(None, description="left out: until now and on")


Sentinels = Annotated[list[Number], Field(max_length=50)]


class StationBody(Body):
    """A station: where it stands, what is installed, and how its logger writes."""

    title: Text | None = Field(None, description="for people")
    position: Position | None = None
    zone: Annotated[str, Field(max_length=64), AfterValidator(_zone)] = Field(
        "UTC", description="IANA name of the zone whose days are its days"
    )
    interval: Annotated[Number, Field(ge=1, le=86_400)] | None = Field(
        None, description="how far apart readings are expected [s]; else found from the readings"
    )
    sentinels: Sentinels | dict[str, Sentinels] = Field(
        default_factory=list,
        description="numbers its logger writes for no value: for all columns, or by column",
        examples=[[-9999, 7999]],
    )
    earliest: Moment | None = Field(
        None, description="what is earlier is of a clock that was reset; 2001-01-01 unless given"
    )
    installations: Annotated[list[InstallationBody], Field(max_length=2000)] = Field(
        default_factory=list
    )


BODIES: Mapping[Kind, TypeAdapter[Any]] = {
    "soil": TypeAdapter(StoredSoil),
    "probe": TypeAdapter(StoredProbe),
    "station": TypeAdapter(StationBody),
}

SENTINEL_COLUMNS = frozenset(VALUES)
