"""Spectra as the textbook writes them, and the simulated records with what they were made of."""

import csv
from pathlib import Path

import numpy as np
from scipy.constants import epsilon_0

from models.spectrum import spectrum_of

RECORDS = Path(__file__).parent / "records"
BAND = np.geomspace(1e7, 6e9, 60)


def relaxation(f, strength, tau, alpha=0.0, beta=1.0):
    return strength / (1 + (2j * np.pi * f * tau) ** (1 - alpha)) ** beta


def conduction(f, sigma):
    return -1j * sigma / (2 * np.pi * f * epsilon_0)


def loam(f):
    """A spread relaxation of interfaces, one of water, and conduction."""
    return 5 + relaxation(f, 12, 2e-9, 0.2) + relaxation(f, 15, 9e-12) + conduction(f, 0.05)


def record(name):
    rows = np.loadtxt(RECORDS / f"{name}.csv", delimiter=",", comments="#", skiprows=3)
    return spectrum_of(rows[:, 0], rows[:, 1], rows[:, 2])


def truths():
    lines = (RECORDS / "truth.csv").read_text("utf-8").splitlines()
    rows = csv.DictReader(line for line in lines if not line.startswith("#"))
    return {row["record"]: {k: float(v) for k, v in row.items() if k != "record"} for row in rows}


def spectrum(f, eps, u=None, random=None):
    """A spectrum of eps, with noise of standard deviation u in both parts, stated, where given."""
    if u is None:
        return spectrum_of(f, eps.real, -eps.imag)
    real = eps.real + u * random.standard_normal(len(f))
    loss = -eps.imag + u * random.standard_normal(len(f))
    return spectrum_of(f, real, loss, np.broadcast_to(u, f.shape), np.broadcast_to(u, f.shape))
