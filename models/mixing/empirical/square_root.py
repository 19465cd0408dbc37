"""Herkelrath, Hamburg and Murphy (1991): a site's own line in the square root of permittivity."""

import numpy as np
from numpy.typing import ArrayLike

from models.mixing.empirical.practice import UNFROZEN
from models.mixing.family import Discrepancy, MixingModel
from models.numerics.power import root, square
from models.relation import Array, Citation, Parameter, Range, column, ranges


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike, /, *, slope: ArrayLike, intercept: ArrayLike
) -> Array:
    """Water content, linear in the refractive index.

    permittivity: elementwise, apparent; NaN below 0.
    slope, intercept: m3/m3, scalar or one per row.
    """
    return column(slope) * root(permittivity) + column(intercept)


@np.errstate(all="ignore")
def to_permittivity(
    water_content: ArrayLike, /, *, slope: ArrayLike, intercept: ArrayLike
) -> Array:
    """Apparent permittivity of the same soil.

    water_content: elementwise, m3/m3; NaN below ``intercept``, where the index would be negative.
    slope, intercept: m3/m3, scalar or one per row.
    """
    return square((column(water_content) - column(intercept)) / column(slope))


SQUARE_ROOT = MixingModel(
    key="square-root",
    title="The caller's own line in the refractive index",
    equation="theta = slope sqrt(Ka) + intercept",
    to_water_content=to_water_content,
    to_permittivity=to_permittivity,
    permittivity="apparent",
    fitted_by_caller=True,
    parameters=(
        Parameter(
            name="slope",
            meaning="water content per unit of sqrt(Ka), about 0.11",
            range=Range(0.01, 1.0),
        ),
        Parameter(
            name="intercept",
            meaning="water content where sqrt(Ka) is 0, about -0.18",
            range=Range(-2.0, 1.0),
        ),
    ),
    discrepancy=Discrepancy(
        standard_uncertainty=0.01,
        reason="the least a calibration leaves; name the standard error of yours where it is more",
    ),
    validity=ranges(
        apparent_permittivity=(1.0, 81.0),
        water_content=(0.0, 1.0),
        temperature=UNFROZEN,
    ),
    source=Citation(
        authors="Herkelrath, W. N.; Hamburg, S. P.; Murphy, F.",
        year=1991,
        title="Automatic, real-time monitoring of soil moisture in a remote field area with time "
        "domain reflectometry",
        where="Water Resources Research 27(5), 857-864",
        note="the form, from memory; it has no coefficients of its own, each site fits them",
    ),
)
