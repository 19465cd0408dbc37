"""What a spectrum was made of comes back, its bands hold the truth, and doubts are told."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.errors import ParameterError
from models.spectrum import Question, interpret
from models.spectrum.choice import choose
from models.spectrum.description import curve, parameters
from models.spectrum.fit import fit
from models.spectrum.form import Form, evaluate
from models.spectrum.weights import CONSTANT, EACH_PART, MAGNITUDE, likeliest_noise
from tests.models.spectrum.dielectrics import (
    BAND,
    conduction,
    loam,
    record,
    relaxation,
    spectrum,
    truths,
)

MADE = {
    "debye": (Form(("debye",)), (5.2, 71.6, 8.15e-12, 1.067)),
    "cole-cole": (Form(("cole-cole",)), (8, 6.5, 1.2e-9, 0.3, 0.03)),
    "cole-davidson": (Form(("cole-davidson",), conduction=False), (4, 20, 4e-10, 0.6)),
    "havriliak-negami": (Form(("havriliak-negami",)), (4, 20, 4e-10, 0.15, 0.75, 0.01)),
    "two terms": (Form(("cole-cole", "debye")), (5, 12, 2e-9, 0.2, 15, 9e-12, 0.05)),
    "three terms": (Form(("debye",) * 3), (6, 24, 4e-9, 4, 5e-10, 30, 8.3e-12, 0.12)),
    "electrodes": (Form(("debye",), electrode=True), (5, 20, 2e-10, 0.1, 3000, 0.1)),
}  # fmt: skip


def told(found):
    return {one.name: one for one in found.parameters if one.term in {None, 0}}


@pytest.mark.parametrize("name", ["water25_debye", "loam_colecole"])
def test_a_clean_record_is_found_to_a_hundredth(name):
    found, truth = told(interpret(record(name), Question())), truths()[name]
    for quantity, value in truth.items():
        if value == 0 and quantity not in found:
            continue
        assert found[quantity].value == pytest.approx(value, rel=0.01), quantity


def test_a_noisy_record_is_found_within_its_uncertainty():
    found, truth = told(interpret(record("loam_colecole_noisy"), Question())), truths()
    for quantity, value in truth["loam_colecole_noisy"].items():
        off = abs(found[quantity].value - value)
        assert off < 3 * found[quantity].standard_uncertainty, quantity


@pytest.mark.parametrize(("form", "values"), MADE.values(), ids=MADE)
def test_what_a_clean_spectrum_was_made_of_comes_back(form, values):
    eps, _ = evaluate(form, form.vector(np.array(values, float)), BAND)
    again = fit(form, spectrum(BAND, eps), MAGNITUDE)
    assert_allclose(form.values(again.vector), values, rtol=1e-5)


@pytest.mark.parametrize("name", ["cole-cole", "cole-davidson", "two terms", "three terms"])
def test_the_right_form_is_chosen_for_a_clean_spectrum(name):
    form, values = MADE[name]
    eps, _ = evaluate(form, form.vector(np.array(values, float)), BAND)
    assert choose(spectrum(BAND, eps)).fit.form == form


@pytest.mark.parametrize("name", ["cole-cole", "cole-davidson", "two terms"])
def test_bands_hold_the_truth(name):
    """200 draws of noise of 1 % of |eps|, stated: the curve and the parameters."""
    form, values = MADE[name]
    truth = form.vector(np.array(values, float))
    eps, _ = evaluate(form, truth, BAND)
    random = np.random.default_rng(7)
    in_curve, in_parameters = [], []
    for _ in range(200):
        found = fit(form, spectrum(BAND, eps, 0.01 * np.abs(eps), random), None, effort=1)
        band = curve(found, 0.95)
        in_curve.append(np.abs(band.real - eps.real) < band.factor * band.real_u)
        in_curve.append(np.abs(band.loss + eps.imag) < band.factor * band.loss_u)
        ends = [one for one in parameters(found, 0.95) if one.name != "static_permittivity"]
        in_parameters.append([one.lower <= v <= one.upper
                              for one, v in zip(ends, values, strict=True)])  # fmt: skip
    assert 0.93 <= np.mean(in_curve) <= 0.97
    assert 0.93 <= np.mean(in_parameters) <= 0.975


def test_bands_hold_the_truth_although_form_and_noise_were_found_out():
    random = np.random.default_rng(11)
    eps = loam(BAND)
    held = []
    for _ in range(3):
        noise = 0.01 * np.abs(eps) * (random.standard_normal(60) + 1j * random.standard_normal(60))
        found = interpret(spectrum(BAND, eps + noise), Question()).curve
        held.append(np.abs(found.real - eps.real) < found.factor * found.real_u)
        held.append(np.abs(found.loss + eps.imag) < found.factor * found.loss_u)
    assert np.mean(held) >= 0.9


@pytest.mark.parametrize("shape", [EACH_PART, MAGNITUDE, CONSTANT])
def test_the_shape_of_the_noise_is_told_from_its_residuals(shape):
    random = np.random.default_rng(3)
    eps = loam(BAND)
    size = {EACH_PART: np.array([eps.real, eps.imag]), MAGNITUDE: np.abs(eps), CONSTANT: 20.0}
    noise = 0.01 * size[shape] * random.standard_normal((2, 60))
    assert likeliest_noise(noise[0] + 1j * noise[1], eps) == shape


def test_a_reduced_chi_square_is_one_for_noise_stated_rightly():
    random = np.random.default_rng(5)
    eps = loam(BAND)
    form = MADE["two terms"][0]
    sizes = [fit(form, spectrum(BAND, eps, 0.3, random), None).reduced_chi_square
             for _ in range(30)]  # fmt: skip
    assert np.mean(sizes) == pytest.approx(1.0, abs=4 * np.sqrt(2 / 113 / 30))


def test_too_simple_a_form_says_so():
    random = np.random.default_rng(5)
    eps = loam(BAND)
    asked = Question(form=Form(("debye",)))
    flags = [f.flag for f in interpret(spectrum(BAND, eps, 0.1, random), asked).findings]
    assert {"residuals-above-noise", "residuals-not-random"} <= set(flags)


def test_conduction_that_is_left_out_makes_a_relaxation_that_is_not_there():
    eps = 10 + relaxation(BAND, 5, 1e-11) + conduction(BAND, 0.05)
    form = Form(("debye", "debye"), conduction=False)
    found = interpret(spectrum(BAND, eps), Question(form=form))
    assert found.parameters[1].value > 1000
    assert "term-outside-band" in {f.flag for f in found.findings}


def test_terms_that_are_one_are_not_resolved():
    random = np.random.default_rng(5)
    eps = 5 + relaxation(BAND, 20, 1e-10)
    form = Form(("debye", "debye"), conduction=False)
    found = interpret(spectrum(BAND, eps, 0.1, random), Question(form=form))
    assert "term-not-resolved" in {f.flag for f in found.findings}


def test_a_relaxation_above_the_band_leaves_its_upper_end_open():
    random = np.random.default_rng(5)
    eps = 5.2 + relaxation(BAND, 71.6, 8.15e-12) + conduction(BAND, 1.067)
    asked = Question(form=Form(("debye",)))
    found = interpret(spectrum(BAND, eps, 0.01 * np.abs(eps), random), asked)
    assert {"term-outside-band", "infinite-permittivity-not-resolved"} <= {
        f.flag for f in found.findings
    }


def test_electrodes_are_told_from_a_relaxation():
    f = np.geomspace(1e5, 3e9, 60)
    form = Form(("debye",), electrode=True)
    eps, _ = evaluate(form, form.vector(np.array([5, 20, 9e-11, 0.1, 3e5, 0.1])), f)
    found = interpret(spectrum(f, eps), Question())
    assert found.choice.fit.form == form
    assert "electrode-polarisation" in {one.flag for one in found.findings}


def test_more_parameters_than_numbers_are_refused_by_name():
    short = spectrum(BAND[:4], loam(BAND[:4]))
    with pytest.raises(ParameterError, match="9 parameters and needs at least 5 frequencies") as no:
        interpret(short, Question(form=Form(("havriliak-negami", "cole-cole"))))
    assert no.value.complaints[0].place == ("model", "terms")


def test_three_points_get_the_simplest_form():
    few = spectrum(BAND[::25], loam(BAND[::25]))
    assert len(interpret(few, Question()).choice.fit.vector) <= 4
