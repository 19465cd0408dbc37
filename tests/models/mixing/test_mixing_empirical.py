"""Curves fitted to measured soils give the numbers their papers' coefficients give."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_less

from models.mixing.empirical import EMPIRICAL, topp_1980, wang_schmugge_1980
from models.quantity import QUANTITIES
from tests.published import table

MODELS = {model.key: model for model in EMPIRICAL}
LOAM = {"bulk_density": 1400.0, "clay": 0.20, "organic_matter": 0.02}  # SI
CURVES = {
    "topp-1980": ("topp-1980", {}),
    "ledieu-1986": ("ledieu-1986", {}),
    "roth-1992-mineral": ("roth-1992-mineral", {}),
    "roth-1992-organic": ("roth-1992-organic", {}),
    "malicki-1996": ("malicki-1996", {"bulk_density": 1400.0}),
    "malicki-1996-peat": ("malicki-1996", {"bulk_density": 300.0}),
    "jacobsen-schjonning-1993": ("jacobsen-schjonning-1993", {}),
    "jacobsen-schjonning-1993-texture": ("jacobsen-schjonning-1993-texture", LOAM),
    "ferre-1996": ("ferre-1996", {}),
    "schaap-1997": ("schaap-1997", {}),
    "kellner-lundin-2001": ("kellner-lundin-2001", {}),
    "curtis-2001": ("curtis-2001", {}),
}
TOPP = {"constant": -5.3e-2, "linear": 2.92e-2, "quadratic": -5.5e-4, "cubic": 4.3e-6}
SOIL = {"sand": 0.4, "clay": 0.2, "porosity": 0.47}


def close(computed, printed):
    assert_array_less(np.abs(computed - printed.values), printed.tolerance)


def test_are_offered_under_their_names_in_order():
    assert list(MODELS) == [
        "topp-1980", "ledieu-1986", "roth-1992-mineral", "roth-1992-organic", "malicki-1996",
        "jacobsen-schjonning-1993", "jacobsen-schjonning-1993-texture", "ferre-1996",
        "schaap-1997", "kellner-lundin-2001", "curtis-2001", "wang-schmugge-1980", "square-root",
        "polynomial",
    ]  # fmt: skip


@pytest.mark.parametrize("heading", CURVES)
def test_curve_gives_the_water_content_of_its_coefficients(heading):
    printed = table("empirical_curves")
    key, soil = CURVES[heading]
    close(MODELS[key].to_water_content(printed["permittivity"].values, **soil), printed[heading])


@pytest.mark.parametrize("heading", CURVES)
def test_curve_is_turned_round(heading):
    printed = table("empirical_curves")
    key, soil = CURVES[heading]
    permittivity = MODELS[key].to_permittivity(printed[heading].values, **soil)
    assert_allclose(permittivity, printed["permittivity"].values, rtol=1e-6)


def test_topp_1980_gives_the_water_content_of_its_first_cubic():
    printed = table("topp_1980_water_content")
    computed = topp_1980.to_water_content(printed["apparent_permittivity"].values)
    close(computed, printed["water_content"])


def test_topp_1980_gives_the_permittivity_of_its_second_cubic():
    printed = table("topp_1980_permittivity")
    computed = topp_1980.permittivity_as_printed(printed["water_content"].values)
    close(computed, printed["apparent_permittivity"])


def test_the_two_cubics_of_topp_1980_are_not_inverses():
    printed = table("topp_1980_there_and_back")
    theta = printed["water_content"].values
    back = topp_1980.to_water_content(topp_1980.permittivity_as_printed(theta))
    close(back - theta, printed["difference"])


def test_the_two_cubics_of_topp_1980_agree_within_0_0145_where_soils_are():
    theta = np.linspace(0.03, 0.47, 441)
    off = topp_1980.to_water_content(topp_1980.permittivity_as_printed(theta)) - theta
    assert off.min() == pytest.approx(-0.0145, abs=5e-5)
    assert off.max() == pytest.approx(0.0111, abs=5e-5)


@pytest.mark.parametrize("key", table("empirical_flattest"))
def test_cubic_is_flattest_where_its_coefficients_say(key):
    column = table("empirical_flattest")[key]
    where, slope = column.values
    near = where + np.linspace(-5.0, 5.0, 1001)
    slopes = np.gradient(MODELS[key].to_water_content(near), near)[1:-1]
    assert slopes.min() == pytest.approx(slope, abs=0.5e-5)
    assert near[1:-1][slopes.argmin()] == pytest.approx(where, abs=0.5)


@pytest.mark.parametrize("key", table("empirical_dry_ends"))
def test_dry_soil_has_the_permittivity_of_the_dry_end(key):
    close(MODELS[key].to_permittivity(0.0), table("empirical_dry_ends")[key])


@pytest.mark.parametrize("heading", table("empirical_out_of_range"))
def test_steep_end_is_given_as_computed_and_is_out_of_range(heading):
    key, _, permittivity = heading.partition(" at ")
    close(
        MODELS[key].to_water_content(float(permittivity)), table("empirical_out_of_range")[heading]
    )
    assert MODELS[key].validity["apparent_permittivity"].excludes(float(permittivity))


def test_malicki_1996_gives_the_permittivity_of_its_coefficients():
    printed = table("malicki_1996_permittivity")
    density = 1000.0 * printed["bulk_density"].values  # kg/m3
    computed = MODELS["malicki-1996"].to_permittivity(
        printed["water_content"].values, bulk_density=density
    )
    close(computed, printed["apparent_permittivity"])


def test_roth_1992_organic_follows_a_refractive_mixture_of_peat():
    printed = table("organic_curves")
    computed = MODELS["roth-1992-organic"].to_water_content(printed["apparent_permittivity"].values)
    close(computed, printed["roth-1992-organic"])
    assert np.max(np.abs(computed - printed["refractive_mixture"].values)) < 0.02


def test_schaap_1997_gives_the_water_content_of_its_coefficients():
    printed = table("schaap_1997")
    computed = MODELS["schaap-1997"].to_water_content(printed["apparent_permittivity"].values)
    close(computed, printed["water_content"])


def test_wang_schmugge_1980_gives_both_parts_of_the_permittivity():
    printed = table("wang_schmugge_1980")
    computed = wang_schmugge_1980.complex_permittivity(
        printed["water_content"].values, **SOIL, water_permittivity=79.5 - 6.63j
    )
    close(computed.real, printed["real_permittivity"])
    close(-computed.imag, printed["imaginary_permittivity"])
    real = wang_schmugge_1980.to_permittivity(
        printed["water_content"].values, **SOIL, water_permittivity=79.5
    )
    close(real, printed["real_permittivity"])


def test_wang_schmugge_1980_is_turned_round_on_both_sides_of_the_transition():
    printed = table("wang_schmugge_1980_inverse")
    computed = wang_schmugge_1980.to_water_content(
        printed["real_permittivity"].values, **SOIL, water_permittivity=80.0
    )
    close(computed, printed["water_content"])
    transition = wang_schmugge_1980.texture(0.4, 0.2).transition
    assert computed[1] < transition < computed[0]


def test_wang_schmugge_1980_is_continuous_at_the_transition():
    transition = wang_schmugge_1980.texture(0.4, 0.2).transition
    sides = transition + np.array([-1e-9, 1e-9])
    below, above = wang_schmugge_1980.to_permittivity(sides, **SOIL, water_permittivity=80.0)
    assert above - below == pytest.approx(0.0, abs=1e-6)


def test_wang_schmugge_1980_of_dry_soil_is_air_and_rock():
    dry = wang_schmugge_1980.to_permittivity(0.0, **SOIL, water_permittivity=80.0)
    assert dry == pytest.approx(0.47 * 1.0 + 0.53 * 5.5)


def test_ferre_1996_averages_layers_along_the_rods():
    ferre = MODELS["ferre-1996"]
    layers = np.array([0.10, 0.40])
    index = np.sqrt(ferre.to_permittivity(layers)).mean()  # travel times add up
    assert ferre.to_water_content(index**2) == pytest.approx(layers.mean())


def test_square_root_with_the_line_of_ledieu_1986_is_ledieu_1986():
    permittivity = np.linspace(1.0, 81.0, 33)
    assert_allclose(
        MODELS["square-root"].to_water_content(permittivity, slope=0.1138, intercept=-0.1758),
        MODELS["ledieu-1986"].to_water_content(permittivity),
        rtol=1e-15,
    )


@pytest.mark.parametrize("key", ["ledieu-1986", "ferre-1996", "schaap-1997"])
def test_root_of_a_negative_permittivity_is_no_number(key):
    assert np.isnan(MODELS[key].to_water_content(-1.0))
    assert np.isnan(MODELS[key].to_permittivity(-0.2))


def test_drier_than_dry_is_given_as_computed():
    assert topp_1980.to_water_content(1.0) == pytest.approx(-0.0243457, abs=1e-12)
    assert MODELS["ledieu-1986"].to_water_content(1.0) == pytest.approx(-0.062, abs=1e-12)


@pytest.mark.parametrize("model", EMPIRICAL, ids=MODELS)
def test_extreme_values_warn_of_nothing(model):
    soil = {p.name: {**LOAM, **SOIL, **TOPP, "water_permittivity": 80.0, "slope": 0.11,
                     "intercept": -0.18}[p.name] for p in model.parameters}  # fmt: skip
    extremes = [-np.inf, -1e308, -1.0, 0.0, 5e-324, 1e308, np.inf, np.nan]
    for way in (model.to_water_content, model.to_permittivity):
        assert way(extremes, **soil).shape == (8,)
        assert [np.shape(way(value, **soil)) for value in extremes] == [()] * 8


@pytest.mark.parametrize("model", EMPIRICAL, ids=MODELS)
def test_declares_where_it_holds_in_the_words_of_the_vocabulary(model):
    own = {"slope", "intercept", "constant", "linear", "quadratic", "cubic"}
    assert {p.name for p in model.parameters} <= set(QUANTITIES) | own
    told = {"water_content", f"{model.permittivity}_permittivity"}
    assert told | (set() if model.fitted_by_caller else {"frequency"}) <= set(model.validity)
    assert set(model.validity) <= set(QUANTITIES)
    for name, ends in model.validity.items():
        assert not QUANTITIES[name].gate_si.excludes([ends.low, ends.high]).any()
