"""Whose uncertainty a band is: each source's share, and the one thing that would narrow it most."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.estimate.basis import Basis
from models.estimate.pipeline import pore_water_of, work_out
from models.estimate.salt.stepped import Stepped
from models.estimate.sources import Sources, of_water_content
from models.flags import without_pore_water
from models.readings import Readings
from models.relation import Array
from models.uncertainty.budget import NOBODY, Budget, budget_of

MEND: Mapping[str, str] = {
    "mixing_model": "a calibration for this soil",
    "conduction_correction": "a probe of higher frequency, or a stated one",
    "porosity": "a measured porosity or bulk density",
    "bulk_density": "a measured bulk density",
    "particle_density": "a measured density of the solids",
    "solid_permittivity": "a measured permittivity of the solids",
    "clay": "a measured clay content",
    "apparent_permittivity": "less noise in the permittivity, or a mean over several readings",
    "temperature": "a better temperature",
    "pore_water_model": "coefficients of the pore-water model fitted to this soil",
    "offset": "an offset fitted to this soil",
    "bulk_conductivity": "less noise in the bulk conductivity",
    "surface_conductivity": "a measured surface conductivity",
}


ROUNDING = 1e-9
"""m3/m3, or of the conductivity: what is less in every reading is rounding, and no source."""


@dataclass(frozen=True, slots=True)
class Shares:
    """Shares of the variance of one quantity by source, and a sentence for each reading."""

    shares: Mapping[str, Array]
    sentences: tuple[str | None, ...]


def budget(readings: Readings, basis: Basis) -> dict[str, Shares]:
    """Where the bands of each reading come from, to first order, by quantity.

    Of the conductivity of the pore water it is the logarithm, of which the band is a factor.
    """
    worked = work_out(readings, basis)
    through = of_water_content(worked.found, worked.water, worked.content)
    found = {"water_content": _shares(through, readings.count)}
    pore = pore_water_of(worked, basis)
    if pore is not None:
        value, reach = pore.at_25(), worked.content.standard_uncertainty
        stepped = Stepped.of(pore, value, pore.own_uncertainty(value))
        sources = stepped.effects(through, reach)
        nothing = without_pore_water(worked.flags) | np.isnan(stepped.value)
        found["pore_water_conductivity"] = _shares(sources, readings.count, nothing)
    return found


def _shares(sources: Sources, count: int, nothing: NDArray[np.bool_] | None = None) -> Shares:
    """nothing: rows that have no number."""
    names = dict.fromkeys((*sources.per_reading, *sources.shared))
    effects = {
        name: np.sqrt(
            np.square(sources.per_reading.get(name, 0.0)) + np.square(sources.shared.get(name, 0.0))
        )
        for name in names
    }
    none = np.zeros(count, dtype=np.bool_) if nothing is None else nothing
    told = {
        name: np.where(none, np.nan, effect)
        for name, effect in effects.items()
        if np.any(effect > ROUNDING)
    }
    if not told:
        return Shares({}, (None,) * count)
    found = budget_of(told)
    return Shares(found.share, tuple(_sentence(found, row) for row in range(count)))


def _sentence(found: Budget, row: int) -> str | None:
    largest = int(found.largest[row])
    if largest == NOBODY:
        return None
    name = found.names[largest]
    share, narrower = float(found.share[name][row]), float(found.narrowing[name][row])
    if not np.isfinite(share):
        return None
    mend = MEND.get(name, f"a better known {name}")
    return (
        f"{name} makes {share:.0%} of the variance: were it exact, the band would be "
        f"{narrower:.0%} narrower; {mend} would narrow it most."
    )
