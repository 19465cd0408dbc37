"""All that an estimate rests on besides its readings, settled once for a whole request."""

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Any

from models.advisories import Advice, advise
from models.errors import Complaint, ParameterError
from models.estimate.permittivity import kinds_in
from models.mixing import MIXING_MODELS
from models.mixing.family import MixingModel
from models.quantity import NOISE
from models.relation import Parameter
from models.soil.description import Soil
from models.water import WATER_MODELS
from models.water.family import WaterModel

ASSUMED_FREQUENCY = 1e9
"""Hz, of a probe that does not say: the upper end of what TDR sees."""
SUPPLIED = ("water_permittivity", "water_loss", "loss", "frequency")
"""Parameters worked out for each reading from temperature, frequency and conductivity."""
MENDS: Mapping[str, str] = {
    "porosity": "soil.porosity, soil.bulk_density or soil.texture",
    "bulk_density": "soil.bulk_density, soil.porosity or soil.texture",
    "clay": "soil.clay or soil.texture",
    "sand": "soil.sand or soil.texture",
    "organic_matter": "soil.organic_matter",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Query:
    """What a caller says beside the readings; SI and Cel, names of the vocabulary."""

    model: str
    given: Mapping[str, Any] = field(default_factory=dict)
    """Parameters of the mixing model, and ``<name>_u`` beside any of them."""
    standard_error: float | None = None
    soil: Soil
    probe: Mapping[str, float] = field(default_factory=dict)
    """Values and ``<name>_u`` of the probe."""
    assumed_temperature: float | None = None
    probability: float = 0.95
    columns: frozenset[str] = frozenset()
    """Names of the columns the readings have."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Basis:
    """A query, bound to its mixing model."""

    query: Query
    model: MixingModel
    water: WaterModel | None
    values: Mapping[str, Any]
    """Every parameter that is the same for all readings, as the equation takes it."""
    uncertainties: Mapping[str, float]
    origins: Mapping[str, str]
    outside: tuple[str, ...]
    """Soil properties outside the model's declared range."""
    advice: tuple[Advice, ...]

    @property
    def takes(self) -> frozenset[str]:
        """Names of the model's parameters that are worked out for each reading."""
        names = {parameter.name for parameter in self.model.parameters}
        return frozenset(names & set(SUPPLIED) - set(self.values))

    @property
    def needs_temperature(self) -> bool:
        """Whether the water's permittivity is worked out for each reading."""
        return bool(self.takes & {"water_permittivity", "water_loss"})

    @property
    def frequency_known(self) -> bool:
        """Whether anyone said at which frequency the probe works."""
        return "frequency" in self.query.probe or "frequency" in self.query.columns

    @property
    def corrects_loss(self) -> bool:
        """Whether an apparent permittivity is corrected for loss before the model sees it."""
        return self.frequency_known and "loss" not in self.takes


def prepare(query: Query) -> Basis:
    """Bind a query to its model.

    Raises UnknownName for a model that is none; ParameterError when a parameter is missing,
    unknown or out of range, with where it can be said.
    """
    model = MIXING_MODELS[query.model]
    binding = _Binding(model, query)
    basis = Basis(
        query=query,
        model=model,
        water=WATER_MODELS[model.water] if model.water else None,
        values=binding.values,
        uncertainties=binding.uncertainties,
        origins=binding.origins,
        outside=_outside(model, query.soil),
        advice=(),
    )
    return replace(basis, advice=_advice(basis))


class _Binding:
    """Each parameter from the caller's model, else the soil, else its default."""

    def __init__(self, model: MixingModel, query: Query) -> None:
        self.values: dict[str, Any] = {}
        self.uncertainties: dict[str, float] = {}
        self.origins: dict[str, str] = {}
        known = {parameter.name for parameter in model.parameters}
        strangers = [n for n in query.given if n not in known and n.removesuffix("_u") not in known]
        complaints = [
            Complaint(
                n,
                f"takes no {n}; it takes {', '.join(sorted(known)) or 'no parameter'}",
                ("mixing_model", n),
            )
            for n in strangers
        ]
        for parameter in model.parameters:
            complaints.extend(self._bind(parameter, query))
        if complaints:
            raise ParameterError(model.key, complaints)
        fixed = tuple(
            p for p in model.parameters if p.name in self.values or p.name not in SUPPLIED
        )
        self.values = replace(model, parameters=fixed).bind(self.values)

    def _bind(self, parameter: Parameter, query: Query) -> list[Complaint]:
        name = parameter.name
        if name in query.given:
            self._take(name, query.given[name], query.given.get(f"{name}_u", 0.0), "given")
        elif name in query.soil.values:
            soil = query.soil
            self._take(name, soil.values[name], soil.uncertainties[name], soil.origins[name])
        elif parameter.supplied or name in SUPPLIED:
            return []
        elif parameter.default is not None:
            self._take(name, parameter.default, parameter.default_u, "default of the model")
        elif not parameter.optional:
            mend = MENDS.get(name, f'"mixing_model": {{"name": "{query.model}", "{name}": ...}}')
            place = ("soil" if name in MENDS else "mixing_model", name)
            return [Complaint(name, f"needs {name} ({parameter.meaning}): give {mend}", place)]
        return []

    def _take(self, name: str, value: Any, uncertainty: float, origin: str) -> None:
        self.values[name], self.origins[name] = value, origin
        if not isinstance(value, str):
            self.uncertainties[name] = float(uncertainty)


def _outside(model: MixingModel, soil: Soil) -> tuple[str, ...]:
    return tuple(
        name
        for name, known in model.validity.items()
        if name in soil.values and bool(known.excludes(soil.values[name]))
    )


def _advice(basis: Basis) -> tuple[Advice, ...]:
    query, soil = basis.query, basis.query.soil
    said = [advise("indirect-measurement"), advise("numbers-not-verdicts")]
    if basis.model.key not in {"square-root", "polynomial"}:
        said.append(advise("generic-equation"))
    used = [n for n in soil.assumed if n in basis.values or n in {"clay", "bulk_density"}]
    if used:
        said.append(advise("texture-defaults", names=", ".join(used), texture=soil.texture))
    unstated = _unstated(basis)
    if unstated:
        said.append(
            advise("no-uncertainty-stated", names=", ".join(unstated), example=f"{unstated[0]}_u")
        )
    if not basis.frequency_known and (basis.water is not None or "frequency" in basis.takes):
        said.append(advise("frequency-assumed", frequency=f"{ASSUMED_FREQUENCY / 1e9:g}"))
    if query.assumed_temperature is not None:
        said.append(advise("temperature-assumed", temperature=f"{query.assumed_temperature:g}"))
    if basis.outside:
        said.append(advise("model-range", model=basis.model.key, names=", ".join(basis.outside)))
    said.extend(_contradiction(soil))
    kinds = kinds_in(query.columns)
    if len(kinds) > 1:
        first = f"{basis.model.permittivity}_permittivity"
        used_kind = first if first in kinds else kinds[0]
        said.append(advise("permittivities-beside", names=", ".join(kinds), used=used_kind))
    return tuple(said)


def _unstated(basis: Basis) -> list[str]:
    """What enters the estimate as if it were exact."""
    query = basis.query
    stated = {n.removesuffix("_u") for n in (*query.columns, *query.probe) if n.endswith("_u")}
    came = [n for n in NOISE if n in query.columns and n != "frequency" and n not in stated]
    if not basis.needs_temperature and "temperature" in came:
        came.remove("temperature")
    exact = [n for n, u in basis.uncertainties.items() if u == 0.0 and basis.origins[n] == "given"]
    return came + exact


def _contradiction(soil: Soil) -> list[Advice]:
    given = {n for n, origin in soil.origins.items() if origin == "given"}
    if not {"porosity", "bulk_density"} <= given:
        return []
    derived = 1.0 - soil.values["bulk_density"] / soil.values["particle_density"]
    if abs(derived - soil.values["porosity"]) <= 0.05:
        return []
    return [
        advise(
            "porosity-disagrees",
            porosity=f"{soil.values['porosity']:.3g}",
            derived=f"{derived:.3g}",
        )
    ]
