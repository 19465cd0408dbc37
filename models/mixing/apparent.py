"""Apparent permittivity: what a travel time sees of a lossy medium, and the way back.

Everything here is exact: Ka = (Re sqrt(eps))^2 with eps = eps' - j eps'', no approximation for
small loss. The loss is the whole of it, conduction included, at the frequency of the measurement.
"""

import numpy as np
from numpy.typing import ArrayLike

from models.conductivity.loss import conduction_loss
from models.relation import Array, column

__all__ = ["apparent", "conduction_loss", "effective_frequency", "to_apparent", "to_real"]


@np.errstate(all="ignore")
def to_apparent(real: ArrayLike, loss: ArrayLike) -> Array:
    """Apparent permittivity Ka of a medium with loss.

    real, loss: elementwise, eps' and eps''.

    Exact: Ka = (sqrt(eps'^2 + eps''^2) + eps') / 2.
    """
    e1, e2 = column(real), column(loss)
    return (np.sqrt(e1 * e1 + e2 * e2) + e1) / 2


apparent = to_apparent
"""The same, as a noun: the property of a medium rather than a step of a conversion."""


@np.errstate(all="ignore")
def to_real(apparent: ArrayLike, loss: ArrayLike) -> Array:
    """Real part eps' of a medium whose apparent permittivity and loss are known.

    apparent, loss: elementwise, Ka and eps''.
    NaN where Ka < eps'' / 2: the loss alone would give more, so that no eps' >= 0 is left.

    Exact: eps' = Ka - eps''^2 / (4 Ka), the inverse of ``to_apparent``.
    """
    ka, e2 = column(apparent), column(loss)
    return np.where((ka > 0) & (2 * ka >= np.abs(e2)), ka - e2 * e2 / (4 * ka), np.nan)


@np.errstate(all="ignore")
def effective_frequency(rise_time: ArrayLike) -> Array:
    """Frequency that stands for a step which rises from 10 to 90 % in that time, Hz.

    rise_time: elementwise, s; NaN unless above 0.

    Exact for a step through a single pole: f = ln 9 / (2 pi t_r) = 0.3497 / t_r.
    """
    t = column(rise_time)
    return np.where(t > 0, np.log(9.0) / (2 * np.pi * t), np.nan)
