"""Malicki, Plagge and Roth (1996): a line in the refractive index that knows the bulk density."""

import numpy as np
from numpy.typing import ArrayLike

from models.mixing.empirical.practice import TDR_FREQUENCY, UNFROZEN
from models.mixing.family import Discrepancy, MixingModel
from models.numerics.power import root, square
from models.quantity import QUANTITIES
from models.relation import Array, Citation, Parameter, column, ranges

G_PER_CM3 = 1e-3  # the paper's unit of density, from kg/m3


@np.errstate(all="ignore")
def to_water_content(permittivity: ArrayLike, /, *, bulk_density: ArrayLike) -> Array:
    """Water content of a mineral or organic soil.

    permittivity: elementwise, apparent; NaN below 0.
    bulk_density: kg/m3, scalar or one per row.
    """
    dry, wetting = _line(bulk_density)
    return (root(permittivity) - dry) / wetting


@np.errstate(all="ignore")
def to_permittivity(water_content: ArrayLike, /, *, bulk_density: ArrayLike) -> Array:
    """Apparent permittivity of the same soil.

    water_content: elementwise, m3/m3; NaN so far below 0 that the index would be negative.
    bulk_density: kg/m3, scalar or one per row.
    """
    dry, wetting = _line(bulk_density)
    return square(dry + wetting * column(water_content))


def _line(bulk_density: ArrayLike) -> tuple[Array, Array]:
    """Refractive index of the dry soil, and its rise per unit of water content."""
    rho = G_PER_CM3 * column(bulk_density)
    # some copies print 0.809, or 0.168 with the square
    return 0.819 + 0.168 * rho + 0.159 * rho**2, 7.17 + 1.18 * rho


MALICKI_1996 = MixingModel(
    key="malicki-1996",
    title="Line in the refractive index, with bulk density",
    equation="theta = (sqrt(Ka) - 0.819 - 0.168 rho_b - 0.159 rho_b^2) / (7.17 + 1.18 rho_b), "
    "rho_b in g/cm3",
    to_water_content=to_water_content,
    to_permittivity=to_permittivity,
    permittivity="apparent",
    soils="any",
    parameters=(
        Parameter(
            name="bulk_density",
            meaning=QUANTITIES["bulk_density"].meaning,
            range=QUANTITIES["bulk_density"].gate_si,
        ),
    ),
    published_error=0.03,
    discrepancy=Discrepancy(
        standard_uncertainty=0.025,
        reason="about 0.03 m3/m3 over all its soils, part of which a known bulk density explains",
    ),
    validity=ranges(
        apparent_permittivity=(1.5, 60.0),  # from memory
        water_content=(0.0, 0.9),
        frequency=TDR_FREQUENCY,
        temperature=UNFROZEN,
        bulk_density=(130.0, 2670.0),
    ),
    source=Citation(
        authors="Malicki, M. A.; Plagge, R.; Roth, C. H.",
        year=1996,
        title="Improving the calibration of dielectric TDR soil moisture determination taking "
        "into account the solid soil",
        where="European Journal of Soil Science 47(3), 357-366",
        doi="10.1111/j.1365-2389.1996.tb01409.x",
        note="coefficients from four agreeing secondary copies; the published error and the range "
        "of density from memory",
    ),
)
