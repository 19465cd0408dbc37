"""From checked root zones to what the science takes, with defaults settled and said."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from models.conversion import Units
from models.decisions import allen_1998 as fao
from models.decisions import allen_table_19 as limits
from models.decisions.crops import CROPS, Crop
from models.decisions.profile import Profile, Sensors, profile_of, wetter_than
from models.decisions.root_zone import EFFICIENCIES, RootZone
from models.errors import Complaint, ParameterError
from models.relation import Array
from models.series.rules import STORAGE_RULES
from models.soil import TEXTURES
from models.soil.texture import texture_key
from service.decisions.names import unknown
from service.decisions.root_zone.bodies import MOST_IN_ALL, NOUN, RootZonesBody
from service.decisions.rows import Row, exactly, fill, known, refuse, rows_of
from service.schemas.query import named_in

TABLE_22 = "FAO-56 (1998) Table 22"
NEEDED = {
    "field_capacity": "give field_capacity, or a texture for a default",
    "wilting_point": "give wilting_point, or a texture for a default",
    "root_depth": "give root_depth in m, or a crop for a default",
    "depletion_fraction": "give depletion_fraction, such as 0.5, or a crop for a default",
}
"""What a root zone cannot do without, and how to mend it."""


@dataclass(frozen=True, slots=True)
class Question:
    """Root zones in SI, one row each."""

    rows: Sequence[Row]
    profiles: Sequence[Profile | None]
    soaked: Sequence[bool]
    """Whether there is more water than pores."""
    zone: RootZone
    water_content: tuple[Array, Array]
    """Of the whole root zone, and its standard uncertainty; NaN where it is not known."""
    shared_by_default: int
    """Profiles whose whole uncertainty was taken as shared."""


def question_of(body: RootZonesBody, bodies: Sequence[Any]) -> Question:
    """What is asked, in SI.

    Raises ParameterError or Unprocessable with the place of every fault.
    """
    named_in(STORAGE_RULES, body.rule, ("rule",))
    _refuse_many(bodies)
    single = not isinstance(body.root_zones, list)
    rows = rows_of(bodies, NOUN, body.units, single=single)
    complaints: list[Complaint] = []
    for one, row in zip(bodies, rows, strict=True):
        complaints += _settle(one, row)
    refuse(complaints)
    sensors = [_sensors(one, row, body.units, complaints)
               for one, row in zip(bodies, rows, strict=True)]  # fmt: skip
    refuse(complaints)
    profiles = [_profile(found, row, body, complaints)
                for found, row in zip(sensors, rows, strict=True)]  # fmt: skip
    refuse(complaints)
    silent = [one for one in bodies if one.profile and any(
        sensor.water_content_u and sensor.water_content_u_shared is None
        for sensor in one.profile)]  # fmt: skip
    soaked = [_soaked(row, profile, body.coverage_probability)
              for row, profile in zip(rows, profiles, strict=True)]  # fmt: skip
    content = _content(rows, profiles, soaked)
    return Question(rows, profiles, soaked, _zone(rows, content, body), content, len(silent))


def _refuse_many(bodies: Sequence[Any]) -> None:
    """No more sensors in all than one request may hold."""
    count = sum(len(one.profile or ()) for one in bodies)
    if count > MOST_IN_ALL:
        detail = f"expected at most {MOST_IN_ALL} sensors in all profiles, found {count}"
        refuse([Complaint("profile", detail, (NOUN,))])


def _settle(body: Any, row: Row) -> list[Complaint]:
    """Fill in what crop, texture and system stand for; what is missing or of two minds."""
    complaints: list[Complaint] = []
    if body.texture is not None:
        complaints += _by_texture(texture_key(body.texture), row)
    if body.crop is not None:
        if body.crop not in CROPS:
            return [*complaints, row.fault("crop", unknown("crop", body.crop, CROPS))]
        _by_crop(CROPS[body.crop], row)
    if body.irrigation is not None:
        if body.irrigation not in EFFICIENCIES:
            detail = unknown("irrigation", body.irrigation, EFFICIENCIES)
            return [*complaints, row.fault("irrigation", detail)]
        origin = f"indicative for {body.irrigation} irrigation"
        row.add("efficiency", EFFICIENCIES[body.irrigation], 0.0, origin)
    row.add("leaching_requirement", 0.0, 0.0, "none was asked for")
    if (body.profile is None) == (body.water_content is None):
        found = "neither" if body.profile is None else "both"
        detail = f"expected a profile of sensors or a mean water_content, found {found}"
        complaints.append(row.fault("water_content", detail))
    if complaints:
        return complaints
    return [row.fault(name, f"{name} is missing: {mend}")
            for name, mend in NEEDED.items() if not row.has(name)]  # fmt: skip


def _by_texture(texture: str, row: Row) -> list[Complaint]:
    if texture not in TEXTURES:
        return [row.fault("texture", unknown("soil texture", texture, TEXTURES))]
    if row.has("field_capacity", "wilting_point"):
        return []
    if texture not in limits.CLASSES:
        detail = f"there are no defaults for {texture}: give field_capacity and wilting_point"
        return [row.fault("texture", detail)]
    origin = f"texture {texture}, FAO-56 (1998) Table 19"
    row.add("field_capacity", *limits.field_capacity(texture), origin)
    row.add("wilting_point", *limits.wilting_point(texture), origin)
    return []


def _by_crop(crop: Crop, row: Row) -> None:
    origin = f"crop {crop.key}, {TABLE_22}"
    if crop.root_depth is not None:
        row.add("root_depth", crop.root_depth[0], 0.0, f"{origin}, the smaller of two")
    if crop.readily_available is None:
        return
    fraction, u = crop.readily_available
    if row.has("crop_evapotranspiration"):
        fraction = float(fao.depletion_fraction(fraction, row.values["crop_evapotranspiration"]))
        origin = f"{origin}, at crop_evapotranspiration"
    row.add("depletion_fraction", fraction, u, origin)


def _sensors(
    body: Any, row: Row, units: Units, complaints: list[Complaint]
) -> list[tuple[Row, float | None]] | None:
    """The sensors of a profile in SI, each with the shared part of its uncertainty."""
    if body.profile is None:
        return None
    found: list[tuple[Row, float | None]] = []
    for k, sensor in enumerate(body.profile):
        one = Row((*row.place, "profile", str(k)))
        complaints += fill(one, sensor, units, ("water_content_u_shared",))
        found.append((one, _shared(sensor, one, units, complaints)))
    return found


def _shared(sensor: Any, row: Row, units: Units, complaints: list[Complaint]) -> float | None:
    """The shared part of an uncertainty; None where it was not said."""
    if sensor.water_content_u_shared is None:
        return None
    part = Row(row.place)
    stated = {"water_content": 0.0, "water_content_u": sensor.water_content_u_shared}
    complaints += [replace(c, place=(*row.place, "water_content_u_shared"))
                   for c in fill(part, stated.items(), units)]  # fmt: skip
    whole = sensor.water_content_u or 0.0
    if sensor.water_content_u_shared > whole:
        detail = (
            f"water_content_u_shared is a part of water_content_u: expected at most {whole:g}, "
            f"found {sensor.water_content_u_shared:g}"
        )
        complaints.append(row.fault("water_content_u_shared", detail))
    return part.spread.get("water_content", 0.0)


def _profile(
    found: list[tuple[Row, float | None]] | None,
    row: Row,
    body: RootZonesBody,
    complaints: list[Complaint],
) -> Profile | None:
    if found is None:
        return None
    rows = [one for one, _ in found]
    content, content_u = known(rows, "water_content")
    shared = np.array([u if part is None else part
                       for u, (_, part) in zip(content_u, found, strict=True)])  # fmt: skip
    salt, salt_u = known(rows, "pore_water_conductivity")
    sensors = Sensors(
        depth=exactly(rows, "depth"),
        water_content=content,
        water_content_u=content_u,
        water_content_shared=shared,
        pore_water_conductivity=salt,
        pore_water_conductivity_u=salt_u,
        temperature=exactly(rows, "temperature"),
    )
    extended = body.assume.below_sensors is not None
    try:
        return profile_of(sensors, row.values["root_depth"], rule=body.rule, extended=extended)
    except ParameterError as error:
        complaints += [row.fault("profile", c.detail) for c in error.complaints]
        return None


def _soaked(row: Row, profile: Profile | None, probability: float) -> bool:
    if not row.has("porosity"):
        return False
    porosity = row.values["porosity"]
    if profile is not None:
        return profile.wetter_than(porosity, probability=probability)
    return wetter_than(porosity, *known([row], "water_content"), probability=probability)


def _content(
    rows: Sequence[Row], profiles: Sequence[Profile | None], soaked: Sequence[bool]
) -> tuple[Array, Array]:
    """Mean water content of every root zone, as given or by its sensors."""
    content, content_u = known(rows, "water_content")
    for k, (row, profile) in enumerate(zip(rows, profiles, strict=True)):
        if profile is not None and profile.coverage_fraction == 1.0:
            content[k], content_u[k] = profile.water_content, profile.water_content_u
        if frozen(row, profile) or soaked[k]:
            content[k] = np.nan
    return content, np.where(np.isnan(content), np.nan, content_u)


def _zone(rows: Sequence[Row], content: tuple[Array, Array], body: RootZonesBody) -> RootZone:
    return RootZone(
        water_content=content,
        field_capacity=known(rows, "field_capacity"),
        wilting_point=known(rows, "wilting_point"),
        root_depth=known(rows, "root_depth"),
        depletion_fraction=known(rows, "depletion_fraction"),
        efficiency=exactly(rows, "efficiency"),
        leaching_requirement=exactly(rows, "leaching_requirement"),
        crop_evapotranspiration=exactly(rows, "crop_evapotranspiration"),
        application_limit=exactly(rows, "application_limit", np.inf),
        probability=body.coverage_probability,
    )


def frozen(row: Row, profile: Profile | None) -> bool:
    """Whether ice hides part of the water."""
    cold = row.values.get("temperature", np.nan) <= 0.0
    return bool(cold or (profile is not None and profile.frozen))
