"""Three conductivities of each reading, with bands: bulk at 25 Cel, pore water, saturation extract.

Bands of the pore water and of the extract are those of a factor, positive by construction
(``bands.py``). That of the bulk conductivity is a normal one restricted to what is not negative.
"""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from models.estimate.basis import Basis
from models.estimate.derived import sources_of
from models.estimate.moving import Moving, moving
from models.estimate.permittivity import Permittivity
from models.estimate.salt.bands import Asked, Spread, Through, spread_of
from models.estimate.salt.chain import Chain
from models.estimate.salt.pore_water import PoreWater
from models.estimate.salt.salinity import BULK_25, EXTRACT, PORE
from models.estimate.salt.stepped import Stepped
from models.estimate.sources import bends_of_water_content, of_water_content
from models.estimate.water_content import most_water
from models.quantity import band_names
from models.relation import Array
from models.salinity.saturation_extract import to_extract
from models.uncertainty.coverage import coverage_factor, shortest_interval
from models.uncertainty.first_order import Input

Columns = dict[str, Array]
TENFOLD = float(np.log(10.0))
PUREST = 5.5e-6
"""S/m at 25 Cel of water without any ions but its own, handbooks, from memory: less is no salt, and
what a model leaves of it is rounding."""
BRINE = 25.0
"""S/m at 25 Cel of water saturated with sodium chloride, common practice, from memory: an upper end
beyond it says no more than that there is none."""


@dataclass(frozen=True, slots=True)
class Conductivities:
    """Columns of all three, S/m, NaN where an input is missing; how the ends were found."""

    columns: Columns
    pore: Spread
    extract: Spread | None


def conductivities_of(
    pore: PoreWater,
    found: Permittivity,
    water: Mapping[str, Input],
    basis: Basis,
    nothing: NDArray[np.bool_],
) -> Conductivities:
    """All three conductivities of a block.

    found, water: the permittivity and the water that the water content came from. nothing: rows
        whose flags say that there is no pore water to tell; they cost no draws.
    """
    value, content = pore.at_25(), pore.content
    value = np.where((value < PUREST) | nothing, np.nan, value)
    own = pore.own_uncertainty(value)
    through = Through(
        of_water_content(found, water, content), bends_of_water_content(found, water, content)
    )
    bare = basis.query.standard_error == pore.salinity.query.standard_error == 0.0
    asked = Asked(basis.query.probability, basis.query.draws, bare)
    most = np.inf if asked.draws is None else most_water(basis)

    def chain(paste: Mapping[str, Moving]) -> Chain:
        return Chain.of(pore, found, water, content, own, paste=paste, most=most)

    stepped = Stepped.of(pore, value, own)
    spread = spread_of(stepped, through, content, lambda: chain({}), asked)
    columns = _bulk_at_25(pore, asked.probability) if pore.salinity.tells_bulk else {}
    columns |= _factor(PORE, value, spread, asked)
    paste = _paste(pore)
    if not paste:
        return Conductivities(columns, spread, None)
    known = {name: each.value for name, each in paste.items()}
    extract = to_extract(value, water_content=pore.inputs["water_content"], **known)
    stepped = stepped.of_extract(pore, extract, paste)
    of_extract = spread_of(stepped, through, content, lambda: chain(paste), asked)
    columns |= _factor(EXTRACT, extract, of_extract, asked)
    return Conductivities(columns, spread, of_extract)


def _paste(pore: PoreWater) -> dict[str, Moving]:
    """Saturation percentage and bulk density; empty where either is not known."""
    paste, density = pore.salinity.paste, pore.salinity.density
    if paste is None or density is None:
        return {}
    soil, origin = pore.soil, pore.soil.origins["bulk_density"]
    name, spread = "saturation_percentage", paste.standard_uncertainty
    return {
        name: moving(paste.value, **sources_of(soil, name, spread, paste.origin)),
        "bulk_density": moving(density[0], **sources_of(soil, "bulk_density", density[1], origin)),
    }


def _bulk_at_25(pore: PoreWater, probability: float) -> Columns:
    bulk, warmth = pore.inputs["bulk_conductivity"], pore.inputs["temperature"]
    factor = pore.factor(warmth)
    value = bulk * factor
    warmer = bulk * pore.factor(warmth + pore.widths["temperature"]) - value
    spread = np.square(factor * pore.widths["bulk_conductivity"]) + np.square(warmer)
    shared = value * pore.salinity.compensation.relative_uncertainty(warmth)
    total = np.sqrt(spread + np.square(shared))
    ends = shortest_interval(value, total, total, low=0.0, high=np.inf, probability=probability)
    columns = (value, total, shared, ends.lower, ends.upper)
    return dict(zip(band_names(BULK_25), columns, strict=True))


@np.errstate(all="ignore")
def _factor(name: str, value: Array, spread: Spread, asked: Asked) -> Columns:
    """Value, standard uncertainty and ends; the second is the value's share times the value."""
    known, upper = np.where(value > 0, value, np.nan), np.exp(spread.upper)
    upper = np.where(upper > np.maximum(BRINE, known), np.nan, upper)
    fitting = (
        np.ones_like(known) if asked.draws is not None else _fitting(known, upper, spread, asked)
    )
    u = known * fitting
    return {
        name: known, f"{name}_u": u * spread.total, f"{name}_u_shared": u * spread.shared,
        f"{name}_lower": np.exp(spread.lower), f"{name}_upper": upper,
    }  # fmt: skip


def _fitting(known: Array, upper: Array, spread: Spread, asked: Asked) -> Array:
    """What makes the uncertainty of first order that of the interval.

    Near a conductivity that has no answer first order is steep beyond all measure. Half of the
    interval is k standard uncertainties; where it reaches further than ten times the value, or a
    tenth of it, or has no end, it counts as so far.
    """
    below = np.minimum(np.log(known) - spread.lower, TENFOLD)
    above = np.fmin(np.log(upper / known), TENFOLD)
    told = coverage_factor(asked.probability) * spread.total
    return np.where(told > 0, 0.5 * (below + above) / told, 1.0)
