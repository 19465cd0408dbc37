"""A circuit is the spectrum it stands for, and the way back is exact."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.constants import epsilon_0

from models.errors import ParameterError
from models.spectrum.circuits.circuit import circuit_of, constants_of
from models.spectrum.circuits.ladder import distribution, rungs
from models.spectrum.circuits.paths import Geometry, Material, materials, mixed
from models.spectrum.circuits.units import (
    Relaxing,
    ThreeBranches,
    branches_of,
    relaxing,
    three_branches,
    two_units,
)
from models.spectrum.form import Form, evaluate
from models.spectrum.views import VIEWS, permittivity_from, seen_as, sensitivity
from tests.models.spectrum.dielectrics import loam, relaxation

F = np.geomspace(1e5, 1e11, 61)
CELL = 2e-12
FORMS = {
    "debye": (Form(("debye",)), (5, 20, 9e-12, 0.1)),
    "cole-cole and electrodes": (Form(("cole-cole",), electrode=True),
                                 (5, 12, 2e-9, 0.2, 0.05, 3000, 0.2)),
    "resonance": (Form(("resonance", "debye"), conduction=False),
                  (5, 20, 1e-10, 3e9, 7, 1e-9)),
}  # fmt: skip
MATERIAL = Relaxing(6.0, 20.0, 1e-9, 0.05)


def complex_permittivity(material, f):
    return material.permittivity - 1j * material.conductivity / (2 * np.pi * f * epsilon_0)


@pytest.mark.parametrize(("form", "values"), FORMS.values(), ids=FORMS)
def test_the_circuit_of_a_form_has_its_admittance(form, values):
    values = np.array(values, float)
    eps, _ = evaluate(form, form.vector(values), F)
    circuit = circuit_of(form, values, CELL)
    assert_allclose(circuit.impedance(F), 1 / (2j * np.pi * F * CELL * eps), rtol=1e-9)


@pytest.mark.parametrize(("form", "values"), FORMS.values(), ids=FORMS)
def test_the_material_of_a_circuit_is_the_one_it_was_made_of(form, values):
    found = constants_of(circuit_of(form, np.array(values, float), CELL))
    slots = dict(zip([(s.name, s.term) for s in form.slots], values, strict=True))
    assert found.infinite_permittivity == pytest.approx(values[0])
    assert found.conductivity == pytest.approx(slots.get(("bulk_conductivity", None), 0.0))
    for term, (kind, parameters) in enumerate(found.terms):
        assert kind == form.terms[term]
        for name, value in parameters.items():
            assert value == pytest.approx(slots[name, term])


def test_the_resonance_of_a_series_circuit_is_that_of_thomson():
    (branch,) = circuit_of(Form(("resonance",), conduction=False),
                           np.array([1, 3, 1e-10, 2e9]), CELL).branches  # fmt: skip
    elements = branch.elements
    resonant = 1 / (2 * np.pi * np.sqrt(elements["inductance"] * elements["capacitance"]))
    assert resonant == pytest.approx(2e9)
    assert branch.impedance(np.array([2 * np.pi * 2e9]))[0] == pytest.approx(elements["resistance"])


@pytest.mark.parametrize(("alpha", "beta"), [(0.0, 0.3), (0.0, 0.6), (0.0, 0.9), (0.15, 0.75),
                                             (0.3, 1.0), (0.5, 0.3)])  # fmt: skip
def test_a_ladder_is_the_relaxation_it_stands_for(alpha, beta):
    f = np.geomspace(1e5, 1e10, 61)
    shares, times = rungs(alpha, beta)
    ladder = sum(relaxation(f, s, t * 1e-9) for s, t in zip(shares, times, strict=True))
    assert_allclose(ladder, relaxation(f, 1, 1e-9, alpha, beta), rtol=6e-3)
    assert np.sum(shares) == pytest.approx(1.0)


def test_times_of_a_davidson_cole_ladder_have_the_mean_of_their_distribution():
    """Beta(b, 1 - b) has the mean b and the second moment b (b + 1) / 2."""
    shares, times = rungs(0.0, 0.6)
    assert np.sum(shares * times) == pytest.approx(0.6)
    assert np.sum(shares * times**2) == pytest.approx(0.6 * 1.6 / 2)


def test_a_cole_cole_distribution_is_that_of_its_authors():
    """1 / (2 pi) sin(a pi) / (cosh((1 - a) s) - cos(a pi)), Cole and Cole (1941), eq. 13."""
    s = np.linspace(-6, 6, 25)
    a = 0.3
    theirs = np.sin(a * np.pi) / (np.cosh((1 - a) * s) - np.cos(a * np.pi)) / (2 * np.pi)
    assert_allclose(distribution(s, a, 1.0), theirs, rtol=1e-9)


def test_two_units_are_three_branches_and_back():
    three = branches_of(MATERIAL, CELL)
    two = two_units(three)
    assert_allclose(two.impedance(F), three.impedance(F), rtol=1e-9)
    again = three_branches(two)
    assert_allclose(
        [again.capacitance, again.resistance, again.series_capacitance, again.series_resistance],
        [three.capacitance, three.resistance, three.series_capacitance, three.series_resistance],
    )
    assert two.slow.time > MATERIAL.relaxation_time > two.fast.time


def test_three_branches_are_the_material_they_stand_for():
    three = branches_of(MATERIAL, CELL)
    again = relaxing(three, CELL)
    assert_allclose(
        [again.infinite_permittivity, again.relaxation_strength, again.relaxation_time,
         again.conductivity], [6.0, 20.0, 1e-9, 0.05],
    )  # fmt: skip
    eps = 6 + relaxation(F, 20, 1e-9) - 0.05j / (2 * np.pi * F * epsilon_0)
    assert_allclose(three.impedance(F), 1 / (2j * np.pi * F * CELL * eps), rtol=1e-9)


def test_a_circuit_without_a_resistor_has_no_two_units():
    with pytest.raises(ParameterError, match="above 0 and finite"):
        two_units(ThreeBranches(1e-12, np.inf, 1e-12, 1.0))


@pytest.mark.parametrize("shares", [(0.1, 0.3, 0.7), (0.0, 0.0, 0.5), (0.2, 0.0, 0.6)])
def test_three_paths_relax_as_their_admittances_add_up(shares):
    first, second, geometry = Material(5, 1e-3), Material(80, 0.2), Geometry(*shares)
    a, b = complex_permittivity(first, F), complex_permittivity(second, F)
    in_turn = 1 / (geometry.split / a + (1 - geometry.split) / b)
    whole = geometry.first * a + geometry.second * b + geometry.both * in_turn
    found = mixed(first, second, geometry)
    relaxes = relaxation(F, found.relaxation_strength, found.relaxation_time)
    conducts = -1j * found.conductivity / (2 * np.pi * F * epsilon_0)
    assert_allclose(found.infinite_permittivity + relaxes + conducts, whole, rtol=1e-9)


@pytest.mark.parametrize("shares", [(0.1, 0.3, 0.7), (0.0, 0.0, 0.5), (0.2, 0.0, 0.6)])
def test_both_materials_come_back_from_a_mixture_of_known_geometry(shares):
    first, second, geometry = Material(5, 1e-3), Material(80, 0.2), Geometry(*shares)
    mixture = mixed(first, second, geometry)
    pairs = materials(mixture, geometry)
    wanted = [5, 1e-3, 80, 0.2]
    found = [[p.permittivity, p.conductivity, q.permittivity, q.conductivity] for p, q in pairs]
    assert any(np.allclose(one, wanted, rtol=1e-9) for one in found)
    for p, q in pairs:
        again = mixed(p, q, geometry)
        assert again.relaxation_strength == pytest.approx(mixture.relaxation_strength)
        assert again.relaxation_time == pytest.approx(mixture.relaxation_time)


def test_shares_that_are_none_are_refused():
    with pytest.raises(ParameterError, match="shares"):
        Geometry(0.7, 0.6, 0.5)


@pytest.mark.parametrize("view", VIEWS)
def test_a_view_and_back_is_the_permittivity(view):
    eps = loam(F)
    there = seen_as(view, eps, F, CELL)
    assert_allclose(permittivity_from(view, there, F, CELL), eps, rtol=1e-9)


@pytest.mark.parametrize("view", VIEWS)
def test_the_sensitivity_of_a_view_is_its_derivative(view):
    eps, step = loam(F), 1e-6
    numeric = (seen_as(view, eps * (1 + step), F, CELL) - seen_as(view, eps, F, CELL)) / (
        step * eps
    )
    assert_allclose(sensitivity(view, eps, F, CELL), numeric, rtol=1e-5)


def test_a_unit_cube_has_the_conductance_of_its_conductivity():
    eps = 1 - 0.03j / (2 * np.pi * F * epsilon_0)
    assert_allclose(seen_as("admittance", eps, F).real, 0.03, rtol=1e-9)


def test_views_of_a_lossy_capacitor_have_the_signs_of_a_passive_one():
    eps = loam(F)
    signs = {view: np.sign(seen_as(view, eps, F, CELL).imag).max() for view in VIEWS}
    assert signs == {"permittivity": -1, "modulus": 1, "impedance": -1, "admittance": 1}
    for view in VIEWS:
        assert np.all(seen_as(view, eps, F, CELL).real > 0)
