"""Water content, pore-water conductivity and bound water of a band, with what is known of each.

Uncertainty has two parts. The noise of the spectrum is the reading's own: the covariance of the
fit. What is assumed of the soil (porosity, solids, exponent), the temperature, and what the mixing
model leaves unexplained are shared by all spectra of that soil; the fit is repeated from where it
stands with each of them half a step either way (JCGM 100, 5.1.3, note 2).
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from models.conductivity.corwin_lesch_2005 import CORWIN_LESCH_2005
from models.estimate.own.discrepancy import Setting, model_uncertainty
from models.mixing import MIXING_MODELS
from models.relation import Array
from models.salinity.complex_refractive import COMPLEX_REFRACTIVE
from models.spectrum.description import restricted
from models.spectrum.water.inversion import Band, refined

BESIDE = 0.5
"""Relative: the path of a current that lies beside the mixture is not the mixture's own."""
WATER_U = 0.002
"""Relative standard uncertainty of the permittivity of the pore water, salt included; the water
content answers with half of it."""


@dataclass(frozen=True, slots=True)
class Soil:
    """Inputs of the mixing model that are not exact: standard uncertainties by name, SI."""

    uncertainties: Mapping[str, float]
    temperature: float
    temperature_u: float
    porosity: float
    clay: float | None = None
    organic_matter: float | None = None


@dataclass(frozen=True, slots=True)
class Told:
    """One quantity of the answer, SI; NaN where there is no number."""

    name: str
    value: float
    standard_uncertainty: float
    shared: float
    """The part of it that all spectra of this soil share."""
    lower: float
    upper: float


def told_by(band: Band, soil: Soil, probability: float) -> tuple[Told, ...]:
    """What a fitted band says of the soil, with bands."""
    outputs = _outputs(band, soil.temperature)
    own = _own(band, soil.temperature)
    effects = [_effect(band, soil, name) for name in (*soil.uncertainties, "temperature")]
    shared = np.sqrt(sum((np.square(effect) for effect in effects), np.zeros(len(outputs))))
    shared = np.hypot(shared, _unexplained(band, soil, outputs))
    total = np.hypot(own, shared)
    highest = {"water_content": min(1.0, soil.porosity + 2 * soil.uncertainties.get("porosity", 0)),
               "bound_water_content": soil.porosity}  # fmt: skip
    found = []
    for place, name in enumerate(NAMES):
        if name == "bound_water_content" and not band.variant.bound:
            continue
        high = highest.get(name, np.inf)
        value = float(outputs[place])
        ends = restricted(value, total[place], 0.0, high, probability)
        value = min(max(value, 0.0), high)
        found.append(Told(name, value, float(total[place]), float(shared[place]), *ends))
    return tuple(found)


NAMES = ("water_content", "pore_water_conductivity", "bulk_conductivity", "bound_water_content")


def _outputs(band: Band, temperature: float) -> Array:
    water, bulk = band.conductivities
    at_25 = float(CORWIN_LESCH_2005.to_25(water, temperature))
    return np.array([band.water_content, at_25, bulk, band.value("bound_water_content")])


def _own(band: Band, temperature: float) -> Array:
    """Standard uncertainty from the noise of the spectrum, by output."""
    u = np.sqrt(np.diagonal(band.covariance).clip(0.0))
    slopes = []
    for place, width in enumerate(u):
        step = min(1e-4 * max(abs(float(band.vector[place])), 1e-3), float(width) or 1.0)
        ends = [_outputs(replace(band, vector=_moved(band.vector, place, by)), temperature)
                for by in (step, -step)]  # fmt: skip
        slopes.append((ends[0] - ends[1]) / (2 * step))
    matrix = np.array(slopes)
    spread: Array = np.einsum("io,ij,jo->o", matrix, band.covariance, matrix)
    return np.sqrt(spread.clip(0.0))


def _moved(vector: Array, place: int, by: float) -> Array:
    moved = vector.copy()
    moved[place] += by
    return moved


def _effect(band: Band, soil: Soil, name: str) -> Array:
    """What one standard uncertainty of an input does to every output."""
    if name == "temperature" and not soil.temperature_u:
        return np.zeros(len(NAMES))
    move = _warmer if name == "temperature" else _other_soil
    above, below = (_outputs(*move(band, soil, name, by)) for by in (1.0, -1.0))
    return np.asarray((above - below) / 2)


def _warmer(band: Band, soil: Soil, _name: str, by: float) -> tuple[Band, float]:
    temperature = soil.temperature + by * soil.temperature_u
    return refined(band, temperature), temperature


def _other_soil(band: Band, soil: Soil, name: str, by: float) -> tuple[Band, float]:
    value = band.scene.parameters[name] + by * soil.uncertainties[name]
    scene = replace(band.scene, parameters={**band.scene.parameters, name: value})
    return refined(replace(band, scene=scene), soil.temperature), soil.temperature


def _unexplained(band: Band, soil: Soil, outputs: Array) -> Array:
    """What the mixing model leaves open, by output."""
    known = np.atleast_1d(band.fitted[0].real.min())
    setting = Setting(
        permittivity=known, water_content=outputs[:1], frequency=np.full(1, np.nan),
        temperature=np.full(1, soil.temperature), temperature_u=np.zeros(1), conductivity=None,
        clay=soil.clay, organic_matter=soil.organic_matter,
    )  # fmt: skip
    content = float(model_uncertainty(MIXING_MODELS[band.scene.model], setting)[0])
    salt = float(COMPLEX_REFRACTIVE.discrepancy.standard_uncertainty(outputs[1], clay=soil.clay))
    if band.variant.beside:
        salt = float(np.hypot(salt, BESIDE * outputs[1]))
    bound = content if band.variant.bound else 0.0
    content = float(np.hypot(content, outputs[0] * WATER_U / 2))
    return np.array([content, salt, 0.0, bound])
