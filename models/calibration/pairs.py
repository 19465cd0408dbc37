"""Pairs of permittivity and water content, and what cannot be calibrated with."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.calibration.forms import Form
from models.errors import Complaint, ParameterError
from models.relation import Array

SPARE = 2
"""Pairs beyond the coefficients that the scatter takes at least."""
FEWEST = 4
"""Pairs that a line takes."""
DISTINCT = 2.0
"""Variance of the permittivities over that of their errors, below which nothing is to be seen."""


@dataclass(frozen=True, slots=True, eq=False)
class Shared:
    """An error that moves all pairs at once, by one standard uncertainty."""

    name: str
    water_content: Array
    """By how much it moves each pair, shape (n,), m3/m3."""
    permittivity: Array
    """The same of the permittivity."""

    @property
    def moves_water(self) -> bool:
        """Whether it is an error of water content; else of permittivity."""
        return bool(self.water_content.any())

    @property
    def most(self) -> float:
        """By how much it moves the pair that it moves most."""
        moved = self.water_content if self.moves_water else self.permittivity
        return float(np.abs(moved).max())


@dataclass(frozen=True, slots=True, eq=False)
class Pairs:
    """What was measured, one row a pair, shape (n,)."""

    permittivity: Array
    permittivity_u: Array
    """Of its own, standard; 0: exact or not stated."""
    water_content: Array
    """m3/m3."""
    water_content_u: Array
    level: NDArray[np.intp] | None = None
    """Which pairs are replicates of each other; None: nobody said."""
    shared: tuple[Shared, ...] = ()

    @property
    def count(self) -> int:
        """How many pairs there are."""
        return self.permittivity.size

    @property
    def stated(self) -> bool:
        """Whether any pair has an uncertainty of its own."""
        return bool(self.permittivity_u.any() or self.water_content_u.any())

    @property
    def levels(self) -> int:
        """How many levels there are; each pair is one where nobody said."""
        return self.count if self.level is None else np.unique(self.level).size


def refuse(pairs: Pairs) -> None:
    """Refuse pairs that no curve can be put through.

    Raises ParameterError that names the first such pair, by its number from 1.
    """
    found = list(_faults(pairs))
    if found:
        raise ParameterError("pairs", found)


def refuse_form(pairs: Pairs, form: Form) -> None:
    """Refuse a form that these pairs cannot tell.

    Raises ParameterError that says what would do.
    """
    if detail := lacking(pairs, form):
        raise ParameterError("form", [Complaint("form", detail, ("pairs",))])


def lacking(pairs: Pairs, form: Form) -> str:
    """What a form lacks to be told by these pairs; empty: nothing."""
    least = form.size + SPARE
    if pairs.count < least:
        return (
            f"{form.key} has {form.size} coefficients and needs at least {least} pairs, found "
            f"{pairs.count}: give more pairs{_simpler(form)}"
        )
    distinct = np.unique(pairs.permittivity).size
    if distinct < form.size:
        return (
            f"{form.key} needs at least {form.size} different permittivities, found {distinct}: "
            f"give pairs at other water contents{_simpler(form)}"
        )
    return ""


def _simpler(form: Form) -> str:
    return ", or ask for a form with fewer coefficients" if form.size > 2 else ""


def _faults(pairs: Pairs) -> Iterator[Complaint]:
    x, u = pairs.permittivity, pairs.permittivity_u
    if pairs.count < FEWEST:
        return  # every form says how many it needs
    if np.ptp(x) == 0.0:
        detail = (
            f"all {pairs.count} pairs have the same permittivity, {x[0]:g}: a curve needs pairs "
            "from dry to wet"
        )
        yield Complaint("pairs", detail, ("pairs",))
        return
    exact = np.flatnonzero((u == 0.0) & (pairs.water_content_u == 0.0))
    if pairs.stated and exact.size:
        detail = (
            f"pair {exact[0] + 1} is exact while others state an uncertainty, and would count "
            "for more than all of them: give the uncertainty of its water content or permittivity"
        )
        yield Complaint("pairs", detail, ("pairs",))
    noise = float(np.mean(np.square(u)))
    if float(np.var(x)) < DISTINCT * noise:
        detail = (
            f"permittivities from {x.min():g} to {x.max():g} cannot be told apart with a standard "
            f"uncertainty of {np.sqrt(noise):.3g}: give pairs further apart, or a smaller "
            "uncertainty"
        )
        yield Complaint("pairs", detail, ("pairs",))
