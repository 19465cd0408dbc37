"""Mandel and Paule (1970): scatter beyond stated uncertainties, as much as chi-square asks for.

It is the soil's own, of water content about its curve, and the same for every pair. Taking it for
a common factor of all uncertainties instead would lay it on the permittivities too, and turn the
curve away from the pairs. The rule is cited from memory.
"""

from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq

from models.calibration.forms import Form
from models.calibration.pairs import Pairs
from models.calibration.regression import Fit, fit

CLOSE = 1e-6
"""Of the variance of the water contents, to which that of the scatter is found."""
CLOSELY = 1e-3
"""Of itself, where that is more."""


@dataclass(frozen=True, slots=True, eq=False)
class Settled:
    """A curve, and the scatter of the soil about it."""

    fit: Fit
    variance: float
    """Of the soil's scatter, (m3/m3)^2; 0 where stated uncertainties explain the pairs, or where
    none were stated."""
    chi_square: float
    """With the stated uncertainties alone."""


def settle(form: Form, pairs: Pairs) -> Settled:
    """The curve whose chi-square is at most its degrees of freedom."""
    degrees = pairs.count - form.size

    def of(variance: float) -> Fit:
        water_content_u = np.hypot(pairs.water_content_u, np.sqrt(variance))
        return fit(form, pairs.permittivity, pairs.water_content, pairs.permittivity_u,
                   water_content_u)  # fmt: skip

    def excess(variance: float) -> float:
        return float(of(variance).chi_square) - degrees

    alone = of(0.0)
    stated = float(alone.chi_square)
    if not pairs.stated or not stated > degrees:
        return Settled(alone, 0.0, stated)
    most = float(np.var(pairs.water_content)) * pairs.count
    if not excess(most) < 0.0:
        return Settled(alone, 0.0, stated)
    variance = float(brentq(excess, 0.0, most, xtol=CLOSE * most / pairs.count, rtol=CLOSELY))
    return Settled(of(variance), variance, stated)
