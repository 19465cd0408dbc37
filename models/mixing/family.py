"""The one shape every dielectric mixing model has."""

from dataclasses import dataclass
from typing import Literal

from models.relation import Elementwise, Relation


@dataclass(frozen=True, slots=True, kw_only=True)
class Discrepancy:
    """What a model's own equation leaves unexplained, one standard deviation of water content.

    ``standard_uncertainty`` holds well inside the model's declared range; how it grows outside is
    decided in ``models.estimate.own.discrepancy`` for all models alike.
    """

    standard_uncertainty: float
    reason: str
    wet_uncertainty: float = 0.0
    """Above a permittivity of 20, where it is larger there; 0: the same everywhere."""


@dataclass(frozen=True, slots=True, kw_only=True)
class MixingModel(Relation):
    """Water content and permittivity of one soil, each from the other.

    ``to_water_content(permittivity, /, **parameters)`` and
    ``to_permittivity(water_content, /, **parameters)`` are exact inverses of each other over the
    range; parameters are scalars or arrays that broadcast; NaN where there is no answer; no
    warning is ever emitted.
    """

    to_water_content: Elementwise
    to_permittivity: Elementwise
    permittivity: Literal["apparent", "real"]
    """Which permittivity the equation speaks of: Ka, or eps'."""
    water: str | None = None
    """The water model whose permittivity it was made with; None: it takes no water."""
    published_error: float | None = None
    """Standard error of water content as the authors report it, m3/m3; None: not stated."""
    discrepancy: Discrepancy
    soils: Literal["mineral", "organic", "any"] = "any"
    conducting: bool = False
    """The equation already holds the conduction of the soil: its Ka must not be corrected."""
    fitted_by_caller: bool = False
    """Its coefficients are the caller's own: valid where they were fitted."""
