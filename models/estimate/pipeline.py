"""The way of a reading: permittivity, water content, flags; in blocks that fit the cache."""

import numpy as np

from models.estimate.basis import Basis
from models.estimate.estimates import Estimates, band_names
from models.estimate.gates import flag_inputs, flag_results
from models.estimate.permittivity import permittivity_of
from models.estimate.surroundings import frost, surroundings_of, water_inputs
from models.estimate.water_content import water_content_of
from models.flags import withheld
from models.readings import Readings
from models.relation import Array

BLOCK = 16_384
"""Rows computed at a time: the working columns stay in the processor's cache."""


def estimate(readings: Readings, basis: Basis) -> Estimates:
    """Water content of every reading with its standard uncertainty, interval and flags.

    The answer to a row depends on that row and the basis alone, not on its neighbours.
    """
    names = columns_of(basis)
    columns = {name: np.empty(readings.count) for name in names}
    flags = np.empty(readings.count, dtype=np.uint64)
    for start in range(0, readings.count, BLOCK):
        stop = min(start + BLOCK, readings.count)
        part = _estimate_block(readings.rows(start, stop), basis)
        flags[start:stop] = part.flags
        for name in names:
            columns[name][start:stop] = part.columns[name]
    return Estimates(columns, flags)


def columns_of(basis: Basis) -> tuple[str, ...]:
    """The columns an answer has, in order: they depend on the basis, never on the readings."""
    names = list(band_names("water_content"))
    if basis.corrects_loss and basis.query.columns & {
        "bulk_conductivity",
        "imaginary_permittivity",
    }:
        names.append("conduction_correction")
    return tuple(names)


def _estimate_block(readings: Readings, basis: Basis) -> Estimates:
    flags = readings.flags.copy()
    around = surroundings_of(readings, basis)
    found = permittivity_of(
        readings,
        basis.model.permittivity,
        around.frequency,
        basis.query.probe,
        correct=basis.corrects_loss,
    )
    flag_inputs(found, around, basis, flags)
    water = water_inputs(basis, around, readings.count, flags)
    content = water_content_of(readings, basis, found, around, water)
    flag_results(content, found, around, basis, flags)
    frost(around.temperature, flags)
    nothing = withheld(flags) | np.isnan(content.computed)
    columns: dict[str, Array] = {
        "water_content": content.interval.peak,
        "water_content_u": content.standard_uncertainty,
        "water_content_u_shared": content.shared,
        "water_content_lower": content.interval.lower,
        "water_content_upper": content.interval.upper,
        "conduction_correction": np.zeros(readings.count)
        if content.correction is None
        else content.correction,
    }
    if nothing.any():
        columns = {name: np.where(nothing, np.nan, values) for name, values in columns.items()}
    return Estimates(columns, flags)
