"""The one shape every model of liquid water has."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

from numpy.typing import ArrayLike

from models.relation import Array, Range, Relation, ranges

Parts = tuple[Array, Array]
"""Real part and loss (both >= 0) of a relative permittivity: eps' and eps''."""


@dataclass(frozen=True, slots=True, kw_only=True)
class WaterModel(Relation):
    """Permittivity of water from frequency and temperature.

    ``parts(frequency, temperature, conductivity_25=0.0)`` returns (eps', eps''), elementwise;
    Hz, Cel, S/m at 25 Cel. eps'' includes conduction. Models of pure water ignore the
    conductivity except in the conduction loss.

    The uncertainties are standard uncertainties (k = 1) within ``validity``. They are three
    independent errors of parameters, each of them common to all frequencies and temperatures.
    """

    parts: Callable[..., Parts]
    static: Callable[[ArrayLike], Array]
    """Static permittivity of pure water from temperature, Cel."""
    static_uncertainty: float
    """Of the static permittivity, absolute."""
    static_departure: float
    """Largest difference of the static permittivity from IAPWS R8-97 at 0.1 MPa between 0 and
    60 Cel, inside ``validity`` or not."""
    relaxation_time_uncertainty: float = 0.0
    """Of the main relaxation time, relative; 0 where the model has no relaxation."""
    infinite_uncertainty: float = 0.0
    """Of the permittivity far above the relaxation, absolute."""
    salt_effect_uncertainty: float = 0.0
    """Of the drop that salt makes in the static permittivity, relative to that drop; 0 where the
    model has none."""
    saline_validity: Mapping[str, Range] = field(default_factory=ranges)
    """Where the source vouches for the effect of salt on permittivity; outside, the model goes on
    smoothly."""
