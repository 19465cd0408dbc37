"""Peyman, Gabriel and Grant (2007): what sodium chloride does to the relaxation of water."""

import numpy as np
from numpy.typing import ArrayLike

from models.conductivity.loss import conduction_loss
from models.conductivity.sodium_chloride import concentration as sodium_chloride
from models.relation import Array, Citation, column, ranges
from models.water import kaatze_1989
from models.water.blocks import in_blocks
from models.water.family import Parts, WaterModel
from models.water.relaxation import Debye, is_pure, with_conduction


@np.errstate(all="ignore")
def static_factor(temperature: ArrayLike, concentration: ArrayLike) -> Array:
    """Static permittivity of the solution over that of pure water.

    temperature: elementwise, Cel, 5 to 35. concentration: elementwise, mol/L of NaCl, up to 1.
    """
    t, c = column(temperature), column(concentration)
    return 1 - (0.178 + 3.742e-4 * t) * c + 0.034 * c * c


@np.errstate(all="ignore")
def time_factor(temperature: ArrayLike, concentration: ArrayLike) -> Array:
    """Relaxation time of the solution over that of pure water.

    temperature: elementwise, Cel, 5 to 35. concentration: elementwise, mol/L of NaCl, up to 1.
    """
    t, c = column(temperature), column(concentration)
    return 1 - (0.010 + 5.282e-3 * t) * c + 0.032 * c * c


@in_blocks
def parts(frequency: ArrayLike, temperature: ArrayLike, conductivity_25: ArrayLike = 0.0) -> Parts:
    """Real part and loss of pore water.

    frequency: elementwise, Hz, up to 20e9. temperature: elementwise, Cel, -4.1 to 60.
    conductivity_25: elementwise, S/m at 25 Cel; NaN above 9.95, where the salt is not known.

    Of the paper only what salt changes is taken, so that pure water is exactly Kaatze (1989):
    its full equation is off by 0.07 % in eps_s there. Conduction is the known one, not the
    paper's, which is 17 % low in dilute water.
    """
    if is_pure(conductivity_25):
        return kaatze_1989.parts(frequency, temperature)
    pure = kaatze_1989.debye(temperature)
    salt = sodium_chloride(conductivity_25)
    solution = Debye(
        static=pure.static * static_factor(temperature, salt),
        infinite=pure.infinite,
        relaxation_time=pure.relaxation_time * time_factor(temperature, salt),
    )
    return with_conduction(solution.parts(frequency), frequency, temperature, conductivity_25)


@np.errstate(all="ignore")
def solution_parts(frequency: ArrayLike, temperature: ArrayLike, concentration: ArrayLike) -> Parts:
    """Real part and loss of a sodium chloride solution, by the paper's full equation.

    frequency: elementwise, Hz, 0.13e9 to 20e9. temperature: elementwise, Cel, 5 to 35.
    concentration: elementwise, mol/L, up to 1.

    One Cole-Cole relaxation and the paper's own conductivity.
    """
    t, c = column(temperature), column(concentration)
    pure = kaatze_1989.debye(t)
    static = pure.static * (static_factor(t, c) + 1.515e-4 * t - 4.929e-6 * t * t)
    time = pure.relaxation_time * (time_factor(t, c) + 0.012 - 1.724e-3 * t + 3.766e-5 * t * t)
    spread = c * (9e-2 - 5.1e-2 * c - 6.348e-4 * t)
    conductivity = c * (5.923 - 1.582 * c + 0.174 * t)
    ratio = 2j * np.pi * column(frequency) * time
    relaxed = pure.infinite + (static - pure.infinite) / (1 + ratio ** (1 - spread))
    return relaxed.real, conduction_loss(conductivity, frequency) - relaxed.imag


PEYMAN_2007 = WaterModel(
    key="peyman-2007",
    title="Pore water: Kaatze (1989), and what salt changes in it",
    equation="eps = eps_inf + (A eps_s - eps_inf) / (1 + j 2 pi f B tau) "
    "- j sigma_w(T) / (2 pi f eps_0), eps_s, eps_inf and tau of kaatze-1989, "
    "A = 1 - (0.178 + 3.742e-4 T) C + 0.034 C^2, B = 1 - (0.010 + 5.282e-3 T) C + 0.032 C^2, "
    "C the sodium chloride, mol/L, that conducts like sigma_w",
    parts=parts,
    static=kaatze_1989.static_permittivity,
    static_uncertainty=kaatze_1989.KAATZE_1989.static_uncertainty,
    static_departure=kaatze_1989.KAATZE_1989.static_departure,
    relaxation_time_uncertainty=kaatze_1989.KAATZE_1989.relaxation_time_uncertainty,
    infinite_uncertainty=kaatze_1989.KAATZE_1989.infinite_uncertainty,
    salt_effect_uncertainty=0.25,
    validity=ranges(temperature=(-4.1, 60.0), frequency=(1e6, 20e9)),
    saline_validity=ranges(temperature=(5.0, 35.0), pore_water_conductivity=(0.0, 8.57)),
    source=Citation(
        authors="Peyman, A.; Gabriel, C.; Grant, E. H.",
        year=2007,
        title="Complex permittivity of sodium chloride solutions at microwave frequencies",
        where="Bioelectromagnetics 28(4), 264-274",
        equation="fitted expressions for the Cole-Cole parameters",
        doi="10.1002/bem.20271",
        note="coefficients read in three independent copies; measured from 0.13 to 20 GHz, 5 to "
        "35 Cel, 0 to 1 mol/L; taken as increments on Kaatze (1989), whose range is the model's",
    ),
)
