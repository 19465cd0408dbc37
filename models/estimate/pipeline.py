"""The way of a reading: permittivity, water content, flags; in blocks that fit the cache."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.estimate.basis import Basis
from models.estimate.gates import (
    flag_inputs,
    flag_meaningless,
    flag_pore_water,
    flag_results,
)
from models.estimate.permittivity import Permittivity, permittivity_of
from models.estimate.salt.conductivities import conductivities_of
from models.estimate.salt.pore_water import PoreWater
from models.estimate.salt.salinity import BULK_25, EXTRACT, PORE
from models.estimate.surroundings import Surroundings, frost, surroundings_of, water_inputs
from models.estimate.water_content import WaterContent, water_content_of
from models.flags import BIT, Flags, withheld, without_pore_water
from models.quantity import band_names
from models.readings import Readings
from models.relation import Array
from models.uncertainty.coverage import coverage_factor
from models.uncertainty.first_order import Input

BLOCK = 16_384
"""Rows computed at a time, about: the working columns stay in the processor's cache. Twice as many
where there is no salt, whose curves are many columns more."""


@dataclass(frozen=True, slots=True)
class Estimates:
    """One row per reading, in the order of the readings."""

    columns: Mapping[str, Array]
    """SI and Cel; NaN where the flags say why there is no number."""
    flags: Flags


def estimate(readings: Readings, basis: Basis) -> Estimates:
    """Water content of every reading with its standard uncertainty, interval and flags.

    The answer to a row depends on that row and the basis alone, not on its neighbours.
    """
    names = columns_of(basis)
    columns = {name: np.empty(readings.count) for name in names}
    flags = np.empty(readings.count, dtype=np.uint64)
    about = BLOCK if basis.salinity is not None else 2 * BLOCK
    for start, stop in _blocks(readings.count, about):
        part = _estimate_block(readings.rows(start, stop), basis)
        flags[start:stop] = part.flags
        for name in names:
            columns[name][start:stop] = part.columns[name]
    return Estimates(columns, flags)


def _blocks(count: int, about: int) -> Iterator[tuple[int, int]]:
    """Blocks of about so many rows, all of one length, so that no short one is left at the end."""
    step = -(-count // max(1, round(count / about))) or 1
    return ((start, min(start + step, count)) for start in range(0, count, step))


def columns_of(basis: Basis) -> tuple[str, ...]:
    """The columns an answer has, in order: they depend on the basis, never on the readings."""
    names = list(band_names("water_content"))
    if basis.tells_correction:
        names.append("conduction_correction")
    if basis.salinity is not None:
        if basis.salinity.tells_bulk:
            names += band_names(BULK_25)
        names += band_names(PORE)
        if basis.salinity.paste is not None and basis.salinity.density is not None:
            names += band_names(EXTRACT)
    return tuple(names)


@dataclass(frozen=True, slots=True)
class Worked:
    """One block half way: everything that its water content came from."""

    readings: Readings
    around: Surroundings
    found: Permittivity
    water: Mapping[str, Input]
    content: WaterContent
    flags: Flags


def work_out(readings: Readings, basis: Basis) -> Worked:
    """Water content of one block, and what it came from; the flags are those of its water."""
    flags = readings.flags.copy()
    around = surroundings_of(readings, basis)
    found = _permittivity(readings, basis, around, basis.model.permittivity)
    flag_inputs(found, around, basis, flags, _timed(readings, basis))
    water = water_inputs(basis, around, readings.count, flags)
    content = water_content_of(readings, basis, found, around, water)
    flag_results(content, found, around, basis, flags)
    frost(around.temperature, flags)
    return Worked(readings, around, found, water, content, flags)


def pore_water_of(worked: Worked, basis: Basis) -> PoreWater | None:
    """The same block on its way to the pore water; None where nothing tells its salt."""
    if basis.salinity is None:
        return None
    real = worked.found
    if basis.model.permittivity == "apparent" and not basis.corrects_loss:
        real = _permittivity(worked.readings, basis, worked.around, "real")
    return PoreWater(worked.readings, basis, basis.salinity, real, worked.around, worked.content)


def _estimate_block(readings: Readings, basis: Basis) -> Estimates:
    worked = work_out(readings, basis)
    found, content, flags = worked.found, worked.content, worked.flags
    held = _held(content, basis)
    columns: dict[str, Array] = {
        "water_content": content.interval.peak,
        "water_content_u": content.standard_uncertainty * held,
        "water_content_u_shared": content.shared * held,
        "water_content_lower": content.interval.lower,
        "water_content_upper": content.interval.upper,
    }
    if basis.tells_correction:
        columns["conduction_correction"] = _correction(content, found, readings.count)
    unknown = np.isnan(content.computed) | np.isnan(content.standard_uncertainty)
    columns = _without(columns, withheld(flags) | unknown)
    pore = pore_water_of(worked, basis)
    if pore is not None:
        flag_meaningless(pore, flags)
        answer = conductivities_of(pore, found, worked.water, basis, without_pore_water(flags))
        salt = answer.columns
        flag_pore_water(pore, answer, content, basis, flags)
        bulk = {n: v for n, v in salt.items() if n.startswith(BULK_25)}
        columns |= salt | _without(bulk, (flags & BIT["unreadable-row"]) != 0)
        rest = {n: v for n, v in salt.items() if n not in bulk}
        columns |= _without(rest, without_pore_water(flags))
    return Estimates(columns, flags)


def _held(content: WaterContent, basis: Basis) -> Array | float:
    """Of the standard uncertainty, what the range of what is possible leaves: 1 far from its ends.

    A quantity between 0 and 1 is not uncertain by more than its interval is wide.
    """
    if basis.query.draws is not None:
        return 1.0
    ends, u = content.interval, content.standard_uncertainty
    arm = np.maximum(ends.upper - ends.peak, ends.peak - ends.lower)
    arm /= coverage_factor(basis.query.probability)
    return np.minimum(np.divide(arm, u, out=np.ones_like(u), where=u > arm), 1.0)


def _timed(readings: Readings, basis: Basis) -> Array | None:
    """Travel times that could be used: without a length of the rods they say nothing."""
    return readings.columns.get("travel_time") if "probe_length" in basis.query.probe else None


def _correction(content: WaterContent, found: Permittivity, count: int) -> Array:
    """By how much loss was corrected for; NaN where nothing tells the loss."""
    if content.correction is None or found.loss is None:
        return np.full(count, np.nan)
    return np.where(np.isnan(found.loss), np.nan, content.correction)


def _permittivity(
    readings: Readings, basis: Basis, around: Surroundings, kind: str
) -> Permittivity:
    return permittivity_of(
        readings,
        kind,
        around.known_frequency,
        basis.query.probe,
        correct=basis.corrects_loss or kind == "real",
    )


def _without(columns: dict[str, Array], nothing: NDArray[np.bool_]) -> dict[str, Array]:
    """The columns, NaN in the rows that must have no number."""
    if not nothing.any():
        return columns
    return {name: np.where(nothing, np.nan, values) for name, values in columns.items()}
