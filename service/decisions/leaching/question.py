"""From checked fields to what the science takes, with crop and target settled and said."""

from collections.abc import Sequence
from typing import Any

from models.decisions.crops import CROPS, Crop
from models.decisions.leaching import FREQUENT, METHODS, target_conductivity, target_yield
from models.decisions.salinity_class import SOIL_SCHEMES
from models.errors import Complaint
from service.decisions.leaching.bodies import NOUN, LeachingBody
from service.decisions.names import unknown
from service.decisions.rows import Row, refuse, rows_of
from service.schemas.query import named_in

TABLE = "FAO-29 (1985) Table 4 and Maas (1990)"
TARGET = "target_extract_conductivity"
TOLERANCE = ("salt_threshold", "salt_slope")


def rows_asked(body: LeachingBody, bodies: Sequence[Any]) -> list[Row]:
    """Every field in SI, its crop and its target settled.

    Raises ParameterError or Unprocessable with the place of every fault.
    """
    if body.method not in METHODS:
        detail = unknown("leaching method", body.method, METHODS)
        refuse([Complaint("method", detail, ("method",))])
    named_in(SOIL_SCHEMES, body.salinity_scheme, ("salinity_scheme",))
    rows = rows_of(bodies, NOUN, body.units, single=not isinstance(body.fields, list))
    complaints: list[Complaint] = []
    for one, row in zip(bodies, rows, strict=True):
        found = _settle(one, row, body.method)
        complaints += found
        if not found:
            _aim(row, body.method)
    refuse(complaints)
    return rows


def _settle(body: Any, row: Row, method: str) -> list[Complaint]:
    """Fill in what the crop stands for; what is missing or contradicts."""
    if body.crop is not None:
        if body.crop not in CROPS:
            return [row.fault("crop", unknown("crop", body.crop, CROPS))]
        complaints = _by_crop(CROPS[body.crop], row)
        if complaints:
            return complaints
    lone = [name for name in TOLERANCE if row.has(name)]
    if len(lone) == 1:
        (other,) = set(TOLERANCE) - set(lone)
        return [row.fault(other, f"{lone[0]} needs {other} beside it, or a crop")]
    if row.has("target_yield") and (method == FREQUENT or row.has(TARGET)):
        why = f"method {FREQUENT} aims at no yield" if method == FREQUENT else f"{TARGET} is given"
        return [row.fault("target_yield", f"target_yield has no meaning: {why}; leave it out")]
    return _missing(row)


def _by_crop(crop: Crop, row: Row) -> list[Complaint]:
    if row.has(*TOLERANCE):
        return []
    if crop.threshold is None or crop.slope is None:
        detail = f"there is no threshold of {crop.key}: give salt_threshold and salt_slope"
        return [row.fault("crop", detail)]
    origin = f"crop {crop.key}, {TABLE}"
    row.add("salt_threshold", *crop.threshold, origin)
    row.add("salt_slope", *crop.slope, origin)
    return []


def _missing(row: Row) -> list[Complaint]:
    """What nothing can be answered without."""
    if not row.has("water_conductivity"):
        for name in ("evapotranspiration", "leaching_fraction"):
            if row.has(name):
                return [row.fault("water_conductivity", f"{name} needs water_conductivity")]
        if not row.has("saturation_extract_conductivity"):
            detail = (
                "expected water_conductivity (for leaching) or saturation_extract_conductivity "
                "(for class and yield), found neither"
            )
            return [row.fault("water_conductivity", detail)]
        return []
    aimed = row.has(*TOLERANCE) or row.has(TARGET)
    if not aimed and (row.has("evapotranspiration") or not row.has("leaching_fraction")):
        detail = (
            "a leaching requirement needs a target: give crop, or salt_threshold and salt_slope, "
            f"or {TARGET}"
        )
        return [row.fault(TARGET, detail)]
    return []


def _aim(row: Row, method: str) -> None:
    """Settle the target: the extract at the yield aimed at."""
    if not row.has("water_conductivity", *TOLERANCE) or row.has(TARGET):
        return
    usual = float(target_yield(row.values["water_conductivity"], method=method))
    aim = row.values.get("target_yield", usual)
    pairs = [(row.values[name], row.spread[name]) for name in TOLERANCE]
    value, u = target_conductivity(aim, *pairs)
    origin = f"where the line of salt_threshold and salt_slope gives a yield of {aim:g}"
    row.add(TARGET, float(value[0]), float(u[0]), origin)
    row.drop("target_yield")


def tolerant(rows: Sequence[Row]) -> bool:
    """Whether some numbers came from the table of crops."""
    return any(row.origins.get(name, "").startswith("crop") for row in rows for name in TOLERANCE)
