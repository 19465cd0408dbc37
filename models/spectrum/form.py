"""The form of a permittivity spectrum: which terms it has, its parameters, value and derivatives.

eps = eps_inf + sum strength_k g_k(w) + sigma / (j w eps0), and, where electrodes polarise, in
series with it a constant phase element: 1 / eps_seen = 1 / eps + (j w / w1)^m / E. A perfect
capacitor (m = 0) raises the permittivity seen with 1 / f^2, the series form that conduction makes
steep; w1 is 2 pi 1 MHz.
"""

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from models.conductivity.loss import VACUUM_PERMITTIVITY
from models.errors import Complaint, ParameterError
from models.relation import Array, ComplexArray
from models.spectrum.relaxation import RELAXATIONS, dispersion

ELECTRODE_FREQUENCY = 2 * np.pi * 1e6
"""rad/s, at which the electrode's permittivity is stated."""
MOST_TERMS = 4
OUTSIDE = 30.0
"""How far outside the band a term may relax, as a factor of frequency."""


@dataclass(frozen=True, slots=True)
class Slot:
    """One parameter of a form: its name, the term it belongs to, and where it may lie."""

    name: str
    low: float
    high: float
    logarithmic: bool = False
    """It is fitted as its logarithm, and its band is even on that scale."""
    term: int | None = None

    @property
    def label(self) -> str:
        """The name, with the number of its term, counted from 1."""
        return self.name if self.term is None else f"{self.name}_{self.term + 1}"


@dataclass(frozen=True)
class Form:
    """Kinds of the terms, the slowest first, and what stands beside them."""

    terms: tuple[str, ...] = ()
    conduction: bool = True
    electrode: bool = False

    def __post_init__(self) -> None:
        """Raises UnknownName for a kind that is none, ParameterError for too many terms."""
        for kind in self.terms:
            RELAXATIONS[kind]
        if len(self.terms) > MOST_TERMS:
            detail = f"expected at most {MOST_TERMS} terms, found {len(self.terms)}"
            raise ParameterError("model", [Complaint("terms", detail, ("model", "terms"))])

    @cached_property
    def slots(self) -> tuple[Slot, ...]:
        """Every parameter, in the order of a vector."""
        slots = [Slot("infinite_permittivity", 1.0, 1e3)]
        for k, kind in enumerate(self.terms):
            slots += [Slot("relaxation_strength", 1e-9, 1e9, logarithmic=True, term=k),
                      Slot("relaxation_time", 1e-14, 1e2, logarithmic=True, term=k)]  # fmt: skip
            slots += [
                Slot(s.name, s.low, s.high, s.logarithmic, k) for s in RELAXATIONS[kind].shapes
            ]
        if self.conduction:
            slots.append(Slot("bulk_conductivity", 0.0, 1e3))
        if self.electrode:
            slots += [Slot("electrode_permittivity", 1e-3, 1e12, logarithmic=True),
                      Slot("electrode_exponent", 0.0, 0.5)]  # fmt: skip
        return tuple(slots)

    def bounds(self, lowest: float, highest: float) -> tuple[Array, Array]:
        """Lower and upper ends of a vector, for a band between two frequencies, Hz.

        A relaxation further outside the band than ``OUTSIDE`` would leave no trace of its own:
        below, it is conduction; above, it is the infinite permittivity.
        """
        low, high = (
            np.array([np.log(end) if s.logarithmic else end for s, end in ends])
            for ends in (((s, s.low) for s in self.slots), ((s, s.high) for s in self.slots))
        )
        times = [i for i, slot in enumerate(self.slots) if slot.name == "relaxation_time"]
        low[times] = np.log(1 / (2 * np.pi * highest * OUTSIDE))
        high[times] = np.log(OUTSIDE / (2 * np.pi * lowest))
        return low, high

    @property
    def title(self) -> str:
        """The form in a few words."""
        parts = [*self.terms] or ["constant"]
        parts += ["conduction"] if self.conduction else []
        parts += ["electrode polarisation"] if self.electrode else []
        return " + ".join(parts)

    def place(self, name: str, term: int | None = None) -> int:
        """Where a parameter stands in a vector."""
        return next(i for i, s in enumerate(self.slots) if (s.name, s.term) == (name, term))

    def values(self, vector: Array) -> Array:
        """A vector with its logarithms undone, in SI."""
        logarithmic = np.array([slot.logarithmic for slot in self.slots])
        return np.where(logarithmic, np.exp(np.where(logarithmic, vector, 0.0)), vector)

    def vector(self, values: Array) -> Array:
        """The vector of values in SI; the inverse of ``values``."""
        logarithmic = np.array([slot.logarithmic for slot in self.slots])
        return np.where(logarithmic, np.log(np.where(logarithmic, values, 1.0)), values)


@np.errstate(all="ignore")
def evaluate(form: Form, vector: Array, frequency: Array) -> tuple[ComplexArray, ComplexArray]:
    """Permittivity eps' - j eps'' of a form, and its derivatives by every entry of the vector.

    vector: as ``form.slots``, logarithms where a slot says so. frequency: shape (n,), Hz.
    Returns shapes (n,) and (n, parameters).
    """
    w = 2 * np.pi * frequency
    rows: list[ComplexArray] = [np.ones(w.shape, complex)]
    eps = np.full(w.shape, vector[0], complex)
    at = 1
    for kind in form.terms:
        count = len(RELAXATIONS[kind].shapes)
        strength, log_time = np.exp(vector[at]), vector[at + 1]
        g, slopes = dispersion(kind, w, log_time, tuple(vector[at + 2 : at + 2 + count]))
        eps = eps + strength * g
        rows += [strength * g, *(strength * slopes)]
        at += 2 + count
    if form.conduction:
        conducting = per_conductivity(w)
        eps = eps + vector[at] * conducting
        rows.append(conducting)
        at += 1
    derivatives = np.array(rows)
    if form.electrode:
        eps, derivatives = _behind_electrodes(eps, derivatives, w, vector[at:])
    return eps, derivatives.T


def material(form: Form, vector: Array) -> tuple[Form, Array]:
    """The same form without its electrodes, and its vector: what lies behind them."""
    bare = replace(form, electrode=False)
    return bare, vector[: len(bare.slots)]


def per_conductivity(angular_frequency: Array) -> ComplexArray:
    """What each S/m of conductivity adds to the permittivity eps' - j eps'', 1 / (S/m)."""
    return np.asarray(-1j / (angular_frequency * VACUUM_PERMITTIVITY), dtype=np.complex128)


def _behind_electrodes(
    eps: ComplexArray, derivatives: ComplexArray, w: Array, electrode: Array
) -> tuple[ComplexArray, ComplexArray]:
    log_w = np.log(w / ELECTRODE_FREQUENCY) + 0.5j * np.pi
    hindrance = np.exp(electrode[1] * log_w - electrode[0])
    share = 1 / (1 + eps * hindrance)
    by_hindrance = -np.square(eps * share)
    own = [-hindrance * by_hindrance, hindrance * log_w * by_hindrance]
    return eps * share, np.array([*(derivatives * np.square(share)), *own])


def without_electrodes(permittivity: ComplexArray, frequency: Array, log_size: float,
                       exponent: float) -> ComplexArray:  # fmt: skip
    """The permittivity behind electrodes that polarise, from the one that is seen."""
    log_w = np.log(2 * np.pi * frequency / ELECTRODE_FREQUENCY) + 0.5j * np.pi
    behind: ComplexArray = 1 / (1 / permittivity - np.exp(exponent * log_w - log_size))
    return behind
