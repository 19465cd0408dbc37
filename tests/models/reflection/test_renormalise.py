"""Another reference impedance: scikit-rf, numbers by hand, and noise that is drawn."""

import numpy as np
import pytest
import skrf

from models.reflection.renormalise import renormalised

GENERATOR = np.random.default_rng(11)


def passive(ports):
    """Random matrices of singular values below 1, shape (40, n, n)."""
    parts = GENERATOR.normal(size=(2, 40, ports, ports))
    matrices = parts[0] + 1j * parts[1]
    return 0.9 * matrices / np.linalg.svd(matrices, compute_uv=False)[:, :1, None]


@pytest.mark.parametrize("before", [(75.0,), (50.0, 75.0), (30.0, 30.0), (100.0, 12.5)])
@pytest.mark.parametrize("after", [50.0, 75.0])
def test_parameters_are_those_of_scikit_rf(before, after):
    s = passive(len(before))
    network = skrf.Network(f=np.arange(1.0, 41.0), s=s, z0=np.array(before), f_unit="GHz")
    network.renormalize(after)
    np.testing.assert_allclose(renormalised(s, np.array(before), after)[0], network.s, rtol=1e-9)


def test_a_match_of_75_ohm_reflects_a_fifth_in_50_ohm():
    found, _ = renormalised(np.zeros((1, 1, 1), dtype=complex), np.array([75.0]), 50.0)
    assert found[0, 0, 0] == pytest.approx((75 - 50) / (75 + 50))


def test_the_same_impedance_changes_nothing():
    s = passive(2)
    found, growth = renormalised(s, np.array([50.0, 50.0]), 50.0)
    np.testing.assert_allclose(found, s, rtol=1e-12)
    np.testing.assert_allclose(growth, 1.0, rtol=1e-12)


@pytest.mark.parametrize("before", [(75.0,), (75.0, 75.0), (50.0, 75.0)])
def test_noise_grows_as_draws_do(before):
    s, ports = passive(len(before))[:1], len(before)
    parts = 1e-6 * GENERATOR.normal(size=(2, 20_000, ports, ports))
    drawn = renormalised(s + parts[0] + 1j * parts[1], np.array(before), 50.0)[0]
    centre, growth = renormalised(s, np.array(before), 50.0)
    away = np.abs(drawn - centre)
    found = np.sqrt(np.mean(np.square(away)) / 2) / 1e-6
    # 20 000 draws tell a standard deviation to 0.5 % or better
    assert growth[0] == pytest.approx(found, rel=0.015)
