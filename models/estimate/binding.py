"""Each parameter of a relation: the caller's, else the soil's, else estimated, else a default."""

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Any, Protocol

from models.errors import Complaint, ParameterError
from models.relation import Parameter, Relation
from models.soil.description import Soil

SUPPLIED = frozenset({
    "water_permittivity", "water_loss", "loss", "frequency", "water_content", "real_permittivity",
    "temperature",
})  # fmt: skip
"""Parameters worked out for each reading."""
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
    if name in given:
        bound.take(name, given[name], given.get(f"{name}_u", 0.0), "given")
    elif name in soil.values:
        bound.take(name, soil.values[name], soil.uncertainties[name], soil.origins[name])
    elif _supplied(parameter) or parameter.optional:
        return True
    elif name in estimates:
        found = estimates[name]
        bound.take(name, found.value, found.standard_uncertainty, found.origin)
    elif parameter.default is not None:
        bound.take(name, parameter.default, parameter.default_u, "default of the model")
    else:
        return False
    return True


def _missing(relation: Relation, parameter: Parameter, section: str) -> Complaint:
    name = parameter.name
    mend = MENDS.get(name, f'"{section}": {{"name": "{relation.key}", "{name}": ...}}')
    place = ("soil" if name in MENDS else section, name)
    return Complaint(name, f"needs {name} ({parameter.meaning}): give {mend}", place)
