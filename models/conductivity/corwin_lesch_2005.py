"""Corwin and Lesch (2005): one exponential for soil water, after Sheets and Hendrickx (1995)."""

import numpy as np
from numpy.typing import ArrayLike

from models.conductivity.family import REFERENCE_TEMPERATURE, TemperatureCompensation
from models.relation import Array, Citation, column, ranges

OFFSET, AMPLITUDE, DECAY = 0.4470, 1.4034, 26.815  # 1, 1, Cel


@np.errstate(all="ignore")
def printed_factor(temperature: ArrayLike) -> Array:
    """Factor to 25 Cel as printed; 0.99944 and not 1 at 25 Cel.

    temperature: elementwise, Cel, 3 to 47.
    """
    return OFFSET + AMPLITUDE * np.exp(column(temperature) / -DECAY)


AT_REFERENCE = float(printed_factor(REFERENCE_TEMPERATURE))


def factor(temperature: ArrayLike, /) -> Array:
    """Factor to 25 Cel, divided by its value at 25 Cel, so that it is 1 there.

    temperature: elementwise, Cel, 3 to 47.

    Within 0.3 % of the table for soil solutions in USDA Handbook 60 (1954), 5 to 40 Cel. For
    KCl standards it is 2.2 % too high at 5 Cel, for sea water 1.6 %: it is about soil water.
    """
    return printed_factor(temperature) / AT_REFERENCE


CORWIN_LESCH_2005 = TemperatureCompensation(
    key="corwin-lesch-2005",
    title="Exponential for soil water, 1 at 25 Cel",
    equation="factor = (0.4470 + 1.4034 exp(-T / 26.815)) / 0.999437",
    factor=factor,
    validity=ranges(temperature=(3.0, 47.0)),
    source=Citation(
        authors="Corwin, D. L.; Lesch, S. M.",
        year=2005,
        title="Apparent soil electrical conductivity measurements in agriculture",
        where="Computers and Electronics in Agriculture 46(1-3), 11-43",
        equation="correction of the equation of Sheets and Hendrickx (1995)",
        doi="10.1016/j.compag.2004.10.005",
        note="coefficients read in five independent copies; the division by the value at 25 Cel "
        "is ours; range after Ma, McBratney, Whelan, Minasny and Short (2011), abstract",
    ),
)
