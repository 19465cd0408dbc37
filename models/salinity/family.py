"""The one shape every model of pore-water conductivity has."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.relation import Array, Elementwise, Relation, column

Marks = Mapping[str, NDArray[np.bool_]]
"""Rows marked, by the slug of what is wrong with them."""

TOO_DRY = "too-dry-for-pore-water"
"""Too little water for the model's path through it."""
OFFSET_TOO_CLOSE = "offset-too-close"
"""The permittivity is so near the model's offset that the rest is noise."""
BELOW_SURFACE = "below-surface-conduction"
"""The soil conducts no better than its surfaces would alone."""

DRIEST = 0.05
"""m3/m3, common practice, from memory: below, no continuous water is left to conduct."""
CLAY_OF_CLASSES = (0.03, 0.20, 0.58)
"""Mean clay content of the texture classes sand, loam and clay, kg/kg."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Discrepancy:
    """What a model leaves unexplained: standard deviation of the logarithm of its answer.

    Beside the uncertainty of readings, soil properties and parameters, which is propagated.
    """

    sand: float
    loam: float
    clay: float
    reason: str
    floor: float = 0.01
    """S/m; what an answer may be off by in fresh water, where a share of it would be nothing."""
    fitted: float | None = None
    """In place of all three, once every one of ``fitted_parameters`` is the site's own."""
    fitted_parameters: tuple[str, ...] = ()

    def relative_uncertainty(self, *, clay: ArrayLike | None = None, fitted: bool = False) -> Array:
        """Standard uncertainty over value, elementwise.

        clay: mass fraction; straight between the class means, and where it is not known (None or
            NaN) the largest of the three.
        fitted: whether all of ``fitted_parameters`` were fitted at the site.
        """
        if fitted and self.fitted is not None:
            return column(self.fitted)
        by_class = (self.sand, self.loam, self.clay)
        content = column(np.nan if clay is None else clay)
        known = np.interp(content, CLAY_OF_CLASSES, by_class)
        return np.where(np.isnan(content), max(by_class), known)

    def standard_uncertainty(
        self,
        pore_water_conductivity: ArrayLike,
        /,
        *,
        clay: ArrayLike | None = None,
        fitted: bool = False,
    ) -> Array:
        """The same in S/m, and never below the floor, elementwise; NaN where there is no value."""
        share = self.relative_uncertainty(clay=clay, fitted=fitted)
        return np.maximum(share * np.abs(column(pore_water_conductivity)), self.floor)


@dataclass(frozen=True, slots=True, kw_only=True)
class PoreWaterModel(Relation):
    """Conductivity of the water in the pores and of the soil as a whole, each from the other.

    ``to_pore_water(bulk_conductivity, /, **parameters)`` and
    ``to_bulk(pore_water_conductivity, /, **parameters)`` are exact inverses, elementwise, S/m;
    parameters are scalars or arrays that broadcast. NaN outside the domain of the equation; no
    warning, no clipping: linear equations go on below zero, and ``gates`` says so.
    """

    to_pore_water: Elementwise
    to_bulk: Elementwise
    at: Literal["soil temperature", "25 Cel"]
    """The temperature that both conductivities must be at."""
    gates: Callable[..., Marks]
    """``gates(bulk_conductivity, /, *, water_content, **parameters)``: where the answer means
    nothing although there may be a number. Takes what ``to_pore_water`` takes, and the water
    content always; NaN is never marked."""
    published_error: str
    """How far off it was found to be, as reported."""
    discrepancy: Discrepancy


def marks(bulk_conductivity: ArrayLike, conditions: Mapping[str, ArrayLike]) -> Marks:
    """Conditions brought to the one shape of all of them and of the bulk conductivity."""
    shapes = (np.shape(condition) for condition in conditions.values())
    shape = np.broadcast_shapes(np.shape(bulk_conductivity), *shapes)
    return {slug: np.broadcast_to(np.asarray(c, bool), shape) for slug, c in conditions.items()}


def above_zero(values: ArrayLike) -> Array:
    """The same, with NaN wherever it is not above zero: nothing conducts there."""
    known = column(values)
    return np.where(known > 0, known, np.nan)
