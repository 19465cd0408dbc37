"""Curtis (2001): one cubic in the real permittivity, for sensors near 100 MHz."""

from numpy.typing import ArrayLike

from models.mixing.empirical.practice import UNFROZEN
from models.mixing.family import Discrepancy, MixingModel
from models.numerics.cubic import IncreasingCubic
from models.relation import Array, Citation, ranges

CURVE = IncreasingCubic(-2.86e-2, 2.435e-2, -3.421e-4, 2.37e-6)


def to_water_content(permittivity: ArrayLike, /) -> Array:
    """Water content of a soil.

    permittivity: elementwise, real part, at about 100 MHz.
    """
    return CURVE(permittivity)


def to_permittivity(water_content: ArrayLike, /) -> Array:
    """Real permittivity of a soil at about 100 MHz.

    water_content: elementwise, m3/m3.
    """
    return CURVE.inverse(water_content)


CURTIS_2001 = MixingModel(
    key="curtis-2001",
    title="Empirical cubic in the real permittivity at 100 MHz",
    equation="theta = " + CURVE.written("eps'"),
    to_water_content=to_water_content,
    to_permittivity=to_permittivity,
    permittivity="real",
    soils="mineral",
    published_error=0.03,
    discrepancy=Discrepancy(
        standard_uncertainty=0.03,
        reason="0.02 to 0.03 m3/m3 over many soils; the upper end, as coefficients are unconfirmed",
    ),
    validity=ranges(
        real_permittivity=(2.0, 40.0),  # from memory
        water_content=(0.0, 0.55),
        frequency=(50e6, 200e6),  # half to double the frequency of the fit
        temperature=UNFROZEN,
    ),
    source=Citation(
        authors="Curtis, J. O.",
        year=2001,
        title="Moisture effects on the dielectric properties of soils",
        where="IEEE Transactions on Geoscience and Remote Sensing 39(1), 125-128",
        note="coefficients and published error, 0.02 to 0.03, from memory",
    ),
)
