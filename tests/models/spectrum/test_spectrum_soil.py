"""A whole band tells the soil it was made of, and says where it does not."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.constants import epsilon_0
from scipy.optimize import approx_fprime

from models.conductivity.corwin_lesch_2005 import CORWIN_LESCH_2005
from models.mixing.joint import to_complex_permittivity
from models.mixing.physical import de_loor_1968, maxwell_garnett, power_law
from models.spectrum import Question, interpret
from models.spectrum.form import Form
from models.spectrum.water.band import Soil
from models.spectrum.water.inversion import VARIANTS, invert, salty_water
from models.spectrum.water.mixtures import MIXTURES
from models.spectrum.water.soil import Scene, Variant, path_of_current, permittivity
from models.water import kaatze_1989, peyman_2007
from tests.models.spectrum.dielectrics import BAND, record, spectrum

KNOWN = {"porosity": 0.45, "solid_permittivity": 4.7, "exponent": 0.6, "host": "water"}
EXACT = Soil({}, 20.0, 0.0, 0.45, clay=0.1)
GIVEN = {"free_water_content": 0.22, "water_conductivity": 0.15, "bulk_conductivity": 0.015,
         "bound_water_content": 0.06, "ln_bound_relaxation_time": np.log(1e-10),
         "ln_interface_strength": np.log(8.0), "ln_interface_relaxation_time": np.log(6e-9),
         "interface_alpha": 0.1}  # fmt: skip
TERMS = Form(("cole-cole", "debye"))
IDS = [variant.title for variant in VARIANTS]


def made(variant, model="complex-refractive"):
    """A soil's vector, and its permittivity with the salt that its water holds."""
    vector = np.array([GIVEN[name] for name in variant.names])
    salt = 0.15
    if variant.beside:
        theta = 0.22 + 0.06 * variant.bound
        still = Scene(BAND, model, KNOWN, salty_water(20.0))
        salt = 0.015 / path_of_current(still, theta)
    scene = Scene(BAND, model, KNOWN, salty_water(20.0, salt))
    return vector, permittivity(scene, variant, vector)[0]


def asked(model="complex-refractive", soil=EXACT, form=TERMS):
    return Question(form=form, soil=soil, mixing_model=model, parameters=KNOWN)


def told(answer):
    return {one.name: one for one in answer.soil.told}


@pytest.mark.parametrize("model", MIXTURES)
@pytest.mark.parametrize("variant", VARIANTS[::3], ids=IDS[::3])
def test_derivatives_are_those_of_differences(model, variant):
    vector, _ = made(variant, model)
    scene = Scene(BAND[::6], model, KNOWN, salty_water(20.0))
    _, slopes = permittivity(scene, variant, vector)
    for part in (np.real, np.imag):
        numeric = approx_fprime(vector, lambda v, p=part: p(permittivity(scene, variant, v)[0]),
                                1e-7)  # fmt: skip
        assert_allclose(part(slopes), numeric, rtol=1e-4, atol=2e-6 * np.abs(numeric).max())


def test_a_mixture_is_the_equation_of_its_mixing_model():
    one = np.ones(3)
    water = np.array([78 - 30j, 77 - 8j, 70 - 25j])
    phases = [(0.55, 4.7 * one + 0j), (0.2, water), (0.05, 30 - 9j * one), (0.2, one + 0j)]
    expected = {
        "complex-refractive": power_law.mixture(phases, 0.5),
        "power-law": power_law.mixture(phases, 0.6),
        "de-loor-1968": de_loor_1968.mixture(phases[1:], 4.7),
        "maxwell-garnett": maxwell_garnett.mixture(
            [phases[0], phases[2], phases[3]], water, aspect_ratio=1.0
        ),
    }
    for model, mixture in MIXTURES.items():
        assert_allclose(mixture(phases, KNOWN).value, expected[model], rtol=1e-10)


def test_free_water_alone_is_the_soil_of_the_joint_equation():
    scene = Scene(BAND, "complex-refractive", KNOWN, salty_water(20.0))
    real, loss = kaatze_1989.parts(BAND, 20.0)
    joint = to_complex_permittivity(0.22, 0.15, BAND, water_permittivity=real - 1j * loss,
                                    porosity=0.45, solid_permittivity=4.7)  # fmt: skip
    assert_allclose(permittivity(scene, Variant(), np.array([0.22, 0.15]))[0], joint, rtol=1e-10)


