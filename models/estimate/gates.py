"""What an estimate must say about itself: flags from values, ranges and bounds."""

from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from models.estimate.basis import Basis
from models.estimate.permittivity import Permittivity
from models.estimate.salt.conductivities import Conductivities
from models.estimate.salt.pore_water import PoreWater
from models.estimate.salt.salinity import EXTRACT, PORE
from models.estimate.surroundings import Surroundings
from models.estimate.water_content import CONSISTENT, WaterContent
from models.flags import BIT, Flags, without_pore_water
from models.mixing.physical.bounds import hashin_shtrikman
from models.relation import Array
from models.uncertainty.coverage import coverage_factor
from models.uncertainty.quantiles.reliability import Method
from models.water.kaatze_1989 import static_permittivity

CORRECTED = 0.01  # m3/m3 of correction for loss that is worth a flag
SUSPECT = 55.0  # permittivity from which a comparison with water is worth its cost
LEFT_OUT = 0.05  # share of draws without an answer that is worth a flag
NONE = np.uint64(0)
AIR, COLD_WATER = 1.0, 88.0
SOLID, SOLID_U = 4.7, 0.6  # permittivity of mineral solids, where none is given


def flag_inputs(
    found: Permittivity,
    around: Surroundings,
    basis: Basis,
    flags: Flags,
    travel_time: Array | None,
) -> None:
    """Flag readings that hold no permittivity, or an impossible one."""
    unseen = found.uncorrected if found.uncorrected is not None else found.value
    lacking = np.isnan(unseen)
    if lacking.any():
        if travel_time is not None:
            _set(flags, lacking & ~np.isnan(travel_time), "out-of-gate:travel_time")
        _set(flags, lacking & ~_spoiled(flags), "no-permittivity")
    if found.uncorrected is not None:
        _set(flags, np.isnan(found.value) & ~lacking, "too-lossy")
    if basis.model.conducting and found.loss is not None:
        _set(flags, found.loss > 2.0 * found.value, "too-lossy")
    if "loss" in basis.takes:
        lossless = np.ones(flags.shape, bool) if found.loss is None else np.isnan(found.loss)
        _set(flags, lossless & ~lacking, "loss-missing")
    spread = np.sqrt(np.square(found.of_reading) + np.square(found.shared))
    reach = coverage_factor(basis.query.probability) * spread
    with np.errstate(invalid="ignore"):
        high = np.flatnonzero(found.value - reach > SUSPECT)
    if high.size:
        warmth = 0.0 if around.temperature is None else around.temperature
        water = static_permittivity(np.broadcast_to(np.nan_to_num(warmth), flags.shape)[high])
        flags[high[found.value[high] - reach[high] > water]] |= BIT["permittivity-above-water"]
    _flag_bounds(found, reach, basis, flags)


def flag_results(
    content: WaterContent, found: Permittivity, around: Surroundings, basis: Basis, flags: Flags
) -> None:
    """Flag what the equation answered: no answer, outside its range, outside the pores."""
    computed = content.computed
    nothing = np.isnan(computed)
    if nothing.any():
        unanswered = nothing & ~np.isnan(found.value)
        known = ~np.isnan(_temperature(around, flags)) if basis.needs_temperature else True
        slug = "too-lossy" if "loss" in basis.takes else "no-solution"
        _set(flags, unanswered & known & ~_spoiled(flags), slug)
    _flag_impossible(content, flags)
    if content.spread.outside is not None and basis.query.draws is not None:
        left_out = content.spread.outside > LEFT_OUT * basis.query.draws.count
        _set(flags, left_out, "draws-left-out")
    if content.spread.method is not None and basis.query.draws is None:
        _set(flags, content.spread.method == Method.DRAWS, "band-from-draws")
        curved = (content.spread.method > 0) & (content.spread.method < Method.DRAWS)
        _set(flags, curved, "band-from-curvature")
    if content.correction is not None:
        _set(flags, content.correction > CORRECTED, "lossy")
    if content.untaken is not None:
        less = (content.untaken > CORRECTED) & ((flags & BIT["too-lossy"]) == 0)
        _set(flags, less, "conduction-not-corrected")
    if content.leans_for_clay is not None:
        _set(flags, np.broadcast_to(content.leans_for_clay, flags.shape), "low-frequency")
    _flag_ranges(computed, found, around, basis, flags)


def _flag_impossible(content: WaterContent, flags: Flags) -> None:
    """Less water than none, or more than the pores hold: by the band, or beyond it."""
    dry, wet = content.computed < 0.0, content.computed > content.ceiling
    rows = np.flatnonzero(dry | wet)
    if not rows.size:
        return
    off, spread = content.computed[rows], content.spread
    room = np.sqrt(np.square(spread.below[rows]) + content.ceiling_u**2)
    astray = off < -CONSISTENT * spread.above[rows]
    astray |= off - content.ceiling > CONSISTENT * room
    flags[rows[astray]] |= BIT["inconsistent"]
    flags[rows[dry[rows] & ~astray]] |= BIT["drier-than-dry"]
    flags[rows[wet[rows] & ~astray]] |= BIT["wetter-than-pores"]


