"""What the conductivity of the pore water rests on, settled once for a whole request."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from models.advisories import Advice, advise
from models.conductivity import TEMPERATURE_COMPENSATIONS
from models.conductivity.family import TemperatureCompensation
from models.errors import Complaint, ParameterError
from models.estimate.binding import Bound, Estimated, bind
from models.mixing.family import MixingModel
from models.salinity import DEFAULT_PORE_WATER_MODEL, PORE_WATER_MODELS
from models.salinity.family import PoreWaterModel
from models.salinity.texture_defaults import Estimate, estimates
from models.soil.description import Soil

SECTION = "pore_water_model"
BULK_25, PORE = "bulk_conductivity_25", "pore_water_conductivity"
EXTRACT = "saturation_extract_conductivity"
FALLBACKS = (DEFAULT_PORE_WATER_MODEL, "hilhorst-2000")
"""In this order, where none is named: the first whose inputs are there."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SalinityQuery:
    """What a caller says about the salt; SI, names of the vocabulary."""

    model: str | None = None
    given: Mapping[str, Any] | None = None
    standard_error: float | None = None
    """In place of the model's own, relative."""
    compensation: str = "corwin-lesch-2005"


@dataclass(frozen=True, slots=True, kw_only=True)
class Salinity:
    """A salinity query, bound to its models."""

    query: SalinityQuery
    model: PoreWaterModel
    bound: Bound
    compensation: TemperatureCompensation
    paste: Estimated | None
    """Water content of the saturated paste, kg/kg; None: no extract can be told."""
    density: tuple[float, float] | None
    """Bulk density and its standard uncertainty, kg/m3."""
    clay: float | None
    fitted: bool
    """Whether the site's own coefficients were given."""
    advice: tuple[Advice, ...]
    tells_bulk: bool = True
    """Whether the bulk conductivity at 25 Cel is asked for."""

    @property
    def takes(self) -> frozenset[str]:
        """Parameters of the pore-water model that are worked out for each reading."""
        names = {parameter.name for parameter in self.model.parameters}
        return frozenset(names - set(self.bound.values))


def settle(
    query: SalinityQuery, soil: Soil, mixing: MixingModel, columns: frozenset[str]
) -> Salinity | None:
    """Bind the salinity part of a request; None where the readings hold nothing to say about it.

    Raises ParameterError when a named model cannot answer.
    """
    conducting = "bulk_conductivity" in columns or (
        "imaginary_permittivity" in columns and query.model == "complex-refractive"
    )
    if not conducting:
        if query.model is None:
            return None
        detail = f"{query.model} needs bulk_conductivity in the readings"
        raise ParameterError(SECTION, [Complaint(SECTION, detail, (SECTION,))])
    likely = estimates(soil.texture, soil.values.get("clay"), soil.uncertainties.get("clay", 0.0))
    if query.model is not None:
        model = PORE_WATER_MODELS[query.model]
        bound = bind(model, SECTION, query.given or {}, soil, likely)
        return _salinity(query, model, bound, soil, likely, said=())
    for key in (*_kin(mixing), *FALLBACKS):
        model = PORE_WATER_MODELS[key]
        try:
            bound = bind(model, SECTION, query.given or {}, soil, likely)
        except ParameterError:
            continue
        return _salinity(query, model, bound, soil, likely, said=(_reason(key, mixing),))
    return None


def _kin(mixing: MixingModel) -> tuple[str, ...]:
    """A mixing model that finds the pore water along the way answers for it too."""
    return ("complex-refractive",) if mixing.key == "complex-refractive" else ()


def _reason(key: str, mixing: MixingModel) -> Advice:
    if key == mixing.key:
        why = "it is the model that the water content comes from."
    elif key == DEFAULT_PORE_WATER_MODEL:
        why = "clay and density are known, and it tells conduction along surfaces from salt."
    else:
        why = (
            "it needs neither clay nor density; its offset is a default and makes most of the band."
        )
    return advise("pore-water-model-chosen", model=key, why=why)


def _salinity(
    query: SalinityQuery,
    model: PoreWaterModel,
    bound: Bound,
    soil: Soil,
    likely: Mapping[str, Estimated],
    *,
    said: tuple[Advice, ...],
) -> Salinity:
    fitted = bool(model.discrepancy.fitted_parameters) and all(
        bound.origins.get(name) == "given" for name in model.discrepancy.fitted_parameters
    )
    density = None
    if "bulk_density" in soil.values:
        density = (soil.values["bulk_density"], soil.uncertainties["bulk_density"])
    paste = _paste(soil, likely)
    advice = [*said, advise("salinity-limits")]
    if paste is not None and density is not None:
        advice.append(advise("extract-assumptions", origin=paste.origin))
    guessed = [name for name, origin in bound.origins.items() if origin.startswith("texture")]
    if guessed:
        advice.append(
            advise("pore-water-estimates", names=", ".join(guessed), texture=soil.texture)
        )
    return Salinity(
        query=query, model=model, bound=bound,
        compensation=TEMPERATURE_COMPENSATIONS[query.compensation],
        paste=paste, density=density, clay=soil.values.get("clay"), fitted=fitted,
        advice=tuple(advice),
    )  # fmt: skip


def _paste(soil: Soil, likely: Mapping[str, Estimated]) -> Estimated | None:
    name = "saturation_percentage"
    if name in soil.values:
        return Estimate(soil.values[name], soil.uncertainties[name], "given")
    return likely.get(name)
