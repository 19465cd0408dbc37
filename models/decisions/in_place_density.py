"""Siddiqui and Drnevich (1995), Yu and Drnevich (2004): water content and dry density by TDR.

sqrt(Ka) rho_w / rho_d = a + b w, and likewise sqrt(sigma_b) rho_w / rho_d = c + d w. Two steps: the
same soil in a mould of known total density, then in place; one step: permittivity and conductivity
of the same place. a, b, c and d belong to the soil; none of them has a default.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.decisions.outcome import Known, Outcome, carried, outcome
from models.relation import Array, Citation, Range, column

SOURCE = Citation(
    authors="Siddiqui, S. I.; Drnevich, V. P.",
    year=1995,
    title="A new method of measuring density and moisture content of soil using the technique of "
    "time domain reflectometry",
    where="Report FHWA/IN/JTRP-95/9, Purdue University; ASTM D6780",
    equation="sqrt(Ka) rho_w / rho_d = a + b w",
    note="equations and citation from memory; their inversion is algebra",
)
ONE_STEP_SOURCE = Citation(
    authors="Yu, X.; Drnevich, V. P.",
    year=2004,
    title="Soil water content and dry density by time domain reflectometry",
    where="Journal of Geotechnical and Geoenvironmental Engineering 130(9), 922-934",
    equation="sqrt(EC) rho_w / rho_d = c + d w",
    note="abstract read: conductivity is first adjusted to a standard one; algebra ours",
)
WATER_DENSITY = 1000.0
APART = 2.0
"""Standard uncertainties by which a d - b c must differ from zero."""
TEMPERATURES = Range(4.0, 40.0)
_FACTORS: Mapping[str, tuple[float, float]] = {
    "cohesionless": (0.97, 0.0015), "cohesive": (1.10, -0.005),
}  # fmt: skip
KINDS = tuple(_FACTORS)


@dataclass(frozen=True, slots=True)
class InPlace:
    """One row per place, shape (n,); NaN where the equations have no physical answer."""

    gravimetric_water_content: Outcome
    dry_density: Outcome
    """kg/m3."""
    water_content: Outcome
    """m3/m3."""
    total_density: Outcome


@dataclass(frozen=True, slots=True)
class OneStep:
    """In place from one reading, and how well the two equations can be told apart."""

    found: InPlace
    condition_number: Array
    """Of the two equations, each scaled to length one; large: nearly the same equation twice."""
    too_alike: NDArray[np.bool_]
    """a d - b c cannot be told from zero: no number."""


def at_20_degrees(apparent_permittivity: ArrayLike, temperature: ArrayLike, kind: str) -> Array:
    """Ka brought to 20 Cel, elementwise; kind: one of ``KINDS``; from memory.

    Between 15 and 25 Cel not needed. NaN outside 4 to 40 Cel.
    """
    constant, per_degree = _FACTORS[kind]
    warmth = column(temperature)
    factor = np.where(TEMPERATURES.excludes(warmth), np.nan, constant + per_degree * warmth)
    return column(apparent_permittivity) * factor


def brought_to_20_degrees(
    apparent_permittivity: tuple[ArrayLike, ArrayLike], temperature: ArrayLike, kind: str
) -> tuple[Array, Array]:
    """The same of a value and its standard uncertainty, where there is a temperature."""
    value, u = (column(part) for part in apparent_permittivity)
    read = np.isnan(column(temperature))
    return (
        np.where(read, value, at_20_degrees(value, temperature, kind)),
        np.where(read, u, at_20_degrees(u, temperature, kind)),
    )


def two_step(
    field_permittivity: Known,
    mould_permittivity: Known,
    mould_total_density: Known,
    *,
    a: Known,
    b: Known,
    probability: float = 0.95,
) -> InPlace:
    """Water content and dry density in place, from a mould and the field, elementwise.

    Apparent permittivities at one temperature; mould_total_density: kg/m3.
    """
    given = {
        "field": field_permittivity, "mould": mould_permittivity, "total": mould_total_density,
        "a": a, "b": b,
    }  # fmt: skip
    return _told(_wetness_of_mould, _density_of_field, given, probability)


def _wetness_of_mould(field: Array, mould: Array, total: Array, a: Array, b: Array) -> Array:  # noqa: ARG001
    root, density = np.sqrt(mould), total / WATER_DENSITY
    return _positive((root - a * density) / _positive(b * density - root), zero=True)


def _density_of_field(field: Array, mould: Array, total: Array, a: Array, b: Array) -> Array:
    wetness = _wetness_of_mould(field, mould, total, a, b)
    return np.sqrt(field / mould) * total / (1.0 + wetness)


def one_step(
    apparent_permittivity: Known,
    standard_conductivity: Known,
    *,
    a: Known,
    b: Known,
    c: Known,
    d: Known,
    probability: float = 0.95,
) -> OneStep:
    """Water content and dry density in place, from permittivity and conductivity, elementwise.

    standard_conductivity: bulk conductivity adjusted to that of the pore water for which c and d
        hold, in the unit whose root they are for. Without the adjustment the answer is wrong.
    """
    given = {
        "ka": apparent_permittivity,
        "ec": standard_conductivity,
        "a": a,
        "b": b,
        "c": c,
        "d": d,
    }
    parameters = {name: given[name] for name in "abcd"}
    apart, apart_u = carried(lambda a, b, c, d: a * d - b * c, parameters)
    alike = ~(np.abs(apart) > APART * apart_u)

    def checked(measurand: Callable[..., Array]) -> Callable[..., Array]:
        return lambda **at: np.where(alike, np.nan, measurand(**at))

    found = _told(checked(_wetness), checked(_density), given, probability)
    values = (known[0] if isinstance(known, tuple) else known for known in parameters.values())
    rows = np.stack(np.broadcast_arrays(*(np.atleast_1d(column(v)) for v in values)), axis=-1)
    matrix = rows.reshape(-1, 2, 2)
    length = np.linalg.norm(matrix, axis=2, keepdims=True)
    scaled = matrix / np.where(length > 0, length, 1.0)
    return OneStep(found, np.linalg.cond(scaled), alike)


def _wetness(ka: Array, ec: Array, a: Array, b: Array, c: Array, d: Array) -> Array:
    ka, ec = np.sqrt(ka), np.sqrt(ec)
    return _positive((c * ka - a * ec) / (b * ec - d * ka), zero=True)


def _density(ka: Array, ec: Array, a: Array, b: Array, c: Array, d: Array) -> Array:
    ka, ec = np.sqrt(ka), np.sqrt(ec)
    return _positive(WATER_DENSITY * (d * ka - b * ec) / (a * d - b * c))


def _told(
    wetness: Callable[..., Array],
    density: Callable[..., Array],
    given: Mapping[str, Known],
    probability: float,
) -> InPlace:
    """Each number with its own uncertainty: water content and density err together."""

    def told(measurand: Callable[..., Array]) -> Outcome:
        return outcome(measurand, given, low=0.0, probability=probability)

    return InPlace(
        gravimetric_water_content=told(wetness),
        dry_density=told(density),
        water_content=told(lambda **at: wetness(**at) * density(**at) / WATER_DENSITY),
        total_density=told(lambda **at: (1.0 + wetness(**at)) * density(**at)),
    )


def _positive(values: Array, *, zero: bool = False) -> Array:
    """Values that are physical, NaN for the others."""
    return np.where((values >= 0) if zero else (values > 0), values, np.nan)


def compaction_of(dry_density: Outcome, largest: Known, *, probability: float = 0.95) -> Outcome:
    """Dry density over the largest one of a reference test, elementwise."""
    given = {"dry": (dry_density.value, dry_density.standard_uncertainty), "largest": largest}
    return outcome(_share, given, low=0.0, probability=probability)


def _share(dry: Array, largest: Array) -> Array:
    return dry / largest
