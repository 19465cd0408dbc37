"""What every published relation carries: where it holds, how well, and who says so."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.errors import Complaint, ParameterError

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
Elementwise = Callable[..., Array]
"""One quantity from another, element by element; soil parameters by keyword."""


def column(values: ArrayLike) -> Array:
    """Values as float64, whatever they came as."""
    return np.asarray(values, dtype=np.float64)


@dataclass(frozen=True, slots=True)
class Range:
    """The closed interval a source vouches for, in SI (temperature: Cel)."""

    low: float
    high: float

    def excludes(self, values: ArrayLike) -> NDArray[np.bool_]:
        """Mark the values outside; NaN is always outside."""
        values = column(values)
        return ~((self.low <= values) & (values <= self.high))

    def beyond(self, values: ArrayLike) -> NDArray[np.bool_]:
        """Mark the values outside; NaN is not known to be."""
        values = column(values)
        outside = values < self.low
        outside |= values > self.high
        return outside

    def distance(self, values: ArrayLike) -> Array:
        """How far outside, in units of the range's own width; 0 inside."""
        values = column(values)
        outside = np.maximum(np.maximum(self.low - values, values - self.high), 0.0)
        return outside / (self.high - self.low)

    def __str__(self) -> str:
        return f"{self.low:g} to {self.high:g}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Parameter:
    """A property a relation needs; without a default the caller must know it.

    A name that stands in ``models.quantity.QUANTITIES`` is that quantity, in SI. Others are the
    relation's own. ``supplied`` parameters are computed by the service from temperature and
    frequency unless the caller names them.
    """

    name: str
    meaning: str
    range: Range | None = None
    choices: tuple[str, ...] = ()
    default: float | str | None = None
    default_u: float = 0.0
    """Standard uncertainty (k = 1) of the default."""
    supplied: bool = False
    optional: bool = False
    """May be left out altogether: the relation then works without it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Citation:
    """Enough to find the publication, and the equation in it."""

    authors: str
    year: int
    title: str
    where: str
    equation: str = ""
    doi: str | None = None
    note: str = ""
    """How the numbers were confirmed: read in a source, a secondary copy, or from memory."""


def ranges(**given: tuple[float, float]) -> Mapping[str, Range]:
    """Ranges of validity by quantity name, SI."""
    return MappingProxyType({name: Range(*ends) for name, ends in given.items()})


@dataclass(frozen=True, slots=True, kw_only=True)
class Relation:
    """The part of a relation that is not mathematics."""

    key: str
    title: str
    equation: str
    """In words, with the symbols of the vocabulary."""
    source: Citation
    parameters: tuple[Parameter, ...] = ()
    validity: Mapping[str, Range] = field(default_factory=ranges)
    """Where the source vouches for it, by quantity name."""
    revision: int = 1

    def bind(self, given: Mapping[str, Any]) -> dict[str, Any]:
        """Complete ``given`` with defaults; refuse what this relation cannot use.

        Raises ParameterError when a parameter is unknown, missing or out of its range.
        """
        known = {p.name: p for p in self.parameters}
        complaints = [
            Complaint(name, f"does not take {name}; it takes {', '.join(known) or 'no parameter'}")
            for name in given
            if name not in known
        ]
        values: dict[str, Any] = {}
        for name, parameter in known.items():
            value = given.get(name, parameter.default)
            if value is None:
                if not parameter.optional:
                    complaints.append(Complaint(name, f"needs {name} ({parameter.meaning})"))
                continue
            complaints.extend(_misfit(parameter, value))
            values[name] = value
        if complaints:
            raise ParameterError(self.key, complaints)
        return values


def _misfit(parameter: Parameter, value: Any) -> list[Complaint]:
    name = parameter.name
    if parameter.choices:
        if value in parameter.choices:
            return []
        choices = ", ".join(parameter.choices)
        return [Complaint(name, f"takes {name} as one of {choices}", ("mixing_model", name))]
    if parameter.range is not None:
        known = column(value)
        if np.any(parameter.range.excludes(known[~np.isnan(known)])):
            worst = known[parameter.range.excludes(known)].flat[0]
            detail = f"takes {name} in {parameter.range}, found {worst:g}"
            return [Complaint(name, detail, ("mixing_model", name))]
    return []
