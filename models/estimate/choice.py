"""Which mixing model, where the caller names none: declared ranges, then bands and experience."""

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
TYPICAL = {"mineral": 0.25, "organic": 0.50}
"""Water contents, m3/m3, at which bands are compared."""
TYPICAL_TEMPERATURE = 20.0
NO_BETTER_KNOWN = 0.025
"""m3/m3: among bands narrower than this, the order of PREFERRED decides."""
PREFERRED = ("crim", "malicki-1996", "topp-1980", "roth-1992-organic", "roth-1990", "mironov-2009")
"""By how widely they were tried in soils their authors had not seen; then as declared."""
NEVER = frozenset({
    "square-root", "polynomial", "complex-refractive", "hanai-bruggeman", "maxwell-garnett",
    "bruggeman", "sihvola",
})  # fmt: skip
"""Not chosen unasked: they need the caller's own coefficients, the loss, saturated soil, or a
knowledge of how solids and water lie that nobody has."""


@dataclass(frozen=True, slots=True)
class _Candidate:
    basis: Basis
    standard_uncertainty: float


def choose(query: Query) -> Basis:
    """The basis of a model whose ranges hold, by the width of its band and by experience.

    ``query.model`` is not looked at. A candidate has all its inputs, is made for this kind of
    soil, and declares ranges that hold the soil and the frequency; where no model holds at the
    frequency, those that hold otherwise, and the answer says so.
    Raises ParameterError when no model can answer.
    """
    found = [c for key in MIXING_MODELS if (c := _candidate(query, key)) is not None]
    within = [c for c in found if _holds_frequency(c.basis.model, query)]
    candidates = within or found
    if not candidates:
        detail = (
            "no mixing model holds for this soil: name one in mixing_model and read its declared "
            "range at /v1/mixing-models"
        )
        place = ("mixing_model",)
        raise ParameterError("mixing_model", [Complaint("mixing_model", detail, place)])
    best = min(candidates, key=_rank)
    beside = "" if within else " None of them is made for this frequency."
    why = (
        f"of {len(candidates)} models whose inputs are given and whose declared ranges hold "
        f"({_case(query)}), its standard uncertainty at {_typical(query.soil):g} m3/m3 is "
        f"{best.standard_uncertainty:.3f} m3/m3, and none that was tried as widely has a smaller "
        f"one.{beside}"
    )
    said = advise("model-chosen", model=best.basis.model.key, why=why)
    return replace(best.basis, advice=(said, *best.basis.advice))


def _rank(candidate: _Candidate) -> tuple[float, int]:
    key = candidate.basis.model.key
    place = PREFERRED.index(key) if key in PREFERRED else len(PREFERRED)
    return round(max(candidate.standard_uncertainty, NO_BETTER_KNOWN), 3), place


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


def suits_soil(model: MixingModel, soil: Soil) -> bool:
    """Whether a model is made for soil of this kind, mineral or organic."""
    return model.soils != ("mineral" if _organic(soil) else "organic")


def _suits(model: MixingModel, query: Query) -> bool:
    if not suits_soil(model, query.soil):
        return False
    if model.water is not None and not _has_temperature(query):
        return False
    kinds = kinds_in(query.columns)
    return "real_permittivity" in kinds or not kinds or model.permittivity == "apparent"


def _holds_frequency(model: MixingModel, query: Query) -> bool:
    known = model.validity.get("frequency")
    frequency = query.probe.get("frequency")
    return known is None or frequency is None or not bool(known.excludes(frequency))


def _typical(soil: Soil) -> float:
    return TYPICAL["organic" if _organic(soil) else "mineral"]


def _has_temperature(query: Query) -> bool:
    return "temperature" in query.columns or query.assumed_temperature is not None


def _organic(soil: Soil) -> bool:
    return soil.values.get("organic_matter", 0.0) >= ORGANIC


def _typical_uncertainty(basis: Basis) -> float:
    """Of one reading at a typical water content, from the model's own forward equation."""
    warm = replace(
        basis,
        salinity=None,
        query=replace(
            basis.query,
            columns=frozenset(),
            assumed_temperature=TYPICAL_TEMPERATURE,
            assumed_temperature_u=0.0,
        ),
    )
    tried = np.linspace(2.0, 60.0, 117)
    probe = Readings(
        tried.size,
        {f"{basis.model.permittivity}_permittivity": tried},
        np.zeros(tried.size, dtype=np.uint64),
    )
    answer = estimate(probe, warm).columns
    off = np.abs(answer["water_content"] - _typical(basis.query.soil))
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
    if frequency is None and "frequency" in query.columns:
        said.append("frequency by reading")
    elif frequency is None:
        said.append(f"frequency not given, {ASSUMED_FREQUENCY / 1e9:g} GHz assumed")
    else:
        said.append(f"{frequency / 1e9:.3g} GHz")
    if not _has_temperature(query):
        said.append("no temperature")
    return ", ".join(said)
