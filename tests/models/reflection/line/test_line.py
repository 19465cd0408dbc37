"""Filled lines and cells: numbers worked out by hand, scikit-rf, and the way back."""

import numpy as np
import pytest
import skrf
from scipy.constants import speed_of_light

from models.errors import ParameterError
from models.reflection.line import cell, filled
from models.reflection.line.estimate import IDEAL, LineQuery, Read, estimate_line
from models.reflection.line.gaps import CoaxialGap
from models.reflection.sweep_flags import keys_of
from tests.models.reflection.sweep_records import WIDE, debye, noise, through_port

SOIL = debye(WIDE)
WET, CLAY = debye(WIDE, 40.0, 6.0, 2e-11, 0.2), debye(WIDE, 40.0, 12.0, 1e-9)
LENGTH = 0.03


def impedance(reflection):
    return 50.0 * (1 + reflection) / (1 - reflection)


@pytest.mark.parametrize(
    ("read", "eps"),
    [(-0.3, 3.448980), (-0.5 + 0.1j, 7.508876 - 4.378698j), (-0.6 - 0.05j, 15.012 + 4.828j)],
)
def test_an_endless_line_tells_its_permittivity(read, eps):
    assert filled.permittivity(np.array(read + 0j)) == pytest.approx(eps, rel=3e-5)


@pytest.mark.parametrize(
    ("end", "expected"), [("short", 6.174931 + 33.780432j), ("open", 1.482931 - 4.576569j)]
)
def test_a_cell_has_the_impedance_of_a_line(end, expected):
    read, _ = cell.reflection(np.array([15 - 2j]), np.array([500e6]), LENGTH, end)
    assert impedance(read)[0] == pytest.approx(expected, abs=1e-6)


@pytest.mark.parametrize("end", cell.ENDS)
def test_a_cell_is_the_line_of_scikit_rf(end):
    axis = skrf.Frequency.from_f(WIDE, unit="hz")
    gamma = 2j * np.pi * WIDE * np.sqrt(SOIL) / speed_of_light
    medium = skrf.media.DefinedGammaZ0(frequency=axis, gamma=gamma, z0=50 / np.sqrt(SOIL))
    ended = medium.line(LENGTH, "m") ** getattr(medium, end)()
    ended.renormalize(50.0)
    read, _ = cell.reflection(SOIL, WIDE, LENGTH, end)
    np.testing.assert_allclose(read, ended.s[:, 0, 0], rtol=1e-9)


def test_both_ends_give_permittivity_and_permeability():
    reads = [cell.reflection(SOIL, WIDE, LENGTH, end)[0] for end in cell.ENDS]
    eps, mu = cell.from_both(reads[0], reads[1], WIDE, LENGTH)
    np.testing.assert_allclose(eps, SOIL, rtol=1e-11)
    np.testing.assert_allclose(mu, 1.0, rtol=1e-11)


def reads_of(ends, spread=0.0, seed=0, eps=SOIL, through=lambda true: true):
    generator = np.random.default_rng(seed)
    stated = np.full(WIDE.size, spread) if spread else None
    if not ends:
        true = {"endless": filled.reflection(eps)[0]}
    else:
        true = {end: cell.reflection(eps, WIDE, LENGTH, end)[0] for end in ends}
    return {
        name: Read(through(read) + noise(generator, WIDE.size, spread), stated)
        for name, read in true.items()
    }


ENDS = [(), ("open",), ("short",), ("short", "open")]


@pytest.mark.parametrize("ends", ENDS)
def test_there_and_back_is_the_identity(ends):
    found = estimate_line(LineQuery(frequency=WIDE, reads=reads_of(ends), length=LENGTH))
    np.testing.assert_allclose(found.estimate.permittivity[0], SOIL, rtol=1e-9)
    assert not found.estimate.conjugated


@pytest.mark.parametrize("ends", ENDS)
def test_the_other_convention_is_conjugated_once(ends):
    turned = {n: Read(np.conj(r.reflection)) for n, r in reads_of(ends).items()}
    found = estimate_line(LineQuery(frequency=WIDE, reads=turned, length=LENGTH))
    assert found.estimate.conjugated
    np.testing.assert_allclose(found.estimate.permittivity[0], SOIL, rtol=1e-9)


