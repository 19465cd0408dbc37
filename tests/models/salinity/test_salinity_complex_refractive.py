"""Pore water from the loss of a soil: the joint inversion, continued with a known water content."""

import numpy as np
from numpy.testing import assert_allclose, assert_array_less

from models.conductivity.loss import conduction_loss
from models.mixing.joint import to_complex_permittivity, to_water_content_and_conductivity
from models.salinity.complex_refractive import bulk_of_loss, to_bulk, to_pore_water
from tests.models.salinity.pore_water_soils import loam
from tests.published import table

ROWS = 3000


def test_continues_the_joint_inversion():
    printed = table("complex_refractive_inverse")
    row = {name: column.values for name, column in printed.items()}
    water = 4.9 + (row["static"] - 4.9) / (1 + 1j * row["frequency"] * row["two_pi_tau"])
    soil = {
        "frequency": row["frequency"], "porosity": row["porosity"],
        "water_permittivity": water.real, "water_loss": -water.imag,
        "solid_permittivity": row["solid_real"] - 1j * row["solid_loss"],
    }  # fmt: skip
    soil["water_content"], conductivity = to_water_content_and_conductivity(
        row["real"] - 1j * row["loss"], row["frequency"], water_permittivity=water,
        porosity=soil["porosity"], solid_permittivity=soil["solid_permittivity"],
    )  # fmt: skip
    bulk = bulk_of_loss(row["loss"], **soil)
    pore_water = to_pore_water(bulk, **soil)
    assert_allclose(pore_water, conductivity, rtol=1e-12)
    error = np.abs(pore_water - printed["pore_water_conductivity"].values)
    assert_array_less(error, printed["pore_water_conductivity"].tolerance)


def test_continues_the_joint_inversion_of_any_soil():
    random = np.random.default_rng(21)
    frequency = 10 ** random.uniform(7.7, 9.5, ROWS)
    phi = random.uniform(0.3, 0.7, ROWS)
    theta, conductivity = random.uniform(0.05, phi), random.uniform(0.01, 1, ROWS)
    water = random.uniform(70, 87, ROWS) - 1j * random.uniform(0, 12, ROWS)
    known = {"porosity": phi, "solid_permittivity": random.uniform(3, 8, ROWS)}
    eps = to_complex_permittivity(theta, conductivity, frequency, water_permittivity=water, **known)
    soil = known | {
        "water_content": theta, "frequency": frequency,
        "water_permittivity": water.real, "water_loss": -water.imag,
    }  # fmt: skip
    bulk = bulk_of_loss(-eps.imag, **soil)
    assert_allclose(to_bulk(conductivity, **soil), bulk, rtol=1e-9, atol=1e-12)
    assert_allclose(to_pore_water(bulk, **soil), conductivity, rtol=1e-9)


def test_pure_water_adds_no_bulk_conductivity():
    soil = loam("complex-refractive")
    assert_allclose(to_bulk(0.0, **soil), 0.0, atol=1e-15)
    assert_allclose(to_pore_water(0.0, **soil), 0.0, atol=1e-12)
    lossless = -0.5 * soil["water_loss"] / conduction_loss(1.0, soil["frequency"])
    assert to_pore_water(lossless / 10, **soil) < 0, "not clipped"
