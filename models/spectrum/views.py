"""The same spectrum in four views: permittivity, modulus, admittance and impedance of the cell.

modulus M = 1 / eps; admittance Y = j w C0 eps; impedance Z = 1 / Y, with C0 the capacitance of the
empty cell. As complex numbers under exp(+j w t): the imaginary parts of permittivity and impedance
of a lossy capacitor are below zero, those of modulus and admittance above.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np

from models.conductivity.loss import VACUUM_PERMITTIVITY
from models.relation import Array, ComplexArray

UNIT_CUBE = VACUUM_PERMITTIVITY
"""F, of the empty cell where none is given: a cube of 1 m between opposite faces. Its conductance
in S is then the conductivity in S/m."""


@dataclass(frozen=True, slots=True, kw_only=True)
class View:
    """One quantity that a spectrum can be shown as."""

    key: str
    symbol: str
    unit: str
    downward: bool
    """The imaginary part of a lossy material is below zero, and is drawn turned over."""


VIEWS: Mapping[str, View] = MappingProxyType({view.key: view for view in (
    View(key="permittivity", symbol="eps", unit="1", downward=True),
    View(key="modulus", symbol="M", unit="1", downward=False),
    View(key="impedance", symbol="Z", unit="Ohm", downward=True),
    View(key="admittance", symbol="Y", unit="S", downward=False),
)})  # fmt: skip


@np.errstate(all="ignore")
def seen_as(
    view: str, permittivity: ComplexArray, frequency: Array, cell: float = UNIT_CUBE
) -> ComplexArray:
    """A permittivity spectrum in that view, elementwise.

    permittivity: eps' - j eps''. frequency: Hz. cell: capacitance of the empty cell, F.
    """
    admittance: ComplexArray = 2j * np.pi * frequency * cell * permittivity
    values: Mapping[str, ComplexArray] = {
        "permittivity": permittivity,
        "modulus": 1 / permittivity,
        "admittance": admittance,
        "impedance": 1 / admittance,
    }
    return values[view]


@np.errstate(all="ignore")
def permittivity_from(
    view: str, values: ComplexArray, frequency: Array, cell: float = UNIT_CUBE
) -> ComplexArray:
    """Permittivity eps' - j eps'' from any of the views; the inverse of ``seen_as``."""
    if view in {"modulus", "impedance"}:
        values = 1 / values
    if view in {"admittance", "impedance"}:
        values = values / (2j * np.pi * frequency * cell)
    return values


@np.errstate(all="ignore")
def sensitivity(
    view: str, permittivity: ComplexArray, frequency: Array, cell: float = UNIT_CUBE
) -> ComplexArray:
    """Derivative of the view by the permittivity, elementwise."""
    empty = np.asarray(2j * np.pi * frequency * cell, dtype=np.complex128)
    turned = np.asarray(-1 / np.square(permittivity), dtype=np.complex128)
    values: Mapping[str, ComplexArray] = {
        "permittivity": np.ones_like(permittivity),
        "modulus": turned,
        "admittance": empty,
        "impedance": turned / empty,
    }
    return values[view]
