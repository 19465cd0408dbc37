"""A quantity of each reading, and how far every source of uncertainty moves it."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from models.estimate.permittivity import Permittivity
from models.relation import Array

APPARENT = "apparent_permittivity"
BULK, TEMPERATURE, WATER_MODEL = "bulk_conductivity", "temperature", "water_model"
PER_READING = frozenset({APPARENT, BULK, TEMPERATURE})
"""Sources that are another one for each reading; readings of a soil or a probe share the others."""


@dataclass(frozen=True, slots=True)
class Moving:
    """A value, scalar or shape (n,), and what one standard uncertainty of each source adds."""

    value: Any
    by: Mapping[str, Any] = field(default_factory=dict)

    def at(self, scores: Mapping[str, Any]) -> Any:
        """Where the sources are so many standard uncertainties off; those left out are not."""
        moved = self.value
        for source, width in self.by.items():
            if source in scores:
                moved = moved + width * scores[source]
        return moved

    def columns(self, name: str) -> dict[str, Any]:
        """The value and its widths as named columns, for ``among``."""
        return {name: self.value} | {f"{name} by {source}": w for source, w in self.by.items()}

    def among(self, columns: Mapping[str, Array], name: str) -> Any:
        """The same quantity of other rows, or against draws: its columns, and those of scores."""
        parts = {source: columns[f"{name} by {source}"] for source in self.by}
        return Moving(columns[name], parts).at(columns)


def moving(value: Any, **by: Any) -> Moving:
    """Without the sources whose width is 0 whatever the rows hold."""
    return Moving(value, {name: w for name, w in by.items() if np.ndim(w) > 0 or w != 0.0})


def moving_permittivity(found: Permittivity) -> Moving:
    """A permittivity: its own noise, what its probe shares, and the loss it was corrected for."""
    by = {APPARENT: found.per_reading, found.shared_by: found.shared}
    if found.from_loss is not None:
        by[BULK] = found.from_loss
    return moving(found.value, **by)
