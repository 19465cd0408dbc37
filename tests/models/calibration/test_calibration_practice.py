"""What is refused, what is said of a calibration, which form is taken, and what can be used."""

import numpy as np
import pytest
import uncertainties

from models.calibration import FORMS, Pairs, advice_of, better_form, calibrate, choose_form, reuse
from models.calibration.water import Waters, volumetric
from models.errors import ParameterError
from tests.models.calibration.soils import cubic_law, exact, measured, root_law

ROOT = FORMS["square-root"]
PLAIN = np.linspace(4.0, 30.0, 12)


def levelled(water_content, level, u=0.01):
    x = np.square((np.asarray(water_content) + 0.16) / 0.11)
    return Pairs(x, np.full(x.size, 0.2), np.asarray(water_content), np.full(x.size, u),
                 np.asarray(level))  # fmt: skip


def codes(pairs, form=ROOT):
    return {said.code for said in advice_of(calibrate(pairs, form))}


def told(pairs, code, form=ROOT):
    return next(said.text for said in advice_of(calibrate(pairs, form)) if said.code == code)


def test_pairs_of_one_permittivity_are_refused():
    with pytest.raises(ParameterError, match="all 5 pairs have the same permittivity, 9"):
        calibrate(exact([9.0] * 5, [0.1, 0.11, 0.12, 0.13, 0.14]), ROOT)


@pytest.mark.parametrize(("form", "least"), [("square-root", 4), ("polynomial-3", 6)])
def test_too_few_pairs_are_refused_with_how_many_would_do(form, least):
    x = PLAIN[: least - 1]
    with pytest.raises(ParameterError, match=f"at least {least} pairs, found {least - 1}"):
        calibrate(exact(x, root_law(x)), FORMS[form])
    x = PLAIN[:least]
    calibrate(exact(x, root_law(x)), FORMS[form])


def test_a_curve_through_too_few_different_permittivities_is_refused():
    x = np.repeat([4.0, 20.0], 4)
    with pytest.raises(ParameterError, match="3 different permittivities, found 2"):
        calibrate(exact(x, root_law(x)), FORMS["polynomial-2"])


def test_permittivities_within_their_own_noise_are_refused():
    x = 9.0 + 0.1 * np.arange(8)
    pairs = Pairs(x, np.full(8, 0.5), root_law(x), np.full(8, 0.01))
    with pytest.raises(ParameterError, match="cannot be told apart"):
        calibrate(pairs, ROOT)


def test_an_exact_pair_among_uncertain_ones_is_named():
    u = np.full(12, 0.01)
    u[4] = 0.0
    with pytest.raises(ParameterError, match="pair 5 is exact while others"):
        calibrate(Pairs(PLAIN, np.zeros(12), root_law(PLAIN), u), ROOT)


def test_an_outlier_is_pointed_out():
    draw = np.random.default_rng(2)
    pairs = measured(root_law, 14, (0.0, 0.01, 0.0), draw, stated=False)
    assert "calibration-outlier" not in codes(pairs)
    pairs.water_content[8] += 0.08
    assert told(pairs, "calibration-outlier").startswith("Pair 9 ")
    stated = Pairs(pairs.permittivity, np.full(14, 0.1), pairs.water_content, np.full(14, 0.02))
    assert told(stated, "calibration-outlier").startswith("Pair 9 ")


def test_good_pairs_are_rarely_called_outliers():
    draw = np.random.default_rng(9)
    called = [
        "calibration-outlier" in codes(measured(root_law, 15, (0.2, 0.01, soil), draw))
        for soil in (0.0, 0.02)
        for _ in range(60)
    ]
    assert np.mean(called) < 0.12


def test_scatter_that_is_not_explained_and_too_little_of_it_are_said():
    draw = np.random.default_rng(6)
    pairs = measured(root_law, 15, (0.1, 0.01, 0.0), draw)
    for factor, code in ((0.2, "calibration-scattered"), (6.0, "calibration-overstated")):
        other = Pairs(pairs.permittivity, factor * pairs.permittivity_u, pairs.water_content,
                      factor * pairs.water_content_u)  # fmt: skip
        assert code in codes(other)
        assert code not in codes(pairs)


def test_a_curve_that_falls_within_its_range_is_said():
    x = np.array([4.0, 8.0, 12.0, 16.0, 20.0, 24.0, 28.0])
    y = np.array([0.05, 0.15, 0.22, 0.27, 0.29, 0.28, 0.26])
    found = calibrate(exact(x, y), FORMS["polynomial-2"])
    place = -found.coefficients[1] / (2 * found.coefficients[2])
    assert 20 < place < 24
    assert "from permittivity 2" in told(exact(x, y), "calibration-turns", FORMS["polynomial-2"])
    assert "calibration-turns" not in codes(exact(x, y), ROOT)


def test_pairs_that_tell_nothing_are_said_and_make_no_model():
    pairs = exact(PLAIN, np.tile([0.20, 0.22, 0.19], 4))
    assert "calibration-flat" in codes(pairs)
    assert "rises by no more than" in reuse(calibrate(pairs, ROOT), 0.95).unusable


