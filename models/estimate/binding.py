"""Each parameter of a relation: the caller's, else the soil's, else estimated, else a default."""

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Any, Protocol

import numpy as np

from models.errors import Complaint, ParameterError
from models.relation import Parameter, Relation
from models.soil.description import Soil

SUPPLIED = frozenset({
    "water_permittivity", "water_loss", "loss", "frequency", "water_content", "real_permittivity",
    "temperature",
})  # fmt: skip
"""Parameters worked out for each reading."""
SPELT = 1e-8
"""Relative difference that spelling a number in an answer may make."""
MENDS: Mapping[str, str] = {
    "porosity": "soil.porosity, soil.bulk_density or soil.texture",
    "bulk_density": "soil.bulk_density, soil.porosity or soil.texture",
    "clay": "soil.clay or soil.texture",
    "sand": "soil.sand or soil.texture",
    "organic_matter": "soil.organic_matter",
}


class Estimated(Protocol):
    """A value somebody worked out, with its standard uncertainty and origin."""

    @property
    def value(self) -> float:
        """In SI."""
        ...

    @property
    def standard_uncertainty(self) -> float:
        """Of the value, k = 1."""
        ...

    @property
    def origin(self) -> str:
        """Where it comes from."""
        ...


@dataclass(slots=True)
class Bound:
    """Parameters that are the same for all readings, as the equation takes them."""

    values: dict[str, Any] = field(default_factory=dict)
    uncertainties: dict[str, float] = field(default_factory=dict)
    origins: dict[str, str] = field(default_factory=dict)

    def take(self, name: str, value: Any, uncertainty: float, origin: str) -> None:
        """Settle one parameter; text has no uncertainty."""
        self.values[name], self.origins[name] = value, origin
        if not isinstance(value, str):
            self.uncertainties[name] = float(uncertainty)


def bind(
    relation: Relation,
    section: str,
    given: Mapping[str, Any],
    soil: Soil,
    estimates: Mapping[str, Estimated] | None = None,
) -> Bound:
    """Settle every parameter of ``relation`` that is not worked out for each reading.

    section: the part of a request in which the relation is named, for complaints.
    given: parameters and ``<name>_u`` of the caller's own. estimates: what texture makes likely.
    Raises ParameterError when one is unknown, missing or out of its range.
    """
    known = {parameter.name for parameter in relation.parameters}
    complaints = [
        Complaint(
            name,
            f"takes no {name}; it takes {', '.join(sorted(known)) or 'no parameter'}",
            (section, name),
        )
        for name in given
        if name not in known and name.removesuffix("_u") not in known
    ]
    bound = Bound()
    complaints += [
        _missing(relation, parameter, section)
        for parameter in relation.parameters
        if not _settle(bound, parameter, given, soil, estimates or {})
    ]
    if complaints:
        raise ParameterError(relation.key, complaints)
    fixed = tuple(p for p in relation.parameters if p.name in bound.values or not _supplied(p))
    bound.values = replace(relation, parameters=fixed).bind(bound.values)
    return bound


def _supplied(parameter: Parameter) -> bool:
    return parameter.supplied or parameter.name in SUPPLIED


def _settle(
    bound: Bound,
    parameter: Parameter,
    given: Mapping[str, Any],
    soil: Soil,
    estimates: Mapping[str, Estimated],
) -> bool:
    """Settle one parameter; whether it is settled, or need not be."""
    name = parameter.name
    otherwise = _otherwise(parameter, soil, estimates)
    if name in given:
        told = (given[name], given.get(f"{name}_u", 0.0), "given")
        bound.take(name, *(otherwise if otherwise and _same(told, otherwise) else told))
    elif otherwise is not None:
        bound.take(name, *otherwise)
    else:
        return _supplied(parameter) or parameter.optional
    return True


Known = tuple[Any, float, str]
"""Value, standard uncertainty and origin."""


def _otherwise(
    parameter: Parameter, soil: Soil, estimates: Mapping[str, Estimated]
) -> Known | None:
    """What holds where the caller says nothing of it."""
    name = parameter.name
    if name in soil.values:
        return soil.values[name], soil.uncertainties[name], soil.origins[name]
    if _supplied(parameter) or parameter.optional:
        return None
    if name in estimates:
        found = estimates[name]
        return found.value, found.standard_uncertainty, found.origin
    if parameter.default is not None:
        return parameter.default, parameter.default_u, "default of the model"
    return None


def _same(told: Known, otherwise: Known) -> bool:
    """Whether a caller says no more than what holds anyway, as when an answer is sent back."""
    (value, u, _), (other, other_u, _) = told, otherwise
    if isinstance(value, str) or isinstance(other, str):
        return bool(value == other)
    return bool(np.isclose(value, other, SPELT, 0.0) and np.isclose(u, other_u, SPELT, 0.0))


def _missing(relation: Relation, parameter: Parameter, section: str) -> Complaint:
    name = parameter.name
    mend = MENDS.get(name, f'"{section}": {{"name": "{relation.key}", "{name}": ...}}')
    place = ("soil" if name in MENDS else section, name)
    return Complaint(name, f"needs {name} ({parameter.meaning}): give {mend}", place)
