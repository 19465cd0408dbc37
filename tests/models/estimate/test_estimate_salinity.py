"""Pore water from readings whose truth is known: exact without noise, covered with noise."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.conductivity import TEMPERATURE_COMPENSATIONS
from models.conductivity.loss import conduction_loss
from models.estimate import Query, SalinityQuery, estimate, narrowed, prepare
from models.flags import slugs_of
from models.mixing.apparent import to_apparent
from models.mixing.joint import to_complex_permittivity
from models.mixing.physical import crim
from models.readings import read
from models.salinity import PORE_WATER_MODELS
from models.soil.description import describe
from models.water import kaatze_1989

DRAWS = 20_000
SOIL = describe(
    "loam",
    {"porosity": 0.47, "bulk_density": 1404.5, "clay": 0.2, "sand": 0.4,
     "solid_permittivity": 4.7},
    {"porosity": 0.01, "bulk_density": 30.0, "clay": 0.01, "sand": 0.03,
     "solid_permittivity": 0.2},
)  # fmt: skip
OWN = {
    "hilhorst-2000": {"offset": 4.1, "offset_u": 0.5},
    "waxman-smits-1968": {"cation_exchange_capacity": 1.0, "cation_exchange_capacity_u": 0.05},
}
COMPENSATION = TEMPERATURE_COMPENSATIONS["corwin-lesch-2005"]
COLUMNS = frozenset({"apparent_permittivity", "temperature", "bulk_conductivity"})


def basis_for(key, frequency, *, mixing="crim", error=0.012, own=None, **noise):
    return prepare(
        Query(
            model=mixing, soil=SOIL, columns=COLUMNS, standard_error=error,
            probe={"frequency": frequency, **noise},
            salinity=SalinityQuery(model=key, given=OWN.get(key, {}), standard_error=own),
        )
    )  # fmt: skip


def simulate(basis, theta, pore_25, warmth, rng=None):
    """Ka and bulk conductivity of soils with that water and salt; astray by every u where rng."""
    salinity, frequency = basis.salinity, basis.query.probe["frequency"]
    draw = rng.standard_normal if rng is not None else np.zeros

    def moved(values, spread):
        return {n: v + spread.get(n, 0.0) * draw(theta.size) if n in spread else v
                for n, v in values.items()}  # fmt: skip

    soil = {**salinity.bound.values, **basis.values}
    soil = moved(soil, {**salinity.bound.uncertainties, **basis.uncertainties})
    water, water_loss = kaatze_1989.parts(frequency, warmth)
    error = basis.query.standard_error or 0.0
    clean = crim.to_permittivity(
        theta + error * draw(theta.size),
        water_permittivity=to_apparent(water, water_loss),
        porosity=soil["porosity"], solid_permittivity=soil["solid_permittivity"],
    )  # fmt: skip
    factor = COMPENSATION.factor(warmth)
    factor = factor * (1 + COMPENSATION.relative_uncertainty(warmth) * draw(theta.size))
    supplied = {
        "water_content": theta, "real_permittivity": clean, "temperature": warmth,
        "frequency": frequency, "water_permittivity": water, "water_loss": water_loss,
    }  # fmt: skip
    takes = {n: supplied[n] for n in salinity.takes if n in supplied}
    own = salinity.query.standard_error or 0.0
    salt = pore_25 * np.exp(own * draw(theta.size))
    names = {p.name for p in salinity.model.parameters}
    parameters = {n: v for n, v in soil.items() if n in names} | takes
    if salinity.model.at == "25 Cel":
        bulk = salinity.model.to_bulk(salt, **parameters) / factor
    else:
        bulk = salinity.model.to_bulk(salt / factor, **parameters)
    return to_apparent(clean, conduction_loss(bulk, frequency)), bulk, warmth


def readings_of(permittivity, bulk, warmth, rng=None, noise=(0.0, 0.0, 0.0)):
    draw = rng.standard_normal if rng is not None else np.zeros
    permittivity_u, bulk_u, warmth_u = noise[0] * permittivity, noise[1] * bulk, noise[2]
    size = permittivity.size
    return read(
        {
            "apparent_permittivity": permittivity + permittivity_u * draw(size),
            "apparent_permittivity_u": permittivity_u,
            "bulk_conductivity": 10 * (bulk + bulk_u * draw(size)),
            "bulk_conductivity_u": 10 * bulk_u,
            "temperature": warmth + warmth_u * draw(size),
            "temperature_u": np.full(size, warmth_u),
        },
        {}, {},
    )  # fmt: skip


@pytest.mark.parametrize("key", [k for k in PORE_WATER_MODELS if k != "complex-refractive"])
@pytest.mark.parametrize("frequency", [50e6, 200e6, 1e9])
def test_without_noise_the_way_back_is_exact(key, frequency):
    rng = np.random.default_rng(2)
    theta, pore = rng.uniform(0.18, 0.42, 500), rng.uniform(0.02, 0.15, 500)
    basis = basis_for(key, frequency)
    sent = readings_of(*simulate(basis, theta, pore, rng.uniform(2.0, 40.0, 500), None))
    answer = estimate(sent, basis).columns
    known = np.isfinite(answer["pore_water_conductivity"])
    assert known.mean() > 0.9
    assert_allclose(answer["water_content"][known], theta[known], rtol=1e-9)
    assert_allclose(answer["pore_water_conductivity"][known], pore[known], rtol=1e-7)


@pytest.mark.parametrize("frequency", [100e6, 300e6, 1e9])
def test_water_and_salt_come_back_together_from_a_complex_index(frequency):
    """Ka and the conductivity of the same lossy soil, made by the complex mixing equation."""
    rng = np.random.default_rng(2)
    theta, pore = rng.uniform(0.15, 0.42, 500), rng.uniform(0.02, 0.3, 500)
    warmth = rng.uniform(2.0, 40.0, 500)
    answer, _ = _joint(theta, pore, warmth, frequency)
    known = np.isfinite(answer["pore_water_conductivity"])
    assert known.mean() > (0.6 if frequency < 2e8 else 0.99)
    assert_allclose(answer["water_content"][known], theta[known], rtol=1e-7)
    assert_allclose(answer["pore_water_conductivity"][known], pore[known], rtol=1e-6)


def _joint(theta, pore_25, warmth, frequency, mixing="complex-refractive", **noise):
    """Estimates of soils made by the complex refractive index: Ka, and conduction beside it."""
    basis = basis_for(
        "complex-refractive" if mixing == "complex-refractive" else None, frequency, mixing=mixing,
        error=None, **noise,
    )  # fmt: skip
    water, water_loss = kaatze_1989.parts(frequency, warmth)
    made = to_complex_permittivity(
        theta, pore_25 / COMPENSATION.factor(warmth), frequency,
        water_permittivity=water - 1j * water_loss, porosity=0.47, solid_permittivity=4.7,
    )  # fmt: skip
    seen = to_apparent(made.real, -made.imag)
    pure = to_complex_permittivity(
        theta, np.zeros(theta.size), frequency,
        water_permittivity=water - 1j * water_loss, porosity=0.47, solid_permittivity=4.7,
    )  # fmt: skip
    conduction = (pure.imag - made.imag) / conduction_loss(1.0, frequency)
    return estimate(readings_of(seen, conduction, warmth), basis).columns, basis


NOISE = (0.01, 0.02, 0.3)


@pytest.mark.parametrize("key", [k for k in PORE_WATER_MODELS if k != "complex-refractive"])
def test_the_band_covers_simulated_truth(key):
    rng = np.random.default_rng(5)
    theta, pore = rng.uniform(0.22, 0.40, DRAWS), rng.uniform(0.2, 0.5, DRAWS)
    basis = basis_for(key, 1e9, own=0.1)
    warmth = rng.uniform(6.0, 30.0, DRAWS)
    sent = readings_of(*simulate(basis, theta, pore, warmth, rng), rng, NOISE)
    answer = estimate(sent, basis).columns
    name = "pore_water_conductivity"
    known = np.isfinite(answer[name])
    assert known.mean() > 0.95
    inside = (answer[f"{name}_lower"] <= pore) & (pore <= answer[f"{name}_upper"])
    assert 0.93 < inside[known].mean() < 0.97
    bulk, _, _ = answer["bulk_conductivity_25"], None, None
    assert np.isfinite(bulk).all()


@pytest.mark.parametrize("frequency", [200e6, 1e9])
def test_the_joint_bands_of_water_and_salt_cover(frequency):
    rng = np.random.default_rng(9)
    theta, pore = rng.uniform(0.2, 0.40, DRAWS), rng.uniform(0.05, 0.3, DRAWS)
    warmth = rng.uniform(6.0, 30.0, DRAWS)
    basis = basis_for("complex-refractive", frequency, mixing="complex-refractive", error=0.0,
                      own=0.0)  # fmt: skip
    draw = rng.standard_normal
    u = basis.uncertainties
    soil = {"porosity": 0.47 + u["porosity"] * draw(DRAWS),
            "solid_permittivity": 4.7 + u["solid_permittivity"] * draw(DRAWS)}  # fmt: skip
    water, water_loss = kaatze_1989.parts(frequency, warmth)
    factor = COMPENSATION.factor(warmth)
    factor = factor * (1 + COMPENSATION.relative_uncertainty(warmth) * draw(DRAWS))
    made, pure = (
        to_complex_permittivity(theta, salt, frequency, water_permittivity=water - 1j * water_loss,
                                **soil)
        for salt in (pore / factor, np.zeros(DRAWS))
    )  # fmt: skip
    seen = to_apparent(made.real, -made.imag)
    conduction = (pure.imag - made.imag) / conduction_loss(1.0, frequency)
    answer = estimate(readings_of(seen, conduction, warmth, rng, NOISE), basis).columns
    for name, truth in (("water_content", theta), ("pore_water_conductivity", pore)):
        known = np.isfinite(answer[name])
        inside = (answer[f"{name}_lower"] <= truth) & (truth <= answer[f"{name}_upper"])
        assert known.mean() > 0.95
        assert 0.93 < inside[known].mean() < 0.97


def test_the_extract_follows_from_a_balance_of_salt():
    """theta .30, 4 dS/m, SP 45 %, 1.35 g/cm3: 4 x .30 / .6075 = 1.9753 dS/m, by hand."""
    soil = describe(None, {"bulk_density": 1350.0, "saturation_percentage": 0.45, "clay": 0.2}, {})
    basis = prepare(
        Query(model="topp-1980", soil=soil, columns=COLUMNS,
              salinity=SalinityQuery(model="hilhorst-2000"))
    )  # fmt: skip
    sent = readings_of(np.array([17.0]), np.array([0.06]), np.array([20.0]))
    answer = estimate(sent, basis).columns
    expected = answer["pore_water_conductivity"] * answer["water_content"] / (0.45 * 1.35)
    assert_allclose(answer["saturation_extract_conductivity"], expected, rtol=1e-12)


def test_a_saline_loam_at_100_mhz_is_read_too_wet_unless_corrected():
    """Loam with pore water of 6 dS/m: the bias uncorrected, beside the corrected one."""
    theta = np.array([0.15, 0.20, 0.25, 0.30])
    seen = {}
    for mixing in ("crim", "topp-1980", "complex-refractive"):
        answer, basis = _joint(theta, np.full(4, 0.6), np.full(4, 20.0), 100e6, mixing)
        seen[mixing] = answer["water_content"] - theta
        inside = (answer["water_content_lower"] <= theta) & (theta <= answer["water_content_upper"])
        assert inside.all()
        if mixing != "complex-refractive":
            raw = answer["water_content"] + answer["conduction_correction"] - theta
            assert np.all(np.abs(seen[mixing][2:]) < np.abs(raw[2:]))
        assert basis.salinity is not None
    assert_allclose(seen["complex-refractive"], 0.0, atol=2e-3)


@pytest.mark.parametrize("key", ["rhoades-1989", "rhoades-1976", "archie-1942"])
def test_a_warm_day_moves_neither_water_nor_salt(key):
    """10 to 30 Cel on constant water and salt, the model right."""
    warmth = 20.0 + 10.0 * np.sin(np.linspace(0.0, 2 * np.pi, 97))
    basis = basis_for(key, 1e9)
    constant = np.full(97, 0.28), np.full(97, 0.3)
    answer = estimate(readings_of(*simulate(basis, *constant, warmth, None)), basis).columns
    assert np.ptp(answer["water_content"]) < 0.004
    salt = answer["pore_water_conductivity"]
    assert np.ptp(salt) / salt.mean() < 0.02


@pytest.mark.parametrize(
    ("slug", "cells"),
    [
        ("too-dry-for-pore-water", (3.5, 0.01, 20.0)),
        ("offset-too-close", (6.0, 0.02, 20.0)),
        ("frozen", (12.0, 0.05, -0.5)),
    ],
)
def test_gates_keep_the_water_and_withhold_the_salt(slug, cells):
    basis = basis_for("hilhorst-2000", 1e9)
    answer = estimate(readings_of(*(np.array([c]) for c in cells)), basis)
    assert slug in slugs_of(int(answer.flags[0]))
    assert np.isfinite(answer.columns["water_content"][0])
    assert np.isnan(answer.columns["pore_water_conductivity"][0])
    assert np.isfinite(answer.columns["bulk_conductivity_25"][0])


def test_fresh_water_in_clay_is_below_what_the_surfaces_conduct():
    basis = basis_for("rhoades-1976", 1e9)
    answer = estimate(readings_of(*(np.array([c]) for c in (15.0, 0.01, 25.0))), basis)
    assert "below-surface-conduction" in slugs_of(int(answer.flags[0]))
    assert np.isnan(answer.columns["pore_water_conductivity"][0])


def test_errors_that_water_and_salt_share_are_added_before_they_are_squared():
    """Archie with n = m: sigma_w = sigma_b / theta^n, so d ln = -n d theta / theta exactly."""
    key, noise = "archie-1942", {"apparent_permittivity_u": 0.3}
    own = {"cementation_exponent": 2.0, "saturation_exponent": 2.0}
    soil = describe(None, {"porosity": 0.47}, {})
    basis = prepare(
        Query(
            model="crim", given={"solid_permittivity": 4.7}, soil=soil, columns=COLUMNS,
            standard_error=0.0, probe={"frequency": 1e9, **noise},
            salinity=SalinityQuery(model=key, given=own, standard_error=0.0),
        )
    )  # fmt: skip
    answer = estimate(readings_of(np.array([17.0]), np.array([0.001]), np.array([25.0])), basis)
    found = {n: v[0] for n, v in answer.columns.items()}
    del found["conduction_correction"]
    relative = found["water_content_u"] / found["water_content"]
    assert found["pore_water_conductivity_u"] / found["pore_water_conductivity"] == pytest.approx(
        2.0 * relative, rel=0.01
    )


@pytest.mark.parametrize("asked", [
    ("water_content",), ("pore_water_conductivity_lower", "water_content"),
    ("saturation_extract_conductivity", "bulk_conductivity_25_u"),
])  # fmt: skip
def test_what_is_not_asked_for_changes_nothing_of_the_rest(asked):
    basis = basis_for("rhoades-1989", 1e9, apparent_permittivity_u=0.3, temperature_u=0.5)
    rng = np.random.default_rng(5)
    readings = read(
        {"apparent_permittivity": rng.uniform(4, 40, 200), "temperature": rng.uniform(2, 35, 200),
         "bulk_conductivity": rng.uniform(0.05, 3, 200)}, {}, {},
    )  # fmt: skip
    whole, part = estimate(readings, basis), estimate(readings, narrowed(basis, asked))
    assert part.columns.keys() >= set(asked)
    for name, values in part.columns.items():
        np.testing.assert_array_equal(values, whole.columns[name], err_msg=name)
