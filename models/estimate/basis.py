"""All that an estimate rests on besides its readings, settled once for a whole request."""

from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass, field, replace
from typing import Any

from models.advisories import Advice, advise
from models.estimate.binding import SUPPLIED, bind
from models.estimate.permittivity import kinds_in
from models.estimate.salt.salinity import BULK_25, EXTRACT, Salinity, SalinityQuery, settle
from models.mixing import MIXING_MODELS
from models.mixing.family import MixingModel
from models.quantity import NOISE
from models.soil.description import MINERAL_ORGANIC, Soil
from models.soil.texture import TEXTURES
from models.uncertainty.draws import Draws
from models.water import WATER_MODELS
from models.water.family import WaterModel

ASSUMED_TEMPERATURE_U = 7.0
UNLIKELY = 4.0
"""Standard uncertainties of a class from its mean: beyond, a content is that of another class."""
ASSUMED_FREQUENCY = 1e9
"""Hz, of a probe that does not say: the upper end of what TDR sees."""


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
    assumed_temperature_u: float = ASSUMED_TEMPERATURE_U
    """K; by default that of soil over a season."""
    probability: float = 0.95
    draws: Draws | None = None
    """How to draw, for a Monte Carlo propagation; None: first order and quantiles."""
    columns: frozenset[str] = frozenset()
    """Names of the columns the readings have."""
    salinity: SalinityQuery = field(default_factory=SalinityQuery)


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
    salinity: Salinity | None = None
    """None: nothing is said about the conductivity of the pore water."""

    @property
    def takes(self) -> frozenset[str]:
        """Names of the model's parameters that are worked out for each reading."""
        names = {parameter.name for parameter in self.model.parameters}
        return frozenset(names & SUPPLIED - set(self.values))

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
        return "loss" not in self.takes and not self.model.conducting

    @property
    def tells_correction(self) -> bool:
        """Whether the readings hold anything to correct by."""
        columns = self.query.columns
        by_conductivity = "bulk_conductivity" in columns and self.frequency_known
        return self.corrects_loss and ("imaginary_permittivity" in columns or by_conductivity)


def narrowed(basis: Basis, columns: Collection[str]) -> Basis:
    """The same where only these columns are asked for: the rest of the salt is not worked out."""
    salinity = basis.salinity
    if salinity is None:
        return basis

    def asked(quantity: str) -> bool:
        return any(name.startswith(quantity) for name in columns)

    return replace(
        basis,
        salinity=replace(
            salinity,
            paste=salinity.paste if asked(EXTRACT) else None,
            tells_bulk=salinity.tells_bulk and asked(BULK_25),
        ),
    )


def prepare(query: Query) -> Basis:
    """Bind a query to its model.

    Raises UnknownName for a model that is none; ParameterError when a parameter is missing,
    unknown or out of range, with where it can be said.
    """
    model = MIXING_MODELS[query.model]
    bound = bind(model, "mixing_model", query.given, query.soil)
    basis = Basis(
        query=query,
        model=model,
        water=WATER_MODELS[model.water] if model.water else None,
        values=bound.values,
        uncertainties=bound.uncertainties,
        origins=bound.origins,
        outside=_outside(model, query.soil),
        advice=(),
        salinity=settle(query.salinity, query.soil, model, query.columns),
    )
    return replace(basis, advice=_advice(basis))


def _outside(model: MixingModel, soil: Soil) -> tuple[str, ...]:
    held = soil.values
    if soil.texture is not None:
        held = {"organic_matter": MINERAL_ORGANIC, **held}
    return tuple(
        name
        for name, known in model.validity.items()
        if name in held and bool(known.excludes(held[name]))
    )


def _advice(basis: Basis) -> tuple[Advice, ...]:
    said = [advise("indirect-measurement"), advise("numbers-not-verdicts")]
    if basis.model.key not in {"square-root", "polynomial"}:
        said.append(advise("generic-equation"))
    said += [*_of_soil(basis), *_of_probe(basis)]
    if basis.salinity is not None:
        said.extend(basis.salinity.advice)
        if basis.query.draws is not None:
            said.append(advise("bulk-not-drawn"))
    return tuple(said)