@pytest.mark.parametrize("ends", [(), ("open",), ("short", "open")])
def test_standards_and_air_before_the_sample_are_taken_out(ends):
    air = 0.05
    way = np.exp(-4j * np.pi * WIDE * air / speed_of_light)
    reads = reads_of(ends, through=lambda true: through_port(true * way, WIDE))
    standards = {n: Read(through_port(r + 0j * WIDE, WIDE)) for n, r in IDEAL.items()}
    query = LineQuery(frequency=WIDE, reads=reads, standards=standards, length=LENGTH, air=air)
    found = estimate_line(query).estimate
    np.testing.assert_allclose(found.permittivity[0], SOIL, rtol=1e-9)


@pytest.mark.parametrize("length", [0.01, 0.1])
def test_a_single_cell_finds_the_right_one_of_several_roots(length):
    for end in cell.ENDS:
        read, _ = cell.reflection(SOIL, WIDE, length, end)
        query = LineQuery(frequency=WIDE, reads={end: Read(read)}, length=length)
        np.testing.assert_allclose(estimate_line(query).estimate.permittivity[0], SOIL, rtol=1e-7)


@pytest.mark.parametrize(("ends", "draws"), [((), 200), (("short", "open"), 200), (("open",), 12)])
def test_bands_hold_the_truth(ends, draws):
    shares = []
    for seed in range(draws):
        reads = reads_of(ends, 5e-4, seed)
        found = estimate_line(LineQuery(frequency=WIDE, reads=reads, length=LENGTH)).estimate
        away = found.permittivity[0] - SOIL
        shares.append(((np.abs(away.real) <= 1.96 * found.band.real[0]).mean(),
                       (np.abs(away.imag) <= 1.96 * found.band.loss[0]).mean()))  # fmt: skip
    for share in np.mean(shares, axis=0):
        assert 0.93 <= share <= 0.97


@pytest.mark.parametrize("end", cell.ENDS)
@pytest.mark.parametrize("eps", [WET, SOIL, CLAY], ids=["wet", "moist", "clay"])
def test_a_single_cell_keeps_to_its_branch_in_noise(end, eps):
    """Roots come close where loss is high: the wrong one glides down with little loss."""
    shares = []
    for seed in range(2):
        reads = reads_of((end,), 3e-3, seed, eps)
        found = estimate_line(LineQuery(frequency=WIDE, reads=reads, length=LENGTH)).estimate
        away = found.permittivity[0] - eps
        shares += [(np.abs(away.real) <= 1.96 * found.band.real[0]).mean(),
                   (np.abs(away.imag) <= 1.96 * found.band.loss[0]).mean()]  # fmt: skip
    assert 0.92 <= np.mean(shares) <= 0.98


def test_noise_of_both_ends_is_told_by_what_they_leave():
    reads = {n: Read(r.reflection) for n, r in reads_of(("short", "open"), 5e-4, 3).items()}
    found = estimate_line(LineQuery(frequency=WIDE, reads=reads, length=LENGTH))
    assert found.noise_known
    assert found.noise == pytest.approx(5e-4, rel=0.2)


def test_an_uncertain_length_is_an_error_all_sweeps_share():
    reads = reads_of(("short", "open"))
    query = LineQuery(frequency=WIDE, reads=reads, length=LENGTH, length_u=1e-4)
    band = estimate_line(query).estimate.band
    # eps is found from impedance as well as length: never more than twice the relative error
    assert 0 < np.median(band.real_shared / SOIL.real) < 2 * 1e-4 / LENGTH


def test_practice_of_a_line_is_told_with_its_number():
    query = LineQuery(frequency=WIDE, reads=reads_of(()), length=0.01, grain_size=1e-3,
                      gap_width=2e-3)  # fmt: skip
    told = {f.key: f for f in estimate_line(query).estimate.findings[0]}
    assert not told["sample-thickness"].holds
    assert not told["grain-size"].holds
    assert told["grain-size"].value == pytest.approx(2.0)
    assert told["reflection-above-one"].holds


def test_more_than_all_that_comes_back_is_flagged():
    reads = {"endless": Read(np.full(WIDE.size, 1.2 + 0j))}
    found = estimate_line(LineQuery(frequency=WIDE, reads=reads)).estimate
    assert all("reflection-above-one" in keys_of(int(mask)) for mask in found.flags[0])


