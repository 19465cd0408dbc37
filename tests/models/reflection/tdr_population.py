"""Probes, cables and soils at random, simulated by chain matrices, for what bands must hold."""

from dataclasses import dataclass

import numpy as np
from scipy.constants import epsilon_0, speed_of_light
from scipy.stats import binom

from models.errors import ParameterError
from models.reflection.tdr.bench import Calibration, Description, Record, prepare
from models.reflection.tdr.probe import Head
from models.reflection.tdr.record import traces, window_axis
from tests.models.reflection.tdr_records import chain, soil, water

CABLES = {"thin": (0.66, 0.05, 1e-4), "low_loss": (0.83, 0.012, 4e-5)}
"""Speed over that of light; ohm/m; ohm s^0.5/m."""
AIR = lambda s: 1.0006 + 0 * s  # noqa: E731
CALIBRATION_WATER = lambda s: water(s) + 5e-4 / (s * epsilon_0)  # noqa: E731
KINDS = ("sand", "loam", "clay")


@dataclass(frozen=True)
class Setup:
    """A probe on its cable, as it truly is."""

    length: float
    rods: float
    head: tuple[float, float, float]
    """Impedance in air, ohm; permittivity; length, m."""
    cable: tuple[float, float, float]
    cable_length: float
    rise: float
    noise: float
    points: int

    @property
    def filled_head(self):
        impedance, permittivity, length = self.head
        return Head(impedance / permittivity**0.5, length * permittivity**0.5 / speed_of_light)


def setup_at_random(rng):
    """Rods of 0.1 to 0.3 m, 3 to 30 m of cable, noise of 0.001 to 0.01."""
    return Setup(
        length=rng.uniform(0.1, 0.3),
        rods=rng.uniform(160, 200),
        head=(rng.uniform(120, 190), rng.uniform(2.2, 3.5), rng.uniform(0.025, 0.06)),
        cable=CABLES[rng.choice(list(CABLES))],
        cable_length=float(np.exp(rng.uniform(np.log(3), np.log(30)))),
        rise=rng.uniform(120e-12, 250e-12),
        noise=float(np.exp(rng.uniform(np.log(1e-3), np.log(1e-2)))),
        points=int(rng.choice([512, 1024, 2048])),
    )


def soil_at_random(rng, kind):
    """Permittivity as a function of s, and conductivity, of a soil in a square-root law."""
    porosity, solid, warmth = rng.uniform(0.38, 0.5), rng.normal(4.7, 0.4), rng.uniform(5, 35)
    clay = ()
    if kind == "sand":
        theta, per_theta = rng.uniform(0.03, 0.35), rng.uniform(0, 0.05)
    elif kind == "loam":
        theta, per_theta = rng.uniform(0.08, 0.42), rng.uniform(0.03, 0.25)
        clay = ((rng.uniform(0, 2), rng.uniform(3e7, 1e8)),)
    else:
        theta, per_theta = rng.uniform(0.15, 0.45), rng.uniform(0.1, 0.35)
        much = rng.uniform(0.3, 1)
        clay = ((much * rng.uniform(5, 15), rng.uniform(2e7, 8e7)),
                (much * rng.uniform(2, 6), rng.uniform(2e8, 5e8)))  # fmt: skip
    theta = min(theta, porosity - 0.01)
    return soil(theta, theta * per_theta, porosity, solid, warmth, clay), theta * per_theta


def sections_of(s, medium, setup):
    """Cable, head and rods: (impedance, gamma times length)."""
    speed, direct, skin = setup.cable
    length = setup.cable_length
    series = length * (np.sqrt(direct**2 + s * skin**2) + s * 50.0 / (speed * speed_of_light))
    shunt = length * s / (50.0 * speed * speed_of_light)
    head = setup.filled_head
    index = np.sqrt(medium(s))
    return [
        (np.sqrt(series / shunt), np.sqrt(series * shunt)),
        (head.impedance * np.ones_like(s), s * head.delay),
        (setup.rods / index, s * index * setup.length / speed_of_light),
    ]


def drawn(medium, setup, rng, count=1, end="open"):
    """Traces of a medium with the noise of the setup, which they state."""
    begin = round(setup.cable_length / setup.cable[0] - 0.40, 2)
    window = max(1.2 + 10.7 * setup.length, 2.0) + 0.02 * setup.cable_length
    start, gap = window_axis(begin, window, setup.points)
    every = max(int(np.ceil(gap / 20e-12)), 1)
    fine = gap / every
    size = 1 << int(np.ceil(np.log2(2.0 * (start + gap * setup.points) / fine)))
    period = size * fine
    damping = 14.0 / period
    used = min(size // 2, int(18e9 * period))
    s = damping + 2j * np.pi * np.arange(used) / period
    first = int(start // fine)
    step = np.exp(np.square(s * setup.rise / 2.5631031) / 2 + s * (start - first * fine)) / s
    spectrum = np.zeros(size // 2 + 1, dtype=complex)
    spectrum[:used] = step * chain(s, sections_of(s, medium, setup), end=end)
    wave = np.fft.irfft(spectrum, size) / fine
    rho = wave[first : first + every * setup.points : every]
    rho = rho * np.exp(damping * (start + gap * np.arange(setup.points)))
    noise = rng.normal(0.0, setup.noise, (count, rho.size))
    return Record(traces(start, gap, rho + noise, setup.noise))


def calibrated_setup(rng):
    """A setup at random and its bench from air, water and a short, each with its own noise.

    Another one where the rods are too short for the rise of the step to be told apart in air.
    """
    while True:
        setup = setup_at_random(rng)
        given = Description(length=setup.length, impedance=setup.rods,
                            cable_length=setup.cable_length)  # fmt: skip
        calibration = Calibration(
            air=drawn(AIR, setup, rng),
            water=drawn(CALIBRATION_WATER, setup, rng),
            short=drawn(AIR, setup, rng, end="short"),
            water_temperature=20.0,
        )
        try:
            return setup, prepare(given, calibration)
        except ParameterError as error:
            assert "no end reflection" in str(error)  # noqa: PT017


def fewest(count, share=0.93, chance=1e-3):
    """Of ``count``, so many are inside if ``share`` are in the long run, but for bad luck."""
    return int(binom.ppf(chance, count, share))


def most(count, share=0.97, chance=1e-3):
    """The same, from above."""
    return int(binom.ppf(1 - chance, count, share))
