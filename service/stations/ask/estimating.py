"""Stored readings to estimates: each with the soil and the probe that were there at its time."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from models.conversion import Units, from_si
from models.errors import ModelError
from models.estimate import Basis, Estimates, Remarks, estimate
from models.flags import BIT, Flags
from models.readings import read
from models.relation import Array
from service.errors import Unprocessable
from service.formats.raw_records import SETTINGS
from service.schemas.echo import advice_echo, echo_of
from service.schemas.estimates import EstimatesSettings
from service.stations.ask.planning import Part, Places, planned
from service.stations.ask.stored import Stored
from service.stations.ask.taking_in import Taken, columns_with, take_in
from service.stations.ask.wording import named_soil
from service.stations.documents import Documents
from service.stations.settings import basis_for

NOT_ESTIMATED = BIT["not-estimated"]
MOST_TROUBLES = 20
"""Reasons that an answer tells; of the others it says how many there are."""


@dataclass(frozen=True, slots=True)
class Ground:
    """What the estimates of some rows rest on."""

    soil: str
    probe: str
    settings: EstimatesSettings
    basis: Basis
    records: Mapping[str, Any] = field(default_factory=dict)
    """What was said when raw records were read, by their kind."""

    def echo(self) -> dict[str, Any]:
        """Every constant that was used."""
        told = {"soil_name": self.soil, "probe_name": self.probe}
        told |= echo_of(self.basis, self.settings, ())
        return told | ({SETTINGS: self.records} if self.records else {})


@dataclass(slots=True)
class Estimated:
    """Estimates of stored rows, in the caller's units, and what they rest on."""

    flags: Flags
    depth: Array
    """m; NaN where nothing was installed and the reading names a probe."""
    probe: Places
    """The place among ``probes`` of the one that was there, -1: none is known."""
    probes: Sequence[str]
    source: Places
    """Who shares an error with whom: the place of the ground of each row, -1: none."""
    troubles: list[str]
    """Why rows could not be estimated."""
    columns: dict[str, Array] = field(default_factory=dict)
    grounds: list[Ground] = field(default_factory=list)
    remarks: Remarks = field(default_factory=lambda: Remarks(as_sent=False))

    def echo(self) -> list[dict[str, Any]]:
        """Every constant that was used, ground by ground."""
        return [ground.echo() for ground in self.grounds]

    def advisories(self) -> list[dict[str, str]]:
        """Why rows have no number, and what the readings themselves give rise to."""
        troubles = list(dict.fromkeys(self.troubles))
        if len(troubles) > MOST_TROUBLES:
            more = len(troubles) - MOST_TROUBLES
            troubles = [*troubles[:MOST_TROUBLES], f"and {more} more of the kind"]
        told = [{"code": "not-estimated", "text": text} for text in troubles]
        return told + advice_echo(self.remarks.advice({}))


def estimated(
    rows: Stored,
    documents: Documents,
    asked: Mapping[str, Any],
    units: Units,
    upto: int | None,
    most: int | None = None,
) -> Estimated:
    """The estimates of rows that are ordered by channel, then time.

    asked: what of a request for estimates the caller states himself, in the unit of the API.
    units: of the answer. upto: the revision whose columns a series is taken to hold.
    most: the raw records of rows from there on are not read, which is told; None: all are.

    What is chosen for a row depends on its series, soil and probe, never on the rows beside it.
    Rows that cannot be estimated have a flag and no number; the troubles say why.
    """
    plan = planned(rows, documents, upto)
    found = Estimated(
        flags=np.full(len(rows), NOT_ESTIMATED),
        depth=plan.depth,
        probe=plan.probe,
        probes=plan.probes,
        source=np.full(len(rows), -1),
        troubles=plan.troubles,
    )
    taken = Taken(rows, len(rows) if most is None else most)
    for basis, part, places in _alike(plan.parts, documents, asked, taken, found):
        _estimate(places, basis, part, taken, units, found)
    return found


def _alike(
    parts: Mapping[Part, list[Places]],
    documents: Documents,
    asked: Mapping[str, Any],
    taken: Taken,
    found: Estimated,
) -> Iterator[tuple[Basis, Part, Places]]:
    """Rows that rest on the same constants, whatever their soils and probes are called."""
    alike: dict[tuple[int, str], tuple[Basis, Part, list[Places]]] = {}
    for part, several in parts.items():
        ground = _ground(part, documents, asked, found.troubles)
        if ground is None:
            continue
        places, kind = np.concatenate(several), part[3]
        if kind:
            probe = documents.find("probe", ground.probe)
            places, said = take_in(taken, part, places, (probe and probe.body) or {})
            found.troubles += said.troubles
            ground = Ground(ground.soil, ground.probe, ground.settings, ground.basis, said.echo)
        found.source[places] = len(found.grounds)
        found.grounds.append(ground)
        key = (id(ground.basis), kind)
        alike.setdefault(key, (ground.basis, part, []))[2].append(places)
    for basis, part, several in alike.values():
        yield basis, part, np.concatenate(several)


def _ground(
    part: Part, documents: Documents, asked: Mapping[str, Any], troubles: list[str]
) -> Ground | None:
    """What estimates with this soil and probe rest on; None where that cannot be settled."""
    soil, probe, held, kind = named_soil(asked) or part[0], *part[1:]
    kept_soil, kept_probe = documents.find("soil", soil), documents.find("probe", probe)
    if kept_soil is None or kept_probe is None:
        troubles.append(f"the soil {soil} or the probe {probe} is not there")
        return None
    columns = columns_with(held, kind)
    try:
        settings, basis = basis_for(kept_soil.body or {}, kept_probe.body or {}, asked, columns)
    except (ModelError, Unprocessable) as error:
        told: object = error
        if isinstance(error, Unprocessable):
            details = dict.fromkeys(fault.detail for fault in error.errors)
            told = "; ".join(details) or error.detail
        troubles.append(f"soil {soil}, probe {probe}: {told}")
        return None
    return Ground(soil, probe, settings, basis)


def _estimate(
    places: Places, basis: Basis, part: Part, taken: Taken, units: Units, found: Estimated
) -> None:
    """Put the estimates of some rows where they stand."""
    if not places.size:
        return
    columns = taken.columns(part, places)
    gaps = {name: np.isnan(values) for name, values in columns.items()}
    readings = taken.with_shared(read(columns, {}, {}, gaps), places)
    taken.mark(readings.flags, places)
    result: Estimates = estimate(readings, basis)
    found.flags[places] = result.flags
    found.remarks.note(columns, {}, result.flags, result.columns)
    for name, values in result.columns.items():
        if name not in found.columns:
            found.columns[name] = np.full(len(found.flags), np.nan)
        found.columns[name][places] = from_si(name, values, units)
