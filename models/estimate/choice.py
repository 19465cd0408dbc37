"""Which mixing model, where the caller names none: by declared ranges, then by the band."""

from dataclasses import dataclass, replace

import numpy as np

from models.advisories import advise
from models.errors import Complaint, ModelError, ParameterError
from models.estimate.basis import ASSUMED_FREQUENCY, Basis, Query, prepare
from models.estimate.permittivity import kinds_in
from models.estimate.pipeline import estimate
from models.mixing import MIXING_MODELS
from models.mixing.family import MixingModel
from models.readings import Readings
from models.soil.description import Soil

ORGANIC = 0.12
"""Organic matter from which a soil counts as organic, common practice."""
TYPICAL_WATER_CONTENT = 0.25
TYPICAL_TEMPERATURE = 20.0
NEVER = frozenset({"square-root", "polynomial", "complex-refractive", "hanai-bruggeman"})
"""Not chosen unasked: they need the caller's own coefficients, the loss, or saturated soil."""


@dataclass(frozen=True, slots=True)
class _Candidate:
    basis: Basis
    standard_uncertainty: float


def choose(query: Query) -> Basis:
    """The basis of the model with the narrowest band among those whose ranges hold.

    ``query.model`` is not looked at. A candidate has all its inputs, is made for this kind of
    soil, and declares ranges that hold the soil and the frequency; its band is that of a reading
    at 0.25 m3/m3 and 20 Cel.
    Raises ParameterError when no model can answer.
    """
    candidates = [c for key in MIXING_MODELS if (c := _candidate(query, key)) is not None]
    if not candidates:
        detail = (
            "no mixing model holds for this soil and frequency: name one in mixing_model and "
            "read its declared range at /v1/mixing-models"
        )
        raise ParameterError("mixing_model", [Complaint("mixing_model", detail)])
    best = min(candidates, key=lambda c: c.standard_uncertainty)
    why = (
        f"of {len(candidates)} models whose inputs are given and whose declared ranges hold "
        f"({_case(query)}), it has the smallest standard uncertainty at "
        f"{TYPICAL_WATER_CONTENT:g} m3/m3: {best.standard_uncertainty:.3f} m3/m3."
    )
    said = advise("model-chosen", model=best.basis.model.key, why=why)
    return replace(best.basis, advice=(said, *best.basis.advice))


def _candidate(query: Query, key: str) -> _Candidate | None:
    model = MIXING_MODELS[key]
    if key in NEVER or not _suits(model, query):
        return None
    try:
        basis = prepare(replace(query, model=key))
    except ModelError:
        return None
    if basis.outside:
        return None
    spread = _typical_uncertainty(basis)
    return None if np.isnan(spread) else _Candidate(basis, spread)


def _suits(model: MixingModel, query: Query) -> bool:
    organic = _organic(query.soil)
    if model.soils == ("mineral" if organic else "organic"):
        return False
    if model.water is not None and not _has_temperature(query):
        return False
    kinds = kinds_in(query.columns)
    if kinds == ("real_permittivity",) and model.permittivity != "real":
        return False
    if "real_permittivity" not in kinds and kinds and model.permittivity == "real":
        return False
    known = model.validity.get("frequency")
    frequency = query.probe.get("frequency")
    return known is None or frequency is None or not bool(known.excludes(frequency))


def _has_temperature(query: Query) -> bool:
    return "temperature" in query.columns or query.assumed_temperature is not None


def _organic(soil: Soil) -> bool:
    return soil.values.get("organic_matter", 0.0) >= ORGANIC


def _typical_uncertainty(basis: Basis) -> float:
    """Of one reading at a typical water content, from the model's own forward equation."""
    warm = replace(
        basis,
        query=replace(basis.query, columns=frozenset(), assumed_temperature=TYPICAL_TEMPERATURE),
    )
    tried = np.linspace(2.0, 40.0, 77)
    probe = Readings(
        tried.size,
        {f"{basis.model.permittivity}_permittivity": tried},
        np.zeros(tried.size, dtype=np.uint64),
    )
    answer = estimate(probe, warm).columns
    off = np.abs(answer["water_content"] - TYPICAL_WATER_CONTENT)
    if np.all(np.isnan(off)):
        return float("nan")
    return float(answer["water_content_u"][np.nanargmin(off)])


def _case(query: Query) -> str:
    soil = query.soil
    said = ["organic soil" if _organic(soil) else "mineral soil"]
    if "clay" in soil.values:
        said.append(f"clay {soil.values['clay']:.2g}")
    if "organic_matter" in soil.values:
        said.append(f"organic matter {soil.values['organic_matter']:.2g}")
    frequency = query.probe.get("frequency")
    if frequency is None:
        said.append(f"frequency not given, {ASSUMED_FREQUENCY / 1e9:g} GHz assumed")
    else:
        said.append(f"{frequency / 1e9:.3g} GHz")
    if not _has_temperature(query):
        said.append("no temperature")
    return ", ".join(said)
