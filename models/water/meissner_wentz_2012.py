"""Meissner and Wentz (2004, 2012): pure and sea water as two Debye relaxations."""

import numpy as np
from numpy.polynomial.polynomial import polyval
from numpy.typing import ArrayLike

from models.conductivity import practical_salinity_1978
from models.conductivity.loss import conduction_loss
from models.relation import Citation, column, ranges
from models.water import stogryn_1995
from models.water.blocks import in_blocks
from models.water.family import Parts, WaterModel
from models.water.relaxation import relaxation, with_conduction

COLD = (2.3232e-3, -7.9208e-5, 3.6764e-6, -3.5594e-7, 8.9795e-9)
"""Salt in the first relaxation frequency up to 30 Cel, rising powers of Cel."""


@in_blocks
def parts(frequency: ArrayLike, temperature: ArrayLike, conductivity_25: ArrayLike = 0.0) -> Parts:
    """Real part and loss of pore water, taken as diluted sea water.

    frequency: elementwise, Hz, up to 90e9. temperature: elementwise, Cel, -25 to 40.
    conductivity_25: elementwise, S/m at 25 Cel, up to 6.

    Salinity from conductivity by the practical salinity scale 1978, explicit at 25 Cel;
    conduction from the conductivity itself.
    """
    salinity = practical_salinity_1978.salinity(conductivity_25)
    relaxed = relaxations(frequency, temperature, salinity)
    return with_conduction(relaxed, frequency, temperature, conductivity_25)


def sea_water_parts(frequency: ArrayLike, temperature: ArrayLike, salinity: ArrayLike) -> Parts:
    """Real part and loss of sea water, with the conductivity of Stogryn et al. (1995).

    frequency: elementwise, Hz. temperature: elementwise, Cel, -2 to 34.
    salinity: elementwise, g/kg, up to 40.
    """
    real, loss = relaxations(frequency, temperature, salinity)
    conductivity = stogryn_1995.conductivity(salinity, temperature)
    return real, loss + conduction_loss(conductivity, frequency)


@np.errstate(all="ignore")
def relaxations(frequency: ArrayLike, temperature: ArrayLike, salinity: ArrayLike) -> Parts:
    """Real part and loss without conduction.

    frequency: elementwise, Hz. temperature: elementwise, Cel. salinity: elementwise, g/kg.

    The paper of 2012 misprints a sign in the branch above 30 Cel; both branches meet there only
    with the one used here.
    """
    f, t, s = column(frequency) / 1e9, column(temperature), column(salinity)
    e0 = stogryn_1995.static_permittivity(t) * np.exp(s * (-3.3330e-3 + 4.74868e-6 * s))
    e1 = polyval(t, (5.7230, 2.2379e-2, -7.1237e-4)) * np.exp(
        s * (-6.28908e-3 + 1.76032e-4 * s - 9.22144e-5 * t)
    )
    e2 = (3.6143 + 2.8841e-2 * t) * (1 + s * (-2.04265e-3 + 1.57883e-4 * t))
    warm = 9.1873715e-4 + 1.5012396e-4 * (t - 30)
    n1 = (45 + t) / polyval(t, (5.0478, -7.0315e-2, 6.0059e-4))
    n1 = n1 * (1 + s * np.where(t > 30, warm, polyval(t, COLD)))
    n2 = (45 + t) / polyval(t, (0.13652, 1.4825e-3, 2.4166e-4))
    n2 = n2 * (1 + s * (-1.99723e-2 + 0.5 * 1.81176e-4 * (t + 30)))
    first, second = relaxation(e0 - e1, f / n1), relaxation(e1 - e2, f / n2)
    return e2 + first[0] + second[0], first[1] + second[1]


MEISSNER_WENTZ_2012 = WaterModel(
    key="meissner-wentz-2012",
    title="Diluted sea water, two Debye relaxations",
    equation="eps = e2 + (e0 - e1) / (1 + j f / n1) + (e1 - e2) / (1 + j f / n2) "
    "- j sigma_w(T) / (2 pi f eps_0); e0, e1, e2, n1, n2 polynomials of temperature and of the "
    "salinity that conducts like sigma_w (practical salinity scale 1978)",
    parts=parts,
    static=stogryn_1995.static_permittivity,
    static_uncertainty=0.05,
    static_departure=0.036,
    relaxation_time_uncertainty=0.015,
    infinite_uncertainty=0.5,
    salt_effect_uncertainty=0.25,
    validity=ranges(temperature=(-25.0, 40.0), frequency=(1e6, 90e9)),
    saline_validity=ranges(temperature=(-2.0, 34.0), pore_water_conductivity=(0.0, 5.97)),
    source=Citation(
        authors="Meissner, T.; Wentz, F. J.",
        year=2012,
        title="The emissivity of the ocean surface between 6 and 90 GHz over a large range of "
        "wind speeds and Earth incidence angles",
        where="IEEE Transactions on Geoscience and Remote Sensing 50(8), 3004-3026; pure water: "
        "the same journal 42(9), 1836-1849 (2004)",
        equation="appendix of 2012 on the equations of 2004",
        doi="10.1109/TGRS.2011.2179662",
        note="coefficients read in four independent copies; upper frequency from memory; "
        "uncertainties taken to be those of Kaatze (1989), from which it differs less",
    ),
)
