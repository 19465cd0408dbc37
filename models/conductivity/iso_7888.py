"""ISO 7888 (1985): a printed table for natural waters."""

import numpy as np
from numpy.typing import ArrayLike

from models.conductivity.family import TemperatureCompensation
from models.relation import Array, Citation, column, ranges

FACTORS = (
    1.918, 1.857, 1.800, 1.745, 1.693, 1.643, 1.596, 1.551, 1.508, 1.467, 1.428, 1.390,
    1.354, 1.320, 1.287, 1.256, 1.225, 1.196, 1.168, 1.141, 1.116, 1.091, 1.067, 1.044,
    1.021, 1.000, 0.979, 0.959, 0.940, 0.921, 0.903, 0.886, 0.869, 0.853, 0.837, 0.822,
)  # fmt: skip
"""To 25 Cel, at 0, 1, ... 35 Cel."""
END = 35.9  # Cel, where the table ends

_LOG = np.log(FACTORS)
_LOG_AT = np.append(_LOG, _LOG[-1] + (END - 35.0) * (_LOG[-1] - _LOG[-2]))
_TEMPERATURE = np.append(np.arange(36.0), END)


@np.errstate(all="ignore")
def factor(temperature: ArrayLike, /) -> Array:
    """Factor to 25 Cel; NaN outside 0 to 35.9 Cel.

    temperature: elementwise, Cel.

    Straight in the logarithm between whole degrees, which misses the curve by less than half a
    unit in the last printed digit; the slope from 34 to 35 Cel is kept up to 35.9.
    """
    t = column(temperature)
    return np.exp(np.interp(t, _TEMPERATURE, _LOG_AT, left=np.nan, right=np.nan))


ISO_7888 = TemperatureCompensation(
    key="iso-7888",
    title="Table for natural waters",
    equation="factor from the table, 1.918 at 0 Cel, 1.000 at 25 Cel, 0.822 at 35 Cel; "
    "its logarithm is straight between whole degrees",
    factor=factor,
    validity=ranges(temperature=(0.0, END), pore_water_conductivity=(0.006, 0.1)),
    source=Citation(
        authors="ISO",
        year=1985,
        title="Water quality - Determination of electrical conductivity",
        where="ISO 7888:1985; the same as EN 27888",
        equation="table of f25 for natural waters",
        note="whole degrees read in a secondary copy; made for dilute bicarbonate waters, "
        "1.9 % above soil solutions at 5 Cel",
    ),
)
