"""From every source of uncertainty to the salt, as one measurand.

A reading gives water content and conductivity of the pore water together: one error of its
permittivity moves the water, the real permittivity and with them the salt. Each source is one
standard-normal variable here, wherever it works; what differs from row to row and is not uncertain
goes with the rows as exact columns.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any, Self

import numpy as np
from numpy.typing import NDArray

from models.estimate.basis import Basis
from models.estimate.derived import sources_of
from models.estimate.equation import OWN, Equation
from models.estimate.moving import (
    BULK,
    TEMPERATURE,
    WATER_MODEL,
    Moving,
    moving,
    moving_permittivity,
)
from models.estimate.permittivity import Permittivity
from models.estimate.salt.pore_water import PoreWater, logarithm
from models.estimate.sources import Sources
from models.estimate.water_content import WaterContent
from models.relation import Array, column
from models.salinity.saturation_extract import to_extract
from models.uncertainty.coverage import two_piece
from models.uncertainty.distributions import Distribution, Normal
from models.uncertainty.exact import Exact
from models.uncertainty.first_order import Input

OWN_OF_SALT = "pore_water_model"
BEYOND_ALL = 1e6
"""In place of a logarithm that no conductivity has."""


@dataclass(frozen=True, slots=True)
class Chain:
    """Logarithm of the conductivity of the pore water, or of the extract, of some rows."""

    pore: PoreWater
    equation: Equation
    mixing: Mapping[str, Moving]
    """What goes into the mixing model; empty: the answer does not rest on the water content."""
    paste: Mapping[str, Moving]
    """What the extract follows from; empty: the answer is that of the pore water."""
    columns: Mapping[str, Any]
    """Every column by name, scalar or shape (n,)."""
    leans: bool
    """Whether the error of the mixing model has two scales."""
    most: float
    """Most water there can be, m3/m3; more is impossible."""
    leading: tuple[str, ...] = ()
    """Sources by whose first order a draw without an answer counts as below or above all others;
    empty: it has none."""

    @classmethod
    def of(
        cls,
        pore: PoreWater,
        found: Permittivity,
        water: Mapping[str, Input],
        content: WaterContent,
        own: Array,
        *,
        paste: Mapping[str, Moving],
        most: float = np.inf,
    ) -> Self:
        """The chain of a block.

        found, water: what the water content came from. own: standard uncertainty of the pore-water
        model itself, of the logarithm.
        """
        basis, mixing = content.equation.basis, {}
        if paste or np.isfinite(most) or "water_content" in pore.salinity.takes:
            mixing = {g.name: _of_mixing(g, found, water, basis) for g in content.equation.inputs}
        below, above = content.scales
        columns: dict[str, Any] = {
            "own below": below, "own above": above, f"{OWN_OF_SALT} own": own,
        }  # fmt: skip
        leans = content.lean is not None
        chain = cls(pore, content.equation, mixing, paste, columns, leans, most)
        return replace(chain, columns=columns | chain._of_quantities())

    def sided(self, effects: Sources) -> Self:
        """The same for draws: without an answer they are beyond one end or the other."""
        every = {**effects.per_reading, **effects.shared}
        leading = tuple(name for name in self.sources if name in every)
        columns = {f"leading {name}": every[name] for name in leading}
        return replace(self, leading=leading, columns={**self.columns, **columns})

    @property
    def sources(self) -> tuple[str, ...]:
        """Everything uncertain, in a fixed order."""
        every = dict.fromkeys(s for _, each in self._quantities() for s in each.by)
        return (*every, *([OWN] if self.mixing else []), OWN_OF_SALT)

    def rows(self, index: NDArray[np.intp]) -> Self:
        """The same for some of the rows."""
        some = {n: column(v)[index] if np.ndim(v) == 1 else v for n, v in self.columns.items()}
        return replace(self, columns=some)

    def distributions(self) -> dict[str, Distribution]:
        """The sources, and every column they work on."""
        every: dict[str, Distribution] = {
            name: Exact(values) for name, values in self.columns.items() if np.ndim(values) == 1
        }
        return every | {source: Normal(0.0, 1.0) for source in self.sources}

    @np.errstate(all="ignore")
    def __call__(self, **columns: Array) -> Array:
        """Logarithm of the conductivity at 25 Cel, in S/m; NaN where there is none above zero."""
        columns = {**self.columns, **columns}
        at = {n: each.among(columns, f"salt {n}") for n, each in self.pore.moving.items()}
        theta = self._water_content(columns)
        if theta is None:
            answer = self.pore.at_25(**at)
        else:
            above = np.where(theta > 0.0, theta, np.nan)
            answer = self.pore.at_25(water_content=above, **at)
        if self.paste:
            at = {n: _positive(each, columns, f"paste {n}") for n, each in self.paste.items()}
            answer = to_extract(answer, water_content=above, **at)
        found = logarithm(answer) + columns[f"{OWN_OF_SALT} own"] * columns[OWN_OF_SALT]
        if self.leading and np.isnan(found).any():
            found = self._beyond(found, answer, columns)
        return found if theta is None else np.where(theta > self.most, np.nan, found)

    def _beyond(self, found: Array, answer: Array, columns: Mapping[str, Array]) -> Array:
        """Below or above all others where there is no answer; shape (n, draws).

        What is left after the surfaces is zero or less: below. Else the model has no number there,
        and first order says towards which end.
        """
        count = found.shape[0] if found.ndim > 1 else 1
        each = [np.broadcast_to(columns[f"leading {n}"], (count, 1)) for n in self.leading]
        towards = np.concatenate(each, axis=1) @ np.stack([columns[n] for n in self.leading])
        side = np.where(answer <= 0.0, -BEYOND_ALL, np.copysign(BEYOND_ALL, towards))
        return np.where(np.isnan(found), side, found)

    def _water_content(self, columns: Mapping[str, Array]) -> Array | None:
        """With every error in it; None where the answer does not rest on it."""
        if not self.mixing:
            return None
        at = {n: each.among(columns, f"mixing {n}") for n, each in self.mixing.items()}
        scales = columns["own below"], columns["own above"]
        error = two_piece(columns[OWN], *scales) if self.leans else columns[OWN] * scales[1]
        return self.equation(**at) + error

    def _quantities(self) -> list[tuple[str, Moving]]:
        kinds = {"mixing": self.mixing, "salt": self.pore.moving, "paste": self.paste}
        return [(f"{k} {name}", each) for k, every in kinds.items() for name, each in every.items()]

    def _of_quantities(self) -> dict[str, Any]:
        named: dict[str, Any] = {}
        for name, each in self._quantities():
            named |= each.columns(name)
        return named


def _positive(each: Moving, columns: Mapping[str, Array], name: str) -> Array:
    """A quantity that is known by a factor: lognormal, its value the median."""
    value = columns[name]
    return column(value * np.exp(each.among({**columns, name: 0.0 * value}, name) / value))


def _of_mixing(
    given: Input, found: Permittivity, water: Mapping[str, Input], basis: Basis
) -> Moving:
    """What moves an input of the mixing model."""
    if given.name == "permittivity":
        return moving_permittivity(found)
    if given.name == "loss":
        return moving(given.value, **{BULK: given.per_reading})
    if given.name in water:
        return moving(given.value, **{TEMPERATURE: given.per_reading, WATER_MODEL: given.shared})
    if given.name not in basis.uncertainties:
        return moving(given.value)
    origin, u = basis.origins[given.name], basis.uncertainties[given.name]
    return moving(given.value, **sources_of(basis.query.soil, given.name, u, origin))
