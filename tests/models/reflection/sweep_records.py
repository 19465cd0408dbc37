"""Simulated sweeps with their truth, and ports and samples to simulate more with."""

import csv
from collections import defaultdict
from pathlib import Path

import numpy as np
from scipy.constants import epsilon_0

from models.reflection.tip.aperture import Aperture, Geometry
from models.reflection.tip.calibration import Standard
from models.reflection.tip.media import MEDIA, Known

RECORDS = Path(__file__).parent / "records"
TIP = Geometry(0.456e-3, 1.49e-3, 2.1)
WIDE = np.linspace(30e6, 6e9, 200)
LIQUIDS = {"water25": "water", "methanol25": "methanol", "ethanol25": "ethanol", "air": "air"}


def numbers(path):
    lines = path.read_text("utf-8").splitlines()
    return np.array(
        [[float(cell) for cell in line.split()] for line in lines if line[0] not in "!#"]
    )


def truths(folder):
    """Frequency and permittivity by medium, as the sweeps of a folder were made."""
    lines = (RECORDS / folder / "truth.csv").read_text("utf-8").splitlines()
    columns = defaultdict(list)
    for row in csv.DictReader(line for line in lines if not line.startswith("#")):
        eps = complex(float(row["real_permittivity"]), -float(row["imaginary_permittivity"]))
        columns[row["medium"]].append((float(row["frequency"]), eps))
    return {name: tuple(map(np.array, zip(*rows, strict=True))) for name, rows in columns.items()}


def tip_text(name):
    return (RECORDS / "tip" / f"{name}.s1p").read_text("utf-8")


def tip_sweep(name):
    rows = numbers(RECORDS / "tip" / f"{name}.s1p")
    return rows[:, 0], rows[:, 1] + 1j * rows[:, 2]


def two_port_sweep(name):
    rows = numbers(RECORDS / "two_port" / f"{name}.s2p")
    s = rows[:, 1::2] + 1j * rows[:, 2::2]
    return rows[:, 0], tuple(s.T)


def standard(name, read, frequency, *, exact=True):
    """One of the stored standards; exact: its medium is known without error."""
    if name == "short":
        return Standard(name, read)
    known = MEDIA[LIQUIDS[name]].known(frequency, 25.0)
    return Standard(name, read, Known(known.permittivity) if exact else known)


def port(frequency):
    """Error terms of an invented port: e00, e11, e10e01."""
    w = 2 * np.pi * frequency
    return (
        0.05 * np.exp(-0.30e-9j * w) + 0.02,
        0.08 * np.exp(-0.90e-9j * w + 0.4j),
        0.92 * np.exp(-1.5e-9j * w - 0.06 * np.sqrt(frequency / 1e9)),
    )


def through_port(true, frequency):
    e00, e11, tracking = port(frequency)
    return e00 + tracking * true / (1 - e11 * true)


def tip_reflection(permittivity, frequency, model="radiating", geometry=TIP):
    relative, _ = Aperture(model, geometry).admittance(permittivity, frequency)
    y = relative * 2j * np.pi * frequency * geometry.capacitance * 50.0
    return (1 - y) / (1 + y)


def noise(generator, size, spread):
    return spread * (generator.standard_normal(size) + 1j * generator.standard_normal(size))


def debye(frequency, static=25.0, infinite=5.0, time=9e-12, conductivity=0.03):
    w = 2 * np.pi * frequency
    return (
        infinite + (static - infinite) / (1 + 1j * w * time) - 1j * conductivity / (w * epsilon_0)
    )
