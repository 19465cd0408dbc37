"""Mironov, Dobson, Kaupp, Komarov and Kleshchenko (2004): complex refractive indices add up.

sqrt(eps) = (1 - phi) sqrt(eps_s) + theta sqrt(eps_w) + (phi - theta), with eps = eps' - j eps''
all along. Here the apparent permittivity and the loss of the soil are given;
``models.mixing.joint`` starts from a complex permittivity and finds the conductivity of the pore
water as well.
"""

import numpy as np
from numpy.typing import ArrayLike

from models.mixing.family import Discrepancy, MixingModel
from models.mixing.joint import INDEX, WIDER, from_index, one_answer
from models.mixing.phases import (
    FREQUENCY,
    LIQUID,
    POROSITY,
    SOLID_PERMITTIVITY,
    WATER_PERMITTIVITY,
)
from models.mixing.physical import crim
from models.numerics.inverse import increasing_inverse
from models.relation import Array, Citation, ComplexArray, Parameter, Range, column, ranges


@np.errstate(all="ignore")
def to_water_content(
    permittivity: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    water_loss: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
    solid_loss: ArrayLike,
    loss: ArrayLike | None = None,
) -> Array:
    """Water content of a soil of known porosity, elementwise, m3/m3.

    permittivity: elementwise, apparent. loss: elementwise, eps'' of the soil, all of it.
    water_permittivity: eps' of the water; water_loss: its eps'' without conduction.

    With the loss, the conductivity of the pore water is solved for along the way and does no harm;
    NaN as in ``models.mixing.joint``. Without it, the water is taken to lose no more
    than ``water_loss``.
    """
    ka, solid = column(permittivity), _index(solid_permittivity, solid_loss)
    if loss is None:
        water = _index(water_permittivity, water_loss)
        return crim.to_water_content(
            ka, water_permittivity=water.real**2, porosity=porosity,
            solid_permittivity=solid.real**2,
        )  # fmt: skip
    dry, index = _dry(solid, porosity), np.sqrt(ka)
    excess = index - 1j * column(loss) / (2 * index) - dry
    return from_index(np.where(2 * ka > column(loss), excess, np.nan), column(water_permittivity))


@np.errstate(all="ignore")
def to_permittivity(
    water_content: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    water_loss: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
    solid_loss: ArrayLike,
    loss: ArrayLike | None = None,
) -> Array:
    """Apparent permittivity of a wet soil, elementwise; arguments as in ``to_water_content``.

    With the loss, this is the soil whose pore water conducts just enough to lose that much in
    all; NaN where ``to_water_content`` would not find the way back. To start from a conductivity
    instead, see ``models.mixing.joint``.
    """
    theta, solid = column(water_content), _index(solid_permittivity, solid_loss)
    if loss is None:
        water = _index(water_permittivity, water_loss)
        return crim.to_permittivity(
            theta, water_permittivity=water.real**2, porosity=porosity,
            solid_permittivity=solid.real**2,
        )  # fmt: skip
    dry = _dry(solid, porosity)
    shift, half_loss = dry.real - theta, column(loss) / 2
    known = column(water_permittivity) * theta**2

    def surplus(index: Array) -> Array:
        """Index minus what the water's real part asks for: (n - shift)^2 - k^2 = known."""
        return index - shift - np.hypot(np.sqrt(known), half_loss / index + dry.imag)

    least = shift + np.sqrt(known)
    most = shift + np.hypot(np.sqrt(known), half_loss / least - dry.imag)
    index = increasing_inverse(surplus, 0.0, least * (1 - WIDER), most * (1 + WIDER))
    excess = index - 1j * half_loss / index - dry
    known_way_back = (theta > 0) & one_answer(excess, INDEX) & (index > half_loss / index)
    return np.where(known_way_back, index**2, np.nan)


def _index(real: ArrayLike, loss: ArrayLike) -> ComplexArray:
    return np.sqrt(column(real) - 1j * column(loss))


def _dry(solid: ComplexArray, porosity: ArrayLike) -> ComplexArray:
    """Index of the soil with its pores full of air."""
    return solid - column(porosity) * (solid - 1)


@np.errstate(all="ignore")
def relaxation_loss(
    water_content: ArrayLike,
    /,
    *,
    water_permittivity: ArrayLike,
    water_loss: ArrayLike,
    porosity: ArrayLike,
    solid_permittivity: ArrayLike,
    solid_loss: ArrayLike,
) -> Array:
    """Loss eps'' of the soil without conduction, elementwise; arguments as in ``to_permittivity``.

    What has to be added to the loss that a direct-current conductivity makes.
    """
    theta, solid = column(water_content), _index(solid_permittivity, solid_loss)
    index = _dry(solid, porosity) + theta * (_index(water_permittivity, water_loss) - 1)
    return np.asarray(-(index * index).imag)


COMPLEX_REFRACTIVE = MixingModel(
    key="complex-refractive",
    title="Complex refractive indices, with loss",
    equation="sqrt(eps) = (1 - phi) sqrt(eps_s) + theta sqrt(eps_w) + (phi - theta), complex; "
    "sqrt(eps) = sqrt(Ka) - j eps'' / (2 sqrt(Ka)); Re eps_w known, Im eps_w solved for",
    source=Citation(
        authors="Mironov, V. L.; Dobson, M. C.; Kaupp, V. H.; Komarov, S. A.; Kleshchenko, V. N.",
        year=2004,
        title="Generalized refractive mixing dielectric model for moist soils",
        where="IEEE Transactions on Geoscience and Remote Sensing 42(4), 773-785",
        doi="10.1109/TGRS.2003.823288",
        note="the mixing equation; the closed inverse for water content and pore-water "
        "conductivity is derived here; citation from memory",
    ),
    to_permittivity=to_permittivity,
    to_water_content=to_water_content,
    permittivity="apparent",
    water="kaatze-1989",
    parameters=(
        POROSITY,
        SOLID_PERMITTIVITY,
        Parameter(name="solid_loss", meaning="eps'' of the solids", range=Range(0.0, 5.0),
                  default=0.0),
        WATER_PERMITTIVITY,
        Parameter(name="water_loss", meaning="eps'' of the pore water without conduction",
                  range=Range(0.0, 100.0), supplied=True),
        Parameter(name="loss", meaning="eps'' of the soil, conduction included",
                  range=Range(0.0, 20000.0), supplied=True, optional=True),
    ),
    validity=ranges(water_content=(0.02, 0.6), frequency=FREQUENCY, temperature=LIQUID),
    discrepancy=Discrepancy(
        standard_uncertainty=0.017,
        wet_uncertainty=0.027,
        reason="0.012 once porosity and solid permittivity are propagated, and an exponent that is "
        "0.50 to about 0.04",
    ),
)  # fmt: skip