@pytest.mark.parametrize(
    ("true", "read"), [(10 - 1j, 8.32594 - 0.67529j), (25 - 5j, 16.37241 - 2.04699j)]
)
def test_air_along_the_conductors_of_a_7_mm_line_is_taken_out(true, read):
    gap = CoaxialGap(3.04e-3, 3.08e-3, 6.96e-3, 7.00e-3)
    assert gap.read(np.array(true)) == pytest.approx(read, abs=2e-5)
    assert gap.closed(np.array(read)) == pytest.approx(true, abs=1e-4)


def test_diameters_that_do_not_grow_are_refused():
    with pytest.raises(ParameterError, match="must grow"):
        CoaxialGap(3e-3, 2e-3, 6e-3, 7e-3)


def flags_of(reads):
    """Share of the points that carry each flag."""
    found = estimate_line(LineQuery(frequency=WIDE, reads=reads, length=LENGTH)).estimate
    keys = [keys_of(int(mask)) for mask in found.flags[0]]
    return {key: np.mean([key in point for point in keys]) for key in {k for p in keys for k in p}}


@pytest.mark.parametrize("spread", [0.0, 1e-3])
def test_ends_of_a_cell_that_were_mistaken_are_flagged_at_every_point(spread):
    both = reads_of(("short", "open"), spread=spread)
    assert "magnetic" not in flags_of(both)
    swapped = {"short": both["open"], "open": both["short"]}
    assert flags_of(swapped)["magnetic"] == 1
    open_twice = reads_of(("open",), spread=1e-4, seed=1)["open"]
    assert flags_of({"short": open_twice, "open": both["open"]})["magnetic"] == 1


def test_one_sweep_for_both_ends_is_refused():
    read = reads_of(("open",))["open"]
    with pytest.raises(ParameterError, match="open cell was read exactly like the short one"):
        estimate_line(LineQuery(frequency=WIDE, reads={"short": read, "open": read}, length=LENGTH))


@pytest.mark.parametrize("eps", [SOIL, WET, CLAY, np.full(WIDE.size, 3.0 - 0.01j)])
def test_a_short_that_is_an_open_end_is_flagged_at_every_point(eps):
    shorted, opened = (reads_of((end,), 1e-3, eps=eps)[end] for end in ("short", "open"))
    assert "not-shorted" not in flags_of({"short": shorted})
    assert flags_of({"short": opened})["not-shorted"] == 1


@pytest.mark.parametrize(
    ("turn", "eps"),
    [(np.asarray, SOIL), (np.asarray, WET), (np.asarray, CLAY), (np.conj, SOIL), (np.conj, CLAY)],
    ids=["moist", "wet", "clay", "moist-conjugated", "clay-conjugated"],
)
@pytest.mark.parametrize("length", [0.01, LENGTH])
def test_a_short_that_is_called_open_is_refused(turn, eps, length):
    read = turn(cell.reflection(eps, WIDE, length, "short")[0])
    query = LineQuery(frequency=WIDE, reads={"open": Read(read)}, length=length)
    with pytest.raises(ParameterError, match="this is a shorted end") as refused:
        estimate_line(query)
    assert [c.place for c in refused.value.complaints] == [("sample", "open")]


@pytest.mark.parametrize("sigma", [0.0, 0.05, 0.5, 1.0])
@pytest.mark.parametrize("static", [3.0, 15.0, 80.0])
@pytest.mark.parametrize("length", [0.01, 0.03, 0.1])
def test_an_open_cell_of_any_soil_is_taken_as_one(sigma, static, length):
    eps = debye(WIDE, static, 2.5, 1e-11, sigma)
    read = cell.reflection(eps, WIDE, length, "open")[0]
    query = LineQuery(frequency=WIDE, reads={"open": Read(read)}, length=length)
    assert np.isfinite(estimate_line(query).estimate.band.real).any()


def test_a_lossless_open_cell_of_the_other_convention_is_conjugated():
    """Its roots as sent have a loss of their own: the phase that rises decides."""
    eps = np.full(WIDE.size, 2.5 + 0j)
    read = np.conj(cell.reflection(eps, WIDE, 0.01, "open")[0])
    found = estimate_line(LineQuery(frequency=WIDE, reads={"open": Read(read)}, length=0.01))
    assert found.estimate.conjugated
    np.testing.assert_allclose(found.estimate.permittivity[0], eps, rtol=1e-6)