@pytest.mark.parametrize(
    ("pairs", "lacking"),
    [
        (levelled([0.05, 0.15, 0.25, 0.35] * 2, [0, 1, 2, 3] * 2), "8 pairs, of at least 10"),
        (levelled([0.05, 0.15, 0.25, 0.35] * 3, [0, 1, 2, 3] * 3), "4 levels, of at least 5"),
        (levelled([0.05, 0.12, 0.2, 0.3, 0.4] * 2, [0, 1, 2, 3, 4] * 2), "5 levels with fewer"),
        (levelled([0.20, 0.22, 0.24, 0.26, 0.3] * 3, [0, 1, 2, 3, 4] * 3), "span of at least"),
        (exact(PLAIN, root_law(PLAIN)), "no level says"),
    ],
)
def test_practice_that_is_not_met_is_said(pairs, lacking):
    assert lacking in told(pairs, "calibration-design")


def test_pairs_that_meet_practice_are_not_called_short_of_it():
    pairs = levelled([0.05, 0.12, 0.2, 0.3, 0.4] * 3, [0, 1, 2, 3, 4] * 3)
    assert codes(pairs) == {"calibration-scope", "calibration-overstated"}


@pytest.mark.parametrize(("law", "taken"), [(root_law, "square-root"), (cubic_law, "polynomial-3")])
def test_the_form_that_made_the_pairs_is_taken(law, taken):
    draw = np.random.default_rng(12)
    chosen, every = choose_form(measured(law, 24, (0.05, 0.002, 0.0), draw, high=42.0))
    assert chosen.calibration.form.key == taken
    assert not chosen.unusable
    assert len(every) == 4


def test_more_coefficients_are_not_taken_for_noise():
    draw = np.random.default_rng(13)
    taken = [
        choose_form(measured(root_law, 12, (0.3, 0.01, 0.01), draw))[0].calibration.form.size
        for _ in range(40)
    ]
    assert np.mean(np.array(taken) == 2) > 0.85


def test_a_much_better_form_is_named():
    draw = np.random.default_rng(15)
    pairs = measured(root_law, 14, (0.1, 0.005, 0.0), draw)
    assert better_form(calibrate(pairs, FORMS["polynomial-1"])).form is ROOT
    assert better_form(calibrate(pairs, ROOT)) is None


def test_a_form_that_estimates_would_refuse_is_not_chosen():
    x = np.linspace(4.0, 30.0, 14)
    y = 0.03 * x - 0.0005 * x**2  # falls beyond 30, which the mixing model does not take
    chosen, every = choose_form(exact(x, y))
    bent = next(one for one in every if one.calibration.form.key == "polynomial-2")
    assert bent.criterion < chosen.criterion
    assert "slope falls to" in bent.unusable
    assert not chosen.unusable


def test_coefficients_outside_what_the_model_takes_are_said():
    x = np.array([4.0, 4.5, 5.0, 5.5, 6.0])
    found = calibrate(exact(x, np.array([0.0, 0.24, 0.5, 0.77, 0.98])), ROOT)
    assert "takes slope in 0.01 to 1, found" in reuse(found, 0.95).unusable


@pytest.mark.parametrize("form", FORMS.values(), ids=list(FORMS))
def test_one_standard_error_gives_the_prediction_band_back(form):
    draw = np.random.default_rng(14)
    found = calibrate(measured(cubic_law, 20, (0.1, 0.01, 0.0), draw), form)
    told_back, at = reuse(found, 0.95), np.linspace(5.0, 30.0, 9)
    growth = told_back.parameters.get(f"{form.coefficients[1]}_u", 0.0)
    u = np.hypot(told_back.parameters["standard_error"], growth * form.variable(at))
    band = found.band(at, np.zeros(9), 0.95)

    assert np.all(np.abs(1.959964 * u / band.prediction_half_width - 1) <= told_back.off + 0.01)
    assert told_back.least <= u.min() * (1 + told_back.off)


def test_weighed_water_is_carried_to_volume():
    """Own errors against general linear propagation; the shared one moves samples by w u(rho)."""
    water, density = np.array([0.05, 0.20, 0.30]), np.array([1400.0, 1400.0, np.nan])
    found = volumetric(
        Waters(gravimetric=np.ones(3, dtype=bool), water=water, water_u=np.full(3, 0.005),
               density=density, density_u=np.array([50.0, 50.0, 0.0]), density_of_all=1300.0,
               density_of_all_u=30.0,
               shared={"water_content": 0.0, "gravimetric_water_content": 0.0,
                       "bulk_density": 0.0})
    )  # fmt: skip
    for k in (0, 1):
        theta = uncertainties.ufloat(water[k], 0.005) * uncertainties.ufloat(1400, 50) / 1000
        assert found.water_content[k] == pytest.approx(theta.n)
        assert found.water_content_u[k] == pytest.approx(theta.s)
    assert found.water_content[2] == pytest.approx(0.39)
    assert found.water_content_u[2] == pytest.approx(1.3 * 0.005)
    assert found.shared["bulk_density"] == pytest.approx([0.0, 0.0, 0.30 * 0.03])


def test_pairs_without_uncertainty_are_said():
    few = exact(PLAIN, root_law(PLAIN))
    assert {"calibration-unstated", "calibration-scope"} <= codes(few)
    assert "calibration-unstated" not in codes(levelled([0.05, 0.12, 0.2, 0.3, 0.4], range(5)))
