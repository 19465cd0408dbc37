"""Leave-one-out: what the curve of all other pairs, or levels, says of those left out."""

from dataclasses import dataclass

import numpy as np

from models.calibration.forms import Form
from models.calibration.pairs import Pairs
from models.calibration.regression import fit
from models.relation import Array


@dataclass(frozen=True, slots=True, eq=False)
class LeftOut:
    """Errors of prediction, measured water content less the curve without it."""

    errors: Array
    """Shape (n,), m3/m3; NaN where the rest tells no curve."""

    @property
    def error(self) -> float:
        """Root of the mean square, m3/m3."""
        return float(np.sqrt(np.mean(np.square(self.errors))))

    @property
    def bias(self) -> float:
        """Mean, m3/m3."""
        return float(np.mean(self.errors))


def leave_out(form: Form, pairs: Pairs, variance: float = 0.0) -> LeftOut:
    """Leave out each pair, with all its replicates where levels are told, and predict it.

    variance: of the soil's scatter, beside stated uncertainties, (m3/m3)^2.

    For ordinary least squares, pair by pair, this is e / (1 - h).
    """
    level = np.arange(pairs.count) if pairs.level is None else pairs.level
    _, level = np.unique(level, return_inverse=True)
    out = level[None, :] == np.arange(level.max() + 1)[:, None]
    found = fit(
        form,
        pairs.permittivity,
        pairs.water_content,
        pairs.permittivity_u,
        np.hypot(pairs.water_content_u, np.sqrt(variance)),
        (~out).astype(np.float64),
    )
    predicted = found.value(pairs.permittivity)
    return LeftOut(pairs.water_content - np.take_along_axis(predicted, level[None, :], axis=0)[0])
