"""Stored readings to estimates: each with the soil and the probe that were there at its time."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from models.conversion import Units, from_si
from models.errors import ModelError
from models.estimate import Basis, Estimates, estimate
from models.flags import BIT, Flags
from models.readings import read
from models.relation import Array
from service.errors import Unprocessable
from service.schemas.echo import echo_of
from service.schemas.estimates import EstimatesSettings
from service.stations.documents import Documents
from service.stations.settings import basis_for
from service.stations.station import Installation
from service.store.interface import RAW, Channel, Row

NOT_ESTIMATED = BIT["not-estimated"]
Places = NDArray[np.intp]
Part = tuple[str, str, frozenset[str]]
"""Soil, probe, and the columns the series holds."""


@dataclass(frozen=True, slots=True)
class Stored:
    """Rows of the store as columns; values in the unit of the API, NaN where there is none."""

    channels: Mapping[int, Channel]
    number: NDArray[np.int64]
    """Of the channel of each row."""
    time: NDArray[np.int64]
    revision: NDArray[np.int64]
    values: Mapping[str, Array]

    def __len__(self) -> int:
        return len(self.time)


def stored(rows: Sequence[Row], channels: Sequence[Channel], columns: Sequence[str]) -> Stored:
    """Rows of channel, time, revision and numbers, as a store gives them."""
    table = np.array(rows, dtype=np.float64).reshape(len(rows), 3 + len(columns))
    keys = table[:, :3].astype(np.int64)
    values = {name: np.ascontiguousarray(table[:, 3 + i]) for i, name in enumerate(columns)}
    return Stored({c.number: c for c in channels}, keys[:, 0], keys[:, 1], keys[:, 2], values)


@dataclass(frozen=True, slots=True)
class Ground:
    """What the estimates of some rows rest on."""

    soil: str
    probe: str
    settings: EstimatesSettings
    basis: Basis


@dataclass(slots=True)
class Estimated:
    """Estimates of stored rows, in the caller's units, and what they rest on."""

    columns: dict[str, Array] = field(default_factory=dict)
    flags: Flags = field(default_factory=lambda: np.zeros(0, np.uint64))
    depth: Array = field(default_factory=lambda: np.zeros(0))
    """m; NaN where nothing was installed and the reading names a probe."""
    source: Places = field(default_factory=lambda: np.zeros(0, np.intp))
    """Who shares an error with whom: the place of the ground of each row, -1: none."""
    grounds: list[Ground] = field(default_factory=list)
    troubles: list[str] = field(default_factory=list)
    """Why rows could not be estimated."""

    def echo(self) -> list[dict[str, Any]]:
        """Every constant that was used, ground by ground."""
        return [
            {"soil_name": g.soil, "probe_name": g.probe, **echo_of(g.basis, g.settings, ())}
            for g in self.grounds
        ]


def estimated(
    rows: Stored, documents: Documents, asked: Mapping[str, Any], units: Units, upto: int | None
) -> Estimated:
    """The estimates of rows that are ordered by channel, then time.

    asked: what of a request for estimates the caller states himself, in the unit of the API.
    units: of the answer. upto: the revision whose columns a series is taken to hold.

    What is chosen for a row depends on its series, soil and probe, never on the rows beside it.
    Rows that cannot be estimated have a flag and no number; the troubles say why.
    """
    found = Estimated(
        flags=np.full(len(rows), NOT_ESTIMATED),
        depth=np.full(len(rows), np.nan),
        source=np.full(len(rows), -1),
    )
    parts: dict[Part, list[Places]] = {}
    for channel, installed, places in _series(rows, documents):
        held = channel.held_at(upto) - {RAW, "depth"}
        if channel.depth is not None:
            found.depth[places] = channel.depth
        alone = 0
        for item, inside in _by_installation(rows.time, installed, places):
            if item is None:
                alone += inside.size
            elif inside.size:
                found.depth[inside] = item.depth
                parts.setdefault((item.soil, item.probe, held), []).append(inside)
        if alone:
            found.troubles.append(
                f"{channel.station}: {alone} readings of {_called(channel)} are from times for "
                "which no one installation is on record"
            )
    for basis, held, places in _alike(parts, documents, asked, found):
        _estimate(places, basis, held, rows, units, found)
    return found


def _alike(
    parts: Mapping[Part, list[Places]],
    documents: Documents,
    asked: Mapping[str, Any],
    found: Estimated,
) -> Iterator[tuple[Basis, frozenset[str], Places]]:
    """Rows that rest on the same constants, whatever their soils and probes are called."""
    alike: dict[int, tuple[Basis, frozenset[str], list[Places]]] = {}
    for (soil, probe, held), several in parts.items():
        ground = _ground(soil, probe, documents, asked, held, found.troubles)
        if ground is not None:
            places = np.concatenate(several)
            found.source[places] = len(found.grounds)
            found.grounds.append(ground)
            alike.setdefault(id(ground.basis), (ground.basis, held, []))[2].append(places)
    for basis, held, several in alike.values():
        yield basis, held, np.concatenate(several)


def _series(
    rows: Stored, documents: Documents
) -> Iterator[tuple[Channel, list[Installation], Places]]:
    """Each channel with its installations and the places of its rows."""
    numbers, firsts = np.unique(rows.number, return_index=True)
    ends = np.append(firsts[1:], len(rows))[: len(firsts)]
    for number, first, end in zip(numbers.tolist(), firsts.tolist(), ends.tolist(), strict=True):
        channel = rows.channels[number]
        station = documents.station(channel.station)
        yield channel, station.installed(channel) if station else [], np.arange(first, end)


def _by_installation(
    times: NDArray[np.int64], installed: Sequence[Installation], places: Places
) -> Iterator[tuple[Installation | None, Places]]:
    """Each installation with the places of its rows, then those of rows that have none."""
    moments = times[places]
    left = np.ones(len(places), dtype=np.bool_)
    for item in installed:
        inside = (moments >= item.start) & (moments < item.end)
        left &= ~inside
        yield item, places[inside]
    yield None, places[left]


def _ground(
    soil: str,
    probe: str,
    documents: Documents,
    asked: Mapping[str, Any],
    held: frozenset[str],
    troubles: list[str],
) -> Ground | None:
    """What estimates with this soil and probe rest on; None where that cannot be settled."""
    kept_soil, kept_probe = documents.find("soil", soil), documents.find("probe", probe)
    if kept_soil is None or kept_probe is None:
        troubles.append(f"the soil {soil} or the probe {probe} is not there")
        return None
    try:
        settings, basis = basis_for(kept_soil.body or {}, kept_probe.body or {}, asked, held)
    except (ModelError, Unprocessable) as error:
        told = error.detail if isinstance(error, Unprocessable) else error
        troubles.append(f"soil {soil}, probe {probe}: {told}")
        return None
    return Ground(soil, probe, settings, basis)


def _estimate(
    places: Places,
    basis: Basis,
    held: frozenset[str],
    rows: Stored,
    units: Units,
    found: Estimated,
) -> None:
    """Put the estimates of some rows where they stand."""
    columns = {name: rows.values[name][places] for name in rows.values if name in held}
    gaps = {name: np.isnan(values) for name, values in columns.items()}
    result: Estimates = estimate(read(columns, {}, {}, gaps), basis)
    found.flags[places] = result.flags
    for name, values in result.columns.items():
        if name not in found.columns:
            found.columns[name] = np.full(len(rows), np.nan)
        found.columns[name][places] = from_si(name, values, units)


def _called(channel: Channel) -> str:
    return channel.probe or f"{channel.depth:g} m"
