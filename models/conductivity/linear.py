"""The ratio form: conductivity rises by the same step per degree, as a share of that at 25 Cel."""

import numpy as np
from numpy.typing import ArrayLike

from models.conductivity.family import REFERENCE_TEMPERATURE, TemperatureCompensation
from models.relation import Array, Citation, Parameter, Range, column, ranges

COEFFICIENT = 0.0191  # 1/K


@np.errstate(all="ignore")
def factor(temperature: ArrayLike, /, *, coefficient: ArrayLike = COEFFICIENT) -> Array:
    """Factor to 25 Cel; NaN where the straight line has come down to no conductivity.

    temperature: elementwise, Cel.
    coefficient: elementwise, 1/K.
    """
    rise = 1 + column(coefficient) * (column(temperature) - REFERENCE_TEMPERATURE)
    return np.where(rise > 0, 1 / rise, np.nan)


LINEAR = TemperatureCompensation(
    key="linear",
    title="Ratio form, a fixed share per degree",
    equation="factor = 1 / (1 + coefficient (T - 25))",
    factor=factor,
    parameters=(
        Parameter(
            name="coefficient",
            meaning="rise of conductivity per degree, as a share of that at 25 Cel, 1/K",
            range=Range(0.0, 0.04),
            default=COEFFICIENT,
            default_u=0.0005,
        ),
    ),
    validity=ranges(temperature=(3.0, 47.0)),
    source=Citation(
        authors="Hayashi, M.",
        year=2004,
        title="Temperature-electrical conductivity relation of water for environmental "
        "monitoring and geophysical data inversion",
        where="Environmental Monitoring and Assessment 96, 119-128",
        doi="10.1023/B:EMAS.0000031719.83065.68",
        note="0.019 read in the abstract, the fourth digit and 0.020 in secondary copies; range "
        "after Ma, McBratney, Whelan, Minasny and Short (2011), abstract",
    ),
)
