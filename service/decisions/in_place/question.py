"""From checked places to what the science takes: SI, brought to 20 Cel where that can be done."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from models.conversion import Units, from_si
from models.decisions.in_place_density import KINDS, brought_to_20_degrees
from models.decisions.terms import WORDS
from models.errors import Complaint
from models.relation import Array
from service.decisions.in_place.bodies import NOUN, PlacesBody
from service.decisions.names import unknown
from service.decisions.rows import Row, exactly, fill, known, refuse, rows_of

ONE_STEP = "one-step"
KA, WARMTH, ADJUSTED = "apparent_permittivity", "temperature", "apparent_permittivity_20"
CONDUCTIVITY, LARGEST = "standard_conductivity", "largest_bulk_density"
OF_ONE_STEP = ("c", "d")


@dataclass(frozen=True, slots=True)
class Question:
    """Places in SI, one row each, and the mould."""

    rows: Sequence[Row]
    mould: Row | None
    largest: Row
    as_read: int
    """Places whose permittivity was not brought to 20 Cel."""

    @property
    def permittivity(self) -> tuple[Array, Array]:
        """As the equations take it, of each place."""
        return _taken(self.rows)

    @property
    def mould_permittivity(self) -> tuple[Array, Array]:
        """As the equations take it, of the mould."""
        return _taken([self.mould] if self.mould else [])

    def conductivity(self, units: Units) -> tuple[Array, Array]:
        """In the unit for which c and d hold: that of the request."""
        value, u = known(self.rows, CONDUCTIVITY)
        return (
            from_si(CONDUCTIVITY, value, units, WORDS),
            from_si(f"{CONDUCTIVITY}_u", u, units, WORDS),
        )


def question_of(body: PlacesBody, bodies: Sequence[Any]) -> Question:
    """What is asked, in SI.

    Raises ParameterError or Unprocessable with the place of every fault.
    """
    _refuse_method(body, bodies)
    rows = rows_of(bodies, NOUN, body.units, single=not isinstance(body.places, list))
    mould = None if body.mould is None else Row(("mould",), type(body.mould).model_fields)
    complaints = [] if mould is None else fill(mould, body.mould, body.units)
    largest = Row((), PlacesBody.model_fields)
    stated = {name: value for name, value in body if name.startswith(LARGEST)}
    complaints += fill(largest, stated.items(), body.units)
    refuse(complaints)
    as_read = _adjust(rows, mould, body)
    return Question(rows, mould, largest, as_read)


def _refuse_method(body: PlacesBody, bodies: Sequence[Any]) -> None:
    """What the method lacks, and names that are none."""
    lacks = _lacking_one_step(body, bodies) if body.method == ONE_STEP else _lacking_two_step(body)
    complaints = list(lacks)
    if body.soil_kind is not None and body.soil_kind not in KINDS:
        detail = unknown("soil kind", body.soil_kind, KINDS)
        complaints.append(Complaint("soil_kind", detail, ("soil_kind",)))
    refuse(complaints)


def _lacking_two_step(body: PlacesBody) -> Iterator[Complaint]:
    if body.mould is None:
        detail = "two-step needs the mould: its apparent_permittivity and total_density"
        yield Complaint("mould", detail, ("mould",))


def _lacking_one_step(body: PlacesBody, bodies: Sequence[Any]) -> Iterator[Complaint]:
    if body.mould is not None:
        detail = "a mould is for two-step: leave it out, or leave out method"
        yield Complaint("mould", detail, ("mould",))
    for name in OF_ONE_STEP:
        if getattr(body.coefficients, name) is None:
            detail = f"one-step needs {name}, fitted to this soil; it has no default"
            yield Complaint(name, detail, ("coefficients", name))
    for k, one in enumerate(bodies):
        if one.standard_conductivity is None:
            steps = (NOUN, str(k)) if isinstance(body.places, list) else (NOUN,)
            detail = "one-step needs standard_conductivity of every place"
            yield Complaint(CONDUCTIVITY, detail, (*steps, CONDUCTIVITY))


def _adjust(rows: Sequence[Row], mould: Row | None, body: PlacesBody) -> int:
    """Bring permittivities to 20 Cel where kind and temperatures are known; how many stay."""
    if body.soil_kind is None or (mould is not None and not mould.has(WARMTH)):
        return len(rows)
    warm = [row for row in rows if row.has(WARMTH)]
    if len(warm) < len(rows) and mould is not None:
        return len(rows)  # one mould serves all: as read for all, or brought to 20 Cel for all
    every = [*warm, *([mould] if mould else [])]
    value, u = brought_to_20_degrees(known(every, KA), exactly(every, WARMTH), body.soil_kind)
    for k, row in enumerate(every):
        origin = f"factor of {body.soil_kind} soils, from memory"
        row.add(ADJUSTED, float(value[k]), float(u[k]), origin)
    return len(rows) - len(warm)


def _taken(rows: Sequence[Row]) -> tuple[Array, Array]:
    """At 20 Cel where it was brought there."""
    value, u = known(rows, KA)
    adjusted, adjusted_u = known(rows, ADJUSTED)
    done = np.array([row.has(ADJUSTED) for row in rows], dtype=np.bool_)
    return np.where(done, adjusted, value), np.where(done, adjusted_u, u)


def too_cold_or_warm(row: Row | None) -> bool:
    """Whether an adjustment was asked for where it does not reach."""
    return row is not None and bool(np.isnan(row.values.get(ADJUSTED, 0.0)))