def flag_meaningless(pore: PoreWater, flags: Flags) -> None:
    """Flag where the pore-water model means nothing: no salt is worked out there."""
    for slug, where in pore.gates().items():
        _set(flags, where, slug)


def flag_pore_water(
    pore: PoreWater,
    salt: Conductivities,
    content: WaterContent,
    basis: Basis,
    flags: Flags,
) -> None:
    """Flag where the pore-water model has no answer, or is outside its range."""
    bulk = pore.inputs["bulk_conductivity"]
    value = salt.columns["pore_water_conductivity"]
    asked = ~np.isnan(content.computed) & ~(np.isnan(bulk) & (not pore.by_loss))
    explained = without_pore_water(flags)
    _set(flags, asked & np.isnan(value) & ~explained, "no-pore-water")
    _flag_spreads(salt, ~np.isnan(value) & ~explained, basis, flags)
    if basis.salinity is None:
        return
    soil = basis.query.soil.values
    outside = np.zeros(flags.shape, dtype=bool)
    for name, known in basis.salinity.model.validity.items():
        at = pore.inputs.get(name, soil.get(name))
        if at is not None and (name != "frequency" or basis.frequency_known):
            outside |= known.beyond(at)
    _set(flags, outside & ~np.isnan(value), "outside-pore-water-range")


def _flag_spreads(
    salt: Conductivities, known: NDArray[np.bool_], basis: Basis, flags: Flags
) -> None:
    """How the ends of both bands were found, and where there is none."""
    draws = basis.query.draws
    for name, spread in ((PORE, salt.pore), (EXTRACT, salt.extract)):
        if spread is None:
            continue
        _set(flags, known & np.isnan(salt.columns[f"{name}_upper"]), "no-upper-end")
        _set(flags, known & (salt.columns[f"{name}_lower"] == 0.0), "no-lower-end")
        if draws is None:
            _set(flags, known & (spread.method == Method.DRAWS), "pore-water-from-draws")
        else:
            _set(flags, known & (spread.outside > LEFT_OUT * draws.count), "draws-left-out")


def _flag_ranges(
    computed: Array, found: Permittivity, around: Surroundings, basis: Basis, flags: Flags
) -> None:
    model = basis.model
    at = {
        f"{model.permittivity}_permittivity": found.value,
        "water_content": computed,
        "frequency": around.known_frequency,
        "temperature": around.temperature,
    }
    outside = np.full(flags.shape, bool(basis.outside))
    for name, known in model.validity.items():
        value = at.get(name)
        if value is None:
            continue
        outside |= known.beyond(value)
    _set(flags, outside & ~np.isnan(computed), "outside-model-range")


def _flag_bounds(found: Permittivity, reach: Array, basis: Basis, flags: Flags) -> None:
    """Outside Hashin-Shtrikman for dry and saturated soil, at the far ends of what is known."""
    soil = basis.query.soil
    if "porosity" not in soil.values:
        return
    k = coverage_factor(basis.query.probability)
    driest, wettest = _bounds(
        min(soil.values["porosity"] + k * soil.uncertainties["porosity"], 0.99),
        soil.values.get("solid_permittivity", SOLID),
        k * soil.uncertainties.get("solid_permittivity", SOLID_U),
    )
    outside = (found.value + reach < driest) | (found.value - reach > wettest)
    _set(flags, outside, "outside-bounds")


@lru_cache(maxsize=64)
def _bounds(porosity: float, solid: float, spread: float) -> tuple[float, float]:
    """Lower bound of dry soil and upper bound of saturated soil."""
    low, high = max(solid - spread, 1.5), solid + spread
    driest = hashin_shtrikman(((1.0 - porosity, low), (porosity, AIR)))[0]
    wettest = hashin_shtrikman(((1.0 - porosity, high), (porosity, COLD_WATER)))[1]
    return float(driest), float(wettest)


def _temperature(around: Surroundings, flags: Flags) -> Array:
    if around.temperature is None:
        return np.full(flags.shape, np.nan)
    return np.broadcast_to(around.temperature, flags.shape)


_SPOILING = np.bitwise_or.reduce(
    [
        bit
        for slug, bit in BIT.items()
        if slug.partition(":")[0]
        in {
            "unreadable",
            "out-of-gate",
            "unreadable-row",
            "unusable-uncertainty",
            "loss-missing",
            "no-end-reflection",
        }
    ]
)


def _spoiled(flags: Flags) -> NDArray[np.bool_]:
    """Rows whose lack of a number is already explained."""
    return (flags & _SPOILING) != 0


def _set(flags: Flags, where: NDArray[np.bool_], slug: str) -> None:
    if where.any():
        flags |= np.where(where, BIT[slug], NONE)
