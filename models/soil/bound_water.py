"""Water held by the surface of the solids: one layer of it, or what relaxes too slowly.

Or and Wraith (1999): water counts as bound where its relaxation is slower than the measurement.
"""

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, Citation, column

SOURCE = Citation(
    authors="Or, D.; Wraith, J. M.",
    year=1999,
    title="Temperature effects on soil bulk dielectric permittivity measured by time domain "
    "reflectometry: a physical model",
    where="Water Resources Research 35(2), 371-383",
    note="activation constant from memory; the ratio form needs no molecular radius",
)
WATER_DENSITY = 1000.0
MONOLAYER = 3e-10  # m, one layer of water molecules
ACTIVATION = 1621.0  # angstrom kelvin, from memory
RELATIVE_UNCERTAINTY = 0.5
"""One to three layers are named in the literature."""


def monolayer_content(bulk_density: ArrayLike, specific_surface: ArrayLike) -> Array:
    """Bound water content of one molecular layer, m3/m3.

    bulk_density: kg/m3. specific_surface: m2/kg.
    """
    return MONOLAYER * column(bulk_density) * column(specific_surface)


def slow_layer(
    frequency: ArrayLike, temperature: ArrayLike, relaxation_frequency: ArrayLike
) -> Array:
    """Thickness of the layer that relaxes more slowly than ``frequency``, m.

    frequency: Hz. temperature: Cel. relaxation_frequency: of free water at that temperature, Hz.
    NaN where the frequency is not below the relaxation of free water.

    x = a / (T ln(f_w / f)): the viscosity profile exp(a / (x T)) against free water, so that no
    molecular radius or absolute viscosity is needed.
    """
    ratio = column(relaxation_frequency) / column(frequency)
    with np.errstate(invalid="ignore", divide="ignore"):
        thickness = 1e-10 * ACTIVATION / ((column(temperature) + 273.15) * np.log(ratio))
    return np.where(ratio > 1.0, thickness, np.nan)
