"""The relaxation functions are what their authors wrote, and obey what every response obeys."""

from itertools import pairwise

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad
from scipy.optimize import approx_fprime

from models.errors import ParameterError, UnknownName
from models.spectrum.form import Form, evaluate
from models.spectrum.relaxation import RELAXATIONS, dispersion
from tests.models.spectrum.dielectrics import conduction, relaxation

F = np.geomspace(1e5, 1e12, 29)
SHAPE = {"debye": (), "cole-cole": (0.3,), "cole-davidson": (0.6,),
         "havriliak-negami": (0.2, 0.7), "resonance": (np.log(3e9),)}  # fmt: skip
ASKED = {"debye": {}, "cole-cole": {"alpha": 0.3}, "cole-davidson": {"beta": 0.6},
         "havriliak-negami": {"alpha": 0.2, "beta": 0.7}}  # fmt: skip
FORMS = {
    "one": (Form(("cole-cole",)), (8, 6.5, 1.2e-9, 0.3, 0.03)),
    "skewed": (Form(("havriliak-negami", "cole-davidson"), conduction=False),
               (4, 9, 1e-9, 0.2, 0.7, 20, 1e-11, 0.6)),
    "electrode": (Form(("debye",), electrode=True), (5, 20, 9e-12, 0.1, 3000, 0.15)),
    "resonance": (Form(("debye", "resonance")), (5, 20, 9e-10, 3, 1e-11, 3e9, 0.01)),
}  # fmt: skip


@pytest.mark.parametrize("kind", ASKED)
def test_a_kind_is_the_function_of_the_textbook(kind):
    g, _ = dispersion(kind, 2 * np.pi * F, np.log(1e-9), SHAPE[kind])
    assert_allclose(g, relaxation(F, 1, 1e-9, **ASKED[kind]), rtol=1e-12)


@pytest.mark.parametrize("kind", RELAXATIONS)
def test_a_response_is_one_at_rest_and_nothing_far_above(kind):
    g, _ = dispersion(kind, np.array([1e-6, 1e22]), np.log(1e-9), SHAPE[kind])
    assert_allclose(g, [1, 0], atol=1e-6)


@pytest.mark.parametrize("kind", RELAXATIONS)
def test_real_part_and_loss_obey_kramers_and_kronig(kind):
    """g'(w) = 2/pi P int x g''(x) / (x^2 - w^2) dx, over ln x, the pole taken out."""

    def loss(w):
        return -dispersion(kind, np.array([w]), np.log(1e-9), SHAPE[kind])[0][0].imag

    for w in (2e8, 1.1e9, 8e9):

        def integrand(log_x, w=w):
            x = np.exp(log_x)
            if abs(x / w - 1) < 1e-7:
                x = w * (1 + 1e-7)
            return x * (x * loss(x) - w * loss(w)) / (x * x - w * w)

        ends = np.log([1e-1, w, 1e18])
        total = sum(quad(integrand, *pair, limit=800, epsabs=1e-10, epsrel=1e-8)[0]
                    for pair in pairwise(ends))  # fmt: skip
        real = dispersion(kind, np.array([w]), np.log(1e-9), SHAPE[kind])[0][0].real
        assert 2 / np.pi * total == pytest.approx(real, abs=2e-4)


@pytest.mark.parametrize("alpha", [0.0, 0.2, 0.5])
def test_cole_cole_points_lie_on_a_circle_whose_centre_is_depressed(alpha):
    g, _ = dispersion("cole-cole", 2 * np.pi * F, np.log(1e-9), (alpha,))
    centre = 0.5 + 0.5j * np.tan(alpha * np.pi / 2)
    assert_allclose(np.abs(g - centre), 0.5 / np.cos(alpha * np.pi / 2), rtol=1e-12)


def test_a_davidson_cole_loss_falls_with_the_power_beta():
    g, _ = dispersion("cole-davidson", np.array([1e14, 1e16]), np.log(1e-9), (0.6,))
    assert np.log10(g.imag[1] / g.imag[0]) == pytest.approx(-2 * 0.6, abs=1e-4)


def test_a_resonance_without_inertia_is_debyes():
    g, _ = dispersion("resonance", 2 * np.pi * F, np.log(1e-9), (np.log(1e20),))
    assert_allclose(g, relaxation(F, 1, 1e-9), rtol=1e-12)


@pytest.mark.parametrize(("form", "values"), FORMS.values(), ids=FORMS)
def test_derivatives_are_those_of_differences(form, values):
    vector = form.vector(np.array(values, float))
    _, slopes = evaluate(form, vector, F)
    for part in (np.real, np.imag):
        numeric = approx_fprime(vector, lambda v, p=part: p(evaluate(form, v, F)[0]), 1e-7)
        assert_allclose(part(slopes), numeric, rtol=1e-4, atol=1e-6 * np.abs(numeric).max())


def test_blocking_electrodes_raise_the_permittivity_with_the_square_of_the_period():
    form = Form((), electrode=True)
    f = np.array([1e4, 1e5])
    vector = form.vector(np.array([10, 1e-3, 1e6, 0.0]))
    rise = evaluate(form, vector, f)[0].real - 10
    sigma = conduction(f, 1e-3).imag ** 2 / 1e6
    assert_allclose(rise, sigma, rtol=1e-2)
    assert rise[0] / rise[1] == pytest.approx(100, rel=1e-2)


def test_a_form_that_is_none_is_refused():
    with pytest.raises(UnknownName):
        Form(("kohlrausch",))
    with pytest.raises(ParameterError, match="at most 4 terms"):
        Form(("debye",) * 5)
