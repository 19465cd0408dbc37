"""Every mixing model takes a band and draws: columns of rows, and rows by draws."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.mixing import MIXING_MODELS
from models.uncertainty.distributions import Normal
from models.uncertainty.draws import Draws
from models.uncertainty.monte_carlo import simulate
from models.uncertainty.quantiles.reliability import Method, band
from tests.models.soils import basis_for, frequency_for

PERMITTIVITY = np.linspace(6.0, 26.0, 6)
RELAXED = {
    "water_permittivity": Normal(np.linspace(82.0, 77.0, 6), 0.4),
    "water_loss": Normal(np.linspace(4.0, 6.0, 6), 0.1),
    "loss": Normal(np.full(6, 0.5), 0.0),
}


@pytest.mark.parametrize("key", MIXING_MODELS)
def test_band_agrees_with_draws(key):
    basis = basis_for(key)
    given = {"permittivity": Normal(PERMITTIVITY, 0.02 * PERMITTIVITY)}
    given |= {name: RELAXED[name] for name in RELAXED if name in basis.takes}
    if "frequency" in basis.takes:
        given["frequency"] = Normal(np.full(6, frequency_for(basis.model)), 0.0)
    known = {name: u for name, u in basis.uncertainties.items() if name in basis.values}
    given |= {name: Normal(basis.values[name], u) for name, u in known.items()}
    words = {name: value for name, value in basis.values.items() if name not in known}

    def measurand(permittivity, **named):
        return basis.model.to_water_content(permittivity, **words | named)

    found, drawn = band(measurand, given), simulate(measurand, given, draws=Draws(2**14))
    half = 0.5 * (drawn.upper - drawn.lower)
    assert np.isfinite(half).all()
    assert not drawn.outside.any()
    assert (found.method != Method.DRAWS).all()
    assert_allclose((found.lower - drawn.lower) / half, 0.0, atol=0.025)
    assert_allclose((found.upper - drawn.upper) / half, 0.0, atol=0.025)
