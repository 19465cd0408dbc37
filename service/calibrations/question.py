"""From the words of a request to pairs in SI and the form that is asked for."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from models.calibration import FORMS, Form, Pairs, Shared
from models.calibration.water import Waters, volumetric
from models.conversion import Units, refuse_units, to_si
from models.errors import Complaint, ParameterError
from models.relation import Array
from service.calibrations.bodies import (
    DENSITY,
    KEYS,
    MEASURED,
    PERMITTIVITIES,
    WATERS,
)
from service.calibrations.rows import Row, rows_of

SHARED = "_u_shared"


@dataclass(frozen=True, slots=True, eq=False)
class Question:
    """A checked request."""

    body: Any
    rows: Sequence[Row]
    pairs: Pairs
    form: Form | None
    """None: the pairs decide."""
    density_exact: bool
    """Whether one density of all was given as exact."""

    @property
    def weighed(self) -> bool:
        """Whether any pair has a gravimetric water content."""
        return any(WATERS[1] in row.values for row in self.rows)


def question_of(body: Any) -> Question:
    """A request as pairs in SI; body: a ``CalibrationBody``.

    Raises ParameterError with the place of what cannot be used.
    """
    refuse_units(body.units)
    of_all = _of_all(body, body.units)
    rows = rows_of(body.pairs, of_all, body.units)
    pairs = pairs_of(rows, of_all)
    one_density = any(DENSITY not in row.values and WATERS[1] in row.values for row in rows)
    exact = one_density and not any(of_all.get(f"{DENSITY}{u}") for u in ("_u", SHARED))
    return Question(body, rows, pairs, _form_of(body), exact)


def _of_all(body: Any, units: Units) -> dict[str, float]:
    """What is said once for all pairs, SI."""
    keys = [f"{name}{suffix}" for name in MEASURED for suffix in ("", "_u", SHARED)]
    given = {key: value for key in keys if (value := getattr(body, key, None)) is not None}
    if f"{DENSITY}_u" in given and DENSITY not in given:
        detail = (
            "bulk_density_u is that of one bulk_density for all pairs, and stands without it: "
            "give bulk_density, or the uncertainty in each pair"
        )
        raise ParameterError(DENSITY, [Complaint(DENSITY, detail, (f"{DENSITY}_u",))])
    found: dict[str, float] = {}
    for key, value in given.items():
        name = key.replace(SHARED, "_u")
        try:
            found[key] = to_si("pairs", {name: value}, units)[name]
        except ParameterError as error:
            wrong = [Complaint(key, complaint.detail, (key,)) for complaint in error.complaints]
            raise ParameterError(key, wrong) from None
    return found


def _form_of(body: Any) -> Form | None:
    if body.form is None and body.degree is None:
        return None
    named = body.form or "polynomial"
    if (named, body.degree) not in KEYS:
        detail = f"{named} has no degree: leave it out, or ask for polynomial"
        raise ParameterError("degree", [Complaint("degree", detail, ("degree",))])
    return FORMS[KEYS[named, body.degree]]


def pairs_of(rows: Sequence[Row], of_all: Mapping[str, float]) -> Pairs:
    """Rows as columns of permittivity and volumetric water content.

    Raises ParameterError for a gravimetric water content that is more than there is room for.
    """
    permittivity = _column(rows, of_all, PERMITTIVITIES, "")
    waters = volumetric(_water(rows, of_all))
    flooded = np.flatnonzero(waters.water_content > 1.0)
    if flooded.size:
        row = rows[int(flooded[0])]
        detail = (
            f"its gravimetric water content and bulk density make a water content of "
            f"{waters.water_content[flooded[0]]:.4g} m3/m3, more than 1: check both; if it is "
            "in %, name the unit: "
            f'"units": {{"{WATERS[1]}": "%"}}'
        )
        raise ParameterError("pairs", [row.complaint(WATERS[1], detail)])
    nothing = np.zeros_like(permittivity)
    shared = [Shared(name, moved, nothing) for name, moved in waters.shared.items()]
    for name in PERMITTIVITIES:
        moved = np.where(_has(rows, name), of_all.get(f"{name}{SHARED}", 0.0), 0.0)
        shared += [Shared(name, nothing, moved)] if moved.any() else []
    return Pairs(
        permittivity,
        _column(rows, of_all, PERMITTIVITIES, "_u"),
        waters.water_content,
        waters.water_content_u,
        _levels(rows),
        tuple(shared),
    )


def _water(rows: Sequence[Row], of_all: Mapping[str, float]) -> Waters:
    """The columns that tell the water content, with what is said once for all pairs."""
    return Waters(
        gravimetric=_has(rows, WATERS[1]),
        water=_column(rows, of_all, WATERS, ""),
        water_u=_column(rows, of_all, WATERS, "_u"),
        density=_column(rows, {}, (DENSITY,), ""),
        density_u=_column(rows, {}, (DENSITY,), "_u"),
        density_of_all=of_all.get(DENSITY, np.nan),
        density_of_all_u=of_all.get(f"{DENSITY}_u", 0.0),
        shared={name: of_all.get(f"{name}{SHARED}", 0.0) for name in (*WATERS, DENSITY)},
    )


def _has(rows: Sequence[Row], name: str) -> NDArray[np.bool_]:
    return np.array([name in row.values for row in rows], dtype=bool)


def _column(
    rows: Sequence[Row], of_all: Mapping[str, float], names: tuple[str, ...], suffix: str
) -> Array:
    """The one of ``names`` that each row has, or its uncertainty; else what is said for all."""
    lacking = 0.0 if suffix else np.nan
    cells = []
    for row in rows:
        own = [name for name in names if name in row.values]
        key = f"{own[0] if own else names[0]}{suffix}"
        cells.append(row.values.get(key, of_all.get(key, lacking) if own else lacking))
    return np.array(cells, dtype=np.float64)


def _levels(rows: Sequence[Row]) -> Any:
    """Which rows are replicates; a row without a level is one of its own; None: none has one."""
    if all(row.level is None for row in rows):
        return None
    known: dict[Any, int] = {}
    named = [("pair", row.number) if row.level is None else row.level for row in rows]
    return np.array([known.setdefault(level, len(known)) for level in named], dtype=np.intp)
