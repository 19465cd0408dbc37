"""With stated noise, 95 of 100 bands hold the truth, at every frequency and in both parts."""

import numpy as np

from models.reflection.estimates import coverage_factor
from models.reflection.repeats import repeated
from models.reflection.tip.estimate import TipQuery, estimate_permittivity
from models.reflection.tip.sample import Sample
from tests.models.reflection.sweep_records import (
    TIP,
    debye,
    noise,
    standard,
    through_port,
    tip_reflection,
)

FREQUENCY = np.linspace(0.15e9, 6e9, 24)
SPREAD = 5e-4
FOUR = ("short", "air", "water25", "methanol25")
SOIL = np.stack([debye(FREQUENCY), debye(FREQUENCY, 5.0, 3.0, 20e-12, 0.001)])


def read_through(name):
    if name == "short":
        return through_port(-np.ones_like(FREQUENCY) + 0j, FREQUENCY)
    known = standard(name, None, FREQUENCY).known
    return through_port(tip_reflection(known.permittivity, FREQUENCY), FREQUENCY)


READ = {name: read_through(name) for name in FOUR}
SAMPLES = through_port(tip_reflection(SOIL, FREQUENCY), FREQUENCY)


def held(query, dof=np.inf):
    found = estimate_permittivity(query).estimate
    away = found.permittivity - SOIL
    k = coverage_factor(0.95, np.full(1, dof))
    return (np.abs(away.real) <= k * found.band.real).mean(), (
        np.abs(away.imag) <= k * found.band.loss
    ).mean()


def drawn(generator, names, **changes):
    count = FREQUENCY.size
    return TipQuery(
        frequency=FREQUENCY,
        standards=tuple(
            standard(n, READ[n] + noise(generator, count, SPREAD), FREQUENCY) for n in names
        ),
        samples=tuple(Sample(read=row + noise(generator, count, SPREAD)) for row in SAMPLES),
        **changes,
    )


def coverage(names, seeds=5, draws=40, **changes):
    """Over several seeds: no one of them is better than another."""
    shares = []
    for seed in range(seeds):
        generator = np.random.default_rng(seed)
        shares += [held(drawn(generator, names, **changes)) for _ in range(draws)]
    return np.mean(shares, axis=0)


def stated(names):
    return np.full((len(names), FREQUENCY.size), SPREAD)


def test_bands_from_four_standards_hold_the_truth_of_200_draws():
    for share in coverage(FOUR, standard_spread=stated(FOUR)):
        assert 0.93 <= share <= 0.97


def test_bands_from_three_standards_hold_the_truth_of_200_draws():
    three = FOUR[:3]
    shares = coverage(three, standard_spread=stated(three), model="radiating", geometry=TIP)
    for share in shares:
        assert 0.93 <= share <= 0.97


def test_noise_that_was_not_stated_is_taken_from_the_fourth_standard():
    generator = np.random.default_rng(5)
    found = estimate_permittivity(drawn(generator, FOUR))
    assert 0.6 * SPREAD < found.misfit.noise < 1.5 * SPREAD
    assert found.estimate.noise_known


def test_nothing_tells_the_noise_of_three_single_sweeps():
    generator = np.random.default_rng(5)
    found = estimate_permittivity(drawn(generator, FOUR[:3]))
    assert not found.estimate.noise_known


def test_repeats_tell_their_own_noise():
    generator = np.random.default_rng(3)
    count, shares = FREQUENCY.size, []
    for _ in range(60):
        read = [READ[n] for n in FOUR]
        sweeps = [repeated(np.stack([row + noise(generator, count, 2e-3) for _ in range(5)]))
                  for row in SAMPLES]  # fmt: skip
        query = TipQuery(
            frequency=FREQUENCY,
            standards=tuple(standard(n, r, FREQUENCY) for n, r in zip(FOUR, read, strict=True)),
            standard_spread=np.full((4, count), 1e-6),
            samples=tuple(Sample(read=s.mean, spread=s.spread) for s in sweeps),
        )
        shares.append(held(query, sweeps[0].degrees_of_freedom))
    for share in np.mean(shares, axis=0):
        assert 0.92 <= share <= 0.98


def test_repeats_that_move_together_count_as_so_many_repeats():
    generator = np.random.default_rng(3)
    apart = repeated(noise(generator, (5, 100), 1e-3))
    together = repeated(noise(generator, (5, 1), 1e-3) * np.ones(100))
    assert together.degrees_of_freedom == 8.0
    assert apart.degrees_of_freedom > 40.0
