"""The rows of an answer to POST /v1/calibrations: bands, pairs, forms and shared errors."""

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from models.calibration import Band, Calibration, Candidate
from models.conversion import Units, from_si
from models.decisions.soil_state import WATER_DENSITY
from models.relation import Array
from service.calibrations.question import Question

PERMITTIVITY, WATER = "apparent_permittivity", "water_content"


def number(value: float) -> float | None:
    """As JSON has it: null for what is none."""
    return value if np.isfinite(value) else None


def width(value: float, units: Units) -> float | None:
    """A difference of water contents."""
    return number(float(from_si(f"{WATER}_u", value, units)))


def _widths(values: Array, units: Units) -> list[float | None]:
    return [number(value) for value in from_si(f"{WATER}_u", values, units).tolist()]


def _values(values: Array, name: str, units: Units) -> list[float]:
    return list(from_si(name, values, units).tolist())


def ends(values: Array, name: str, units: Units) -> list[float]:
    """The least and the largest."""
    return _values(np.array([values.min(), values.max()]), name, units)


def _rows(columns: Mapping[str, Sequence[Any]]) -> list[dict[str, Any]]:
    return [dict(zip(columns, cells, strict=True)) for cells in zip(*columns.values(), strict=True)]


def bands(
    band: Band, at: Array, at_u: Array, outside: NDArray[np.bool_], units: Units
) -> list[dict[str, Any]]:
    """One object per permittivity."""
    (lower, upper), (mean_lower, mean_upper) = band.prediction_ends, band.curve_ends
    return _rows({
        PERMITTIVITY: _values(at, PERMITTIVITY, units),
        f"{PERMITTIVITY}_u": _values(at_u, f"{PERMITTIVITY}_u", units),
        WATER: _values(band.water_content, WATER, units),
        f"{WATER}_u": _widths(band.prediction_u, units),
        f"{WATER}_lower": _values(lower, WATER, units),
        f"{WATER}_upper": _values(upper, WATER, units),
        "mean_u": _widths(band.curve_u, units),
        "mean_lower": _values(mean_lower, WATER, units),
        "mean_upper": _values(mean_upper, WATER, units),
        "extrapolated": [bool(beyond) for beyond in outside],
    })  # fmt: skip


def pairs(question: Question, found: Calibration, units: Units) -> list[dict[str, Any]]:
    """The pairs as they were used, and what the curve leaves of each."""
    measured = found.pairs
    told = _rows({
        PERMITTIVITY: _values(measured.permittivity, PERMITTIVITY, units),
        f"{PERMITTIVITY}_u": _values(measured.permittivity_u, f"{PERMITTIVITY}_u", units),
        WATER: _values(measured.water_content, WATER, units),
        f"{WATER}_u": _widths(measured.water_content_u, units),
        "residual": _widths(found.left, units),
        "standardised_residual": [number(float(one)) for one in found.standardised],
        "left_out_residual": _widths(found.left_out.errors, units),
    })  # fmt: skip
    levels = [row.level for row in question.rows]
    named = [{} if level is None else {"level": level} for level in levels]
    return [{**level, **row} for level, row in zip(named, told, strict=True)]


def form(one: Candidate, units: Units) -> dict[str, Any]:
    """One of the forms that could be fitted."""
    found = one.calibration
    return {
        "form": found.form.key,
        "corrected_akaike": number(one.criterion),
        "leave_one_out_error": width(found.left_out.error, units),
        "usable": not one.unusable,
    }


def shared(question: Question, units: Units) -> dict[str, Any]:
    """What errors that all pairs share move, and the density of water that was used."""
    moved: dict[str, Any] = {}
    for source in question.pairs.shared:
        about = WATER if source.moves_water else PERMITTIVITY
        most = float(from_si(f"{about}_u", source.most, units))
        moved[source.name] = {"moves": about, "by_at_most": most}
    weighed = question.weighed
    water = {"water_density": float(from_si("bulk_density", WATER_DENSITY, units))}
    return {"errors": moved, **(water if weighed else {})}
