"""Wiener (1912), Hashin and Shtrikman (1962): what no lossless mixture can leave.

They hold for real permittivities only. A measured apparent permittivity outside them means a
wrong porosity, an air gap, or loss that the apparent permittivity carries.
"""

import numpy as np

from models.mixing.phases import Numbers, Phases, spheres_in_medium
from models.relation import Array

Bounds = tuple[Array, Array]
"""Lower and upper."""


@np.errstate(all="ignore")
def wiener(phases: Phases) -> Bounds:
    """Layers across the field, and layers along it, elementwise.

    phases: volume fraction and real permittivity of each; fractions sum to one.
    """
    across = 1 / sum(f / eps for f, eps in phases)
    along = sum(f * eps for f, eps in phases)
    return np.asarray(across), np.asarray(along)


@np.errstate(all="ignore")
def hashin_shtrikman(phases: Phases) -> Bounds:
    """The bounds of every isotropic mixture, elementwise; NaN where a fraction is negative.

    phases: volume fraction and real permittivity of each; fractions sum to one.

    A phase that is not there must not set the bound: truly dry soil has tighter ones than soil
    with a trace of water.
    """
    smallest = _extreme(phases, np.inf, np.minimum)
    largest = _extreme(phases, -np.inf, np.maximum)
    impossible = sum(np.asarray(f) < 0 for f, _ in phases) > 0
    lower, upper = spheres_in_medium(phases, smallest), spheres_in_medium(phases, largest)
    return np.where(impossible, np.nan, lower), np.where(impossible, np.nan, upper)


def _extreme(phases: Phases, absent: float, choose: np.ufunc) -> Numbers:
    """Least or greatest permittivity among the phases that are there; NaN fractions stay NaN."""
    extreme: Numbers = absent
    for f, eps in phases:
        extreme = choose(extreme, np.where(np.asarray(f) == 0, absent, eps))
    return extreme
