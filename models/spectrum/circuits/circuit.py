"""Equivalent circuits of a cell, and the spectrum of a circuit: each from the other.

All branches lie in parallel in a cell whose empty capacitance is C0: the capacitor C0 eps_inf, the
resistor eps0 / (C0 sigma), and one branch a term, a capacitor C = C0 strength in series with

- Debye: the resistor tau / C;
- Cole and Cole: a constant phase element, Z = 1 / (Q (j w)^alpha), Q = C / tau^(1 - alpha);
- resonance: the resistor tau / C and the inductor 1 / (w0^2 C);

while a Davidson-Cole or Havriliak-Negami term is a ladder of Debye branches (``ladder``). Polarised
electrodes are a constant phase element in series with all of it.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from models.conductivity.loss import VACUUM_PERMITTIVITY
from models.relation import Array, ComplexArray
from models.spectrum.circuits.ladder import rungs
from models.spectrum.form import ELECTRODE_FREQUENCY, Form
from models.spectrum.views import UNIT_CUBE

RC, RLC, PHASE = "series-rc", "series-rlc", "series-c-phase-element"
UNITS: Mapping[str, str] = {
    "capacitance": "F", "resistance": "Ohm", "inductance": "H", "phase_element": "S s^exponent",
    "exponent": "1",
}  # fmt: skip


@dataclass(frozen=True, slots=True)
class Branch:
    """Elements in series: those of ``elements`` that its kind has; SI."""

    kind: str
    elements: Mapping[str, float]
    term: int = 0
    """Number of the term it stands for, from 0."""

    def impedance(self, w: Array) -> ComplexArray:
        """At angular frequencies, rad/s."""
        total: Any = 1 / (1j * w * self.elements["capacitance"])
        total = total + self.elements.get("resistance", 0.0)
        total = total + 1j * w * self.elements.get("inductance", 0.0)
        if "phase_element" in self.elements:
            total = total + (1j * w) ** -self.elements["exponent"] / self.elements["phase_element"]
        return np.asarray(total, dtype=np.complex128)


@dataclass(frozen=True, slots=True)
class Circuit:
    """A cell filled with a material, as lumped elements; SI."""

    cell: float
    """Capacitance of the empty cell, F."""
    capacitance: float
    """In parallel to everything: C0 eps_inf."""
    resistance: float = np.inf
    """In parallel to everything: of the direct current."""
    branches: tuple[Branch, ...] = ()
    electrode: Mapping[str, float] = field(default_factory=dict)
    """``phase_element`` and ``exponent`` in series with everything; empty: none."""

    @np.errstate(all="ignore")
    def impedance(self, frequency: Array) -> ComplexArray:
        """Of the whole circuit, Ohm; frequency in Hz."""
        w = 2 * np.pi * frequency
        admittance = 1j * w * self.capacitance + 1 / self.resistance
        for branch in self.branches:
            admittance = admittance + 1 / branch.impedance(w)
        total: Any = 1 / admittance
        if self.electrode:
            q, exponent = self.electrode["phase_element"], self.electrode["exponent"]
            total = total + 1 / (q * (1j * w) ** exponent)
        return np.asarray(total, dtype=np.complex128)


@dataclass(frozen=True, slots=True)
class Constants:
    """What a circuit says of the material: Debye terms for ladders, other terms as they were."""

    infinite_permittivity: float
    conductivity: float
    terms: tuple[tuple[str, Mapping[str, float]], ...]
    """Kind, and its parameters by name, SI."""


def circuit_of(form: Form, values: Array, cell: float = UNIT_CUBE) -> Circuit:
    """The circuit of a form.

    values: SI, as ``form.values`` gives them. cell: F.
    """
    named = {(slot.name, slot.term): float(v) for slot, v in zip(form.slots, values, strict=True)}
    branches: list[Branch] = []
    for k, kind in enumerate(form.terms):
        of_term = {name: v for (name, term), v in named.items() if term == k}
        branches += _branches(kind, of_term, k, cell)
    sigma = named.get(("bulk_conductivity", None), 0.0)
    electrode = {}
    if form.electrode:
        m = named["electrode_exponent", None]
        size = cell * named["electrode_permittivity", None] * ELECTRODE_FREQUENCY**m
        electrode = {"phase_element": size, "exponent": 1 - m}
    return Circuit(
        cell=cell,
        capacitance=cell * named["infinite_permittivity", None],
        resistance=VACUUM_PERMITTIVITY / (cell * sigma) if sigma > 0 else np.inf,
        branches=tuple(branches),
        electrode=electrode,
    )


def _branches(kind: str, values: Mapping[str, float], term: int, cell: float) -> list[Branch]:
    capacitance = cell * values["relaxation_strength"]
    time = values["relaxation_time"]
    resistor = {"capacitance": capacitance, "resistance": time / capacitance}
    if kind == "debye":
        return [Branch(RC, resistor, term)]
    if kind == "resonance":
        inductance = 1 / ((2 * np.pi * values["resonance_frequency"]) ** 2 * capacitance)
        return [Branch(RLC, {**resistor, "inductance": inductance}, term)]
    if kind == "cole-cole":
        alpha = values["alpha"]
        size = capacitance / time ** (1 - alpha)
        elements = {"capacitance": capacitance, "phase_element": size, "exponent": alpha}
        return [Branch(PHASE, elements, term)]
    shares, times = rungs(values.get("alpha", 0.0), values["beta"])
    return [
        Branch(RC, {"capacitance": share * capacitance,
                    "resistance": ratio * time / (share * capacitance)}, term)
        for share, ratio in zip(shares.tolist(), times.tolist(), strict=True)
    ]  # fmt: skip


def constants_of(circuit: Circuit) -> Constants:
    """The material that a circuit stands for; the inverse of ``circuit_of``, ladders opened."""
    return Constants(
        infinite_permittivity=circuit.capacitance / circuit.cell,
        conductivity=VACUUM_PERMITTIVITY / (circuit.cell * circuit.resistance),
        terms=tuple(_term(branch, circuit.cell) for branch in circuit.branches),
    )


def _term(branch: Branch, cell: float) -> tuple[str, Mapping[str, float]]:
    elements, capacitance = branch.elements, branch.elements["capacitance"]
    strength = {"relaxation_strength": capacitance / cell}
    if branch.kind == PHASE:
        alpha = elements["exponent"]
        time = (capacitance / elements["phase_element"]) ** (1 / (1 - alpha))
        return "cole-cole", {**strength, "relaxation_time": time, "alpha": alpha}
    time = elements["resistance"] * capacitance
    if branch.kind == RC:
        return "debye", {**strength, "relaxation_time": time}
    resonant = 1 / (2 * np.pi * np.sqrt(elements["inductance"] * capacitance))
    return "resonance", {**strength, "relaxation_time": time,
                         "resonance_frequency": float(resonant)}  # fmt: skip