def test_salty_water_is_that_of_the_water_model():
    conductivity_25 = float(CORWIN_LESCH_2005.to_25(0.5, 20.0))
    real, loss = peyman_2007.parts(BAND, 20.0, conductivity_25)
    own, own_loss = salty_water(20.0, 0.5).parts(BAND)
    assert_allclose(own, real, rtol=1e-9)
    assert_allclose(own_loss + 0.5 / (2 * np.pi * BAND * epsilon_0), loss, rtol=1e-9)


@pytest.mark.parametrize("variant", VARIANTS, ids=IDS)
def test_the_soil_behind_a_clean_band_comes_back(variant):
    vector, eps = made(variant)
    answer = interpret(spectrum(BAND, eps), asked())
    band = answer.soil.bands[0]
    assert band.variant == variant
    assert_allclose(band.vector, vector, rtol=1e-4)
    bound = 0.06 if variant.bound else 0.0
    assert told(answer)["water_content"].value == pytest.approx(0.22 + bound, abs=1e-5)


@pytest.mark.parametrize("model", MIXTURES)
def test_every_mixing_model_finds_its_own_soil(model):
    variant = Variant(bound=True)
    vector, eps = made(variant, model)
    band = interpret(spectrum(BAND, eps), asked(model)).soil.bands[0]
    assert band.variant == variant
    assert_allclose(band.vector, vector, rtol=1e-3)


def test_pore_water_is_told_at_25_degrees():
    _, eps = made(Variant())
    found = told(interpret(spectrum(BAND, eps), asked()))
    at_25 = float(CORWIN_LESCH_2005.to_25(0.15, 20.0))
    assert found["pore_water_conductivity"].value == pytest.approx(at_25, rel=1e-4)
    assert found["bulk_conductivity"].value == pytest.approx(0.22**2 * 0.15, rel=1e-4)


def test_what_is_assumed_of_the_soil_is_in_the_shared_part():
    _, eps = made(Variant())
    loose = Soil({"porosity": 0.03, "solid_permittivity": 0.6}, 20.0, 1.0, 0.45, clay=0.1)
    narrow = told(interpret(spectrum(BAND, eps), asked()))["water_content"]
    wide = told(interpret(spectrum(BAND, eps), asked(soil=loose)))["water_content"]
    index = np.sqrt(float(kaatze_1989.static_permittivity(20.0))) - 1
    porosity = 0.03 * (np.sqrt(4.7) - 1) / index
    solids = 0.55 * 0.6 / (2 * np.sqrt(4.7)) / index
    expected = np.sqrt(narrow.shared**2 + porosity**2 + solids**2)
    assert wide.shared == pytest.approx(expected, rel=0.05)
    assert wide.standard_uncertainty == pytest.approx(wide.shared, rel=0.01)


def test_bands_of_the_fit_hold_the_truth():
    """100 draws of noise of 1 % of |eps|, stated; what is shared between spectra is not drawn."""
    variant = Variant(bound=True)
    vector, eps = made(variant)
    noise = 0.01 * np.abs(eps)
    random = np.random.default_rng(9)
    scene = Scene(BAND, "complex-refractive", KNOWN, salty_water(20.0))
    held = []
    for _ in range(100):
        noisy = spectrum(BAND, eps, noise, random)
        (band,) = invert(noisy, scene, np.array([noise, noise]), 20.0, [variant])
        held.append(np.abs(band.vector - vector) < 1.96 * np.sqrt(np.diag(band.covariance)))
    assert 0.93 <= np.mean(held) <= 0.97


def test_a_band_that_no_soil_describes_says_so():
    """The simulated loam has no water in it: its permittivity is flat above 1 GHz."""
    answer = interpret(record("loam_colecole"), asked(form=None))
    assert "mixing-model-misfit" in {f.flag for f in answer.findings}
    assert told(answer)["bulk_conductivity"].value == pytest.approx(0.03, rel=0.05)


def test_without_a_temperature_there_is_no_water_content():
    _, eps = made(Variant())
    answer = interpret(spectrum(BAND, eps), asked(soil=Soil({}, np.nan, 0.0, 0.45)))
    assert answer.soil is None
    assert "missing:temperature" in {f.flag for f in answer.findings}
