"""Simulated truth: the 95 % band holds it about 95 % of the time, for every mixing model."""

import numpy as np
import pytest
from scipy.constants import epsilon_0

from models.estimate import Query, estimate, prepare
from models.estimate.own.discrepancy import Setting, model_uncertainty
from models.estimate.permittivity import permittivity_of
from models.estimate.surroundings import surroundings_of, water_inputs
from models.mixing import MIXING_MODELS
from models.readings import read
from models.soil.description import describe
from tests.models.soils import basis_for

DRAWS = 20_000
PERMITTIVITY_U, TEMPERATURE_U = 0.02, 0.5  # relative; Cel
LOSS = 1.0


def simulate(basis, truth, rng, *, error=None):
    """Readings of soils whose truth is known: every input and the model itself astray by its u."""
    model, query = basis.model, basis.query
    warmth = rng.uniform(6.0, 30.0, truth.size)
    frequency = query.probe["frequency"]
    values = {
        name: value + basis.uncertainties.get(name, 0.0) * rng.standard_normal(truth.size)
        if name in basis.uncertainties
        else value
        for name, value in basis.values.items()
    }
    conductivity = np.full(truth.size, 10 * LOSS * 2 * np.pi * frequency * epsilon_0)
    columns = {"temperature": warmth}
    if "loss" in basis.takes:
        columns["bulk_conductivity"] = conductivity
    blank = read({"apparent_permittivity": np.full(truth.size, 10.0), **columns}, {}, {})
    around = surroundings_of(blank, basis)
    supplied = {
        name: given.value
        + np.hypot(given.per_reading, given.shared) * rng.standard_normal(truth.size)
        for name, given in water_inputs(basis, around, truth.size, blank.flags.copy()).items()
    }
    if "frequency" in basis.takes:
        supplied["frequency"] = frequency
    if "loss" in basis.takes:
        found = permittivity_of(blank, "apparent", around.frequency, query.probe, correct=False)
        supplied["loss"] = found.loss
    if error is None:
        clean = model.to_permittivity(truth, **values | supplied)
        soil = query.soil.values
        at = Setting(clean, truth, around.frequency, warmth, np.zeros(truth.size), None,
                     soil["clay"], soil["organic_matter"])  # fmt: skip
        error = model_uncertainty(model, at)
    shown = model.to_permittivity(truth + error * rng.standard_normal(truth.size),
                                  **values | supplied)  # fmt: skip
    noise = PERMITTIVITY_U * shown
    columns["temperature"] = warmth + TEMPERATURE_U * rng.standard_normal(truth.size)
    columns[f"{model.permittivity}_permittivity"] = shown + noise * rng.standard_normal(truth.size)
    columns[f"{model.permittivity}_permittivity_u"] = noise
    columns["temperature_u"] = np.full(truth.size, TEMPERATURE_U)
    return read(columns, {}, {})


def covered(basis, readings, truth):
    answer = estimate(readings, basis).columns
    known = np.isfinite(answer["water_content"])
    inside = (answer["water_content_lower"] <= truth) & (truth <= answer["water_content_upper"])
    return np.mean(inside[known]), np.mean(known)


def columns_for(model):
    extra = {"bulk_conductivity"} if any(p.name == "loss" for p in model.parameters) else set()
    return {f"{model.permittivity}_permittivity", "temperature"} | extra


@pytest.mark.parametrize("key", MIXING_MODELS)
def test_the_band_covers_simulated_truth(key):
    model = MIXING_MODELS[key]
    basis = basis_for(key, columns=columns_for(model))
    rng = np.random.default_rng(5)
    low, high = (0.30, 0.65) if model.soils == "organic" else (0.14, 0.36)
    truth = rng.uniform(low, high, DRAWS)
    share, known = covered(basis, simulate(basis, truth, rng), truth)
    assert known > 0.99
    # Below 0.3 GHz in clay a band reaches down for what this simulation does not do to it.
    assert 0.93 < share < (0.97 if basis.query.probe["frequency"] >= 3e8 else 0.99)


@pytest.mark.parametrize("key", ["topp-1980", "crim", "roth-1990"])
@pytest.mark.parametrize("probability", [0.68, 0.90, 0.99])
def test_other_coverage_probabilities_hold_as_well(key, probability):
    basis = basis_for(key, probability=probability)
    rng = np.random.default_rng(6)
    truth = rng.uniform(0.14, 0.36, DRAWS)
    share, _ = covered(basis, simulate(basis, truth, rng), truth)
    assert abs(share - probability) < 0.02


@pytest.mark.parametrize("key", ["topp-1980", "crim"])
def test_a_stated_standard_error_replaces_the_models_own(key):
    basis = basis_for(key, standard_error=0.005)
    rng = np.random.default_rng(7)
    truth = rng.uniform(0.14, 0.36, DRAWS)
    share, _ = covered(basis, simulate(basis, truth, rng, error=0.005), truth)
    assert 0.93 < share < 0.97


@pytest.mark.parametrize("key", ["topp-1980", "crim", "roth-1990", "power-law"])
@pytest.mark.parametrize("truth", [0.005, 0.02, 0.44, 0.465])
def test_near_dry_and_near_saturated_the_band_still_covers(key, truth):
    basis = basis_for(key)
    rng = np.random.default_rng(8)
    truths = np.full(DRAWS, truth)
    share, known = covered(basis, simulate(basis, truths, rng), truths)
    assert known > 0.90  # an error of the model may leave a permittivity below that of vacuum
    assert share > 0.92


LAW = MIXING_MODELS["topp-1980"]


@pytest.mark.parametrize("clay", [0.15, 0.30, 0.60, None])
@pytest.mark.parametrize(
    "key",
    ["topp-1980", "ledieu-1986", "malicki-1996", "curtis-2001", "power-law", "crim", "roth-1990",
     "mironov-2009", "de-loor-1968", "jacobsen-schjonning-1993"],
)  # fmt: skip
def test_at_50_mhz_in_clay_the_band_of_any_model_holds_the_truth(key, clay):
    """Read too wet by 0.07 to 0.17 m3/m3 (published laboratory pairs, ten soils), on a curve."""
    model = MIXING_MODELS[key]
    if clay is None and any(p.name == "clay" for p in model.parameters):
        return
    rng = np.random.default_rng(4)
    truth = rng.uniform(0.10, 0.40, DRAWS)
    shown = LAW.to_permittivity(truth + rng.uniform(0.07, 0.17, DRAWS))
    given = {"porosity": 0.55, "solid_permittivity": 4.7} | ({} if clay is None else {"clay": clay})
    spread = {"porosity": 0.03, "solid_permittivity": 0.6}
    columns = {f"{model.permittivity}_permittivity": shown, "temperature": np.full(DRAWS, 20.0)}
    basis = prepare(Query(
        model=key, soil=describe(None, given, spread), columns=frozenset(columns),
        probe={"frequency": 50e6, f"{model.permittivity}_permittivity_u": 0.3},
    ))  # fmt: skip
    share, known = covered(basis, read(columns, {}, {}), truth)
    assert known > 0.9
    assert share > 0.93