def _of_soil(basis: Basis) -> Iterator[Advice]:
    """What was filled in, what counts as exact, what contradicts."""
    soil = basis.query.soil
    used = [n for n in soil.assumed if n in basis.values or n in {"clay", "bulk_density"}]
    if used:
        yield advise("texture-defaults", names=", ".join(used), texture=soil.texture)
    unstated = _unstated(basis)
    if unstated:
        yield advise("no-uncertainty-stated", names=", ".join(unstated), example=f"{unstated[0]}_u")
    outside = [*basis.outside, *_outside_frequency(basis)]
    if outside:
        yield advise("model-range", model=basis.model.key, names=", ".join(outside))
    if basis.model.fitted_by_caller and basis.tells_correction:
        yield advise("own-curve-corrected", model=basis.model.key)
    yield from _contradiction(soil)


def _of_probe(basis: Basis) -> Iterator[Advice]:
    """What was assumed of the probe, and which of its permittivities was used."""
    query = basis.query
    if not basis.frequency_known:
        yield advise("frequency-assumed", frequency=f"{ASSUMED_FREQUENCY / 1e9:g}")
    if query.assumed_temperature is not None:
        yield advise(
            "temperature-assumed",
            temperature=f"{query.assumed_temperature:g}",
            u=f"{query.assumed_temperature_u:g}",
        )
    kinds = kinds_in(query.columns)
    if len(kinds) > 1:
        first = f"{basis.model.permittivity}_permittivity"
        used = first if first in kinds else kinds[0]
        yield advise("permittivities-beside", names=", ".join(kinds), used=used)


def _outside_frequency(basis: Basis) -> tuple[str, ...]:
    known = basis.model.validity.get("frequency")
    stated = basis.query.probe.get("frequency")
    outside = known is not None and stated is not None and bool(known.excludes(stated))
    return ("frequency",) if outside else ()


def _unstated(basis: Basis) -> list[str]:
    """What enters the estimate as if it were exact."""
    query = basis.query
    stated = {n.removesuffix("_u") for n in (*query.columns, *query.probe) if n.endswith("_u")}
    came = [n for n in NOISE if n in query.columns and n != "frequency" and n not in stated]
    if not basis.needs_temperature and "temperature" in came:
        came.remove("temperature")
    exact = [n for n, u in basis.uncertainties.items() if u == 0.0 and basis.origins[n] == "given"]
    if basis.model.fitted_by_caller and query.standard_error is not None:
        exact = []  # an error of the curve that was fitted holds that of its coefficients
    soil = query.soil
    through = soil.origins.get("porosity", "").startswith("1 - bulk_density")
    if through and "porosity" in basis.values and soil.uncertainties["bulk_density"] == 0.0:
        exact.append("bulk_density")
    if "travel_time" in query.columns and "probe_length_u" not in query.probe:
        exact.append("probe_length")
    return came + exact


def _contradiction(soil: Soil) -> Iterator[Advice]:
    given = {n: soil.values[n] for n, origin in soil.origins.items() if origin == "given"}
    if given.keys() >= {"porosity", "bulk_density"}:
        derived = 1.0 - given["bulk_density"] / soil.values["particle_density"]
        if abs(derived - given["porosity"]) > 0.05:
            told = {"porosity": f"{given['porosity']:.3g}", "derived": f"{derived:.3g}"}
            yield advise("porosity-disagrees", **told)
    if soil.texture is None:
        return
    own = TEXTURES[soil.texture]
    for name, mean, u in (("clay", own.clay, own.clay_u), ("sand", own.sand, own.sand_u)):
        if name in given and mean is not None and abs(given[name] - mean) > UNLIKELY * u:
            yield advise(
                "texture-disagrees", name=name, value=f"{given[name]:.2g}", texture=soil.texture,
                mean=f"{mean:.2g}",
            )  # fmt: skip
