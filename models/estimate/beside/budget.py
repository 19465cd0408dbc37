"""Whose uncertainty a band is: each source's share, and the one thing that would narrow it most."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from models.estimate.basis import Basis
from models.estimate.pipeline import work_out
from models.estimate.sources import of_water_content
from models.readings import Readings
from models.relation import Array
from models.uncertainty.budget import NOBODY, Budget, budget_of

MEND: Mapping[str, str] = {
    "mixing_model": "a calibration for this soil",
    "porosity": "a measured porosity or bulk density",
    "solid_permittivity": "a measured permittivity of the solids",
    "clay": "a measured clay content",
    "apparent_permittivity": "less noise in the permittivity, or a mean over several readings",
    "temperature": "a better temperature",
}


ROUNDING = 1e-9
"""m3/m3: what is less in every reading is rounding, and no source."""


@dataclass(frozen=True, slots=True)
class WaterBudget:
    """Shares of the variance of the water content by source, and a sentence for each reading."""

    shares: Mapping[str, Array]
    sentences: tuple[str | None, ...]


def budget(readings: Readings, basis: Basis) -> WaterBudget:
    """Where the band of each reading's water content comes from, to first order."""
    worked = work_out(readings, basis)
    sources = of_water_content(worked.found, worked.water, worked.content)
    names = dict.fromkeys((*sources.per_reading, *sources.shared))
    effects = {
        name: np.sqrt(
            np.square(sources.per_reading.get(name, 0.0)) + np.square(sources.shared.get(name, 0.0))
        )
        for name in names
    }
    told = {
        name: np.broadcast_to(effect, (readings.count,))
        for name, effect in effects.items()
        if np.any(effect > ROUNDING)
    }
    if not told:
        return WaterBudget({}, (None,) * readings.count)
    found = budget_of(told)
    return WaterBudget(found.share, tuple(_sentence(found, row) for row in range(readings.count)))


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
