"""The one shape every temperature compensation of electrical conductivity has."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from models.relation import Array, Elementwise, Relation, column

REFERENCE_TEMPERATURE = 25.0  # Cel


def spread_between_salts(temperature: ArrayLike) -> Array:
    """Relative standard uncertainty of a factor that does not know which salts are dissolved.

    temperature: elementwise, Cel.

    Standard deviation over nine salts at 20 meq/L by the ion conductivities of McCleskey,
    Nordstrom, Ryan and Ball (2012): 1.97 % at 5 Cel, 0.38 % at 20, 0.66 % at 35. Water known to
    hold mostly NaCl or CaCl2 has a third of it.
    """
    away = column(temperature) - REFERENCE_TEMPERATURE
    return np.where(away < 0, -0.0009 * away, 0.0007 * away)


@dataclass(frozen=True, slots=True, kw_only=True)
class TemperatureCompensation(Relation):
    """Conductivity at 25 Cel from conductivity at another temperature, and back.

    ``factor(temperature, /, **parameters)`` is conductivity at 25 Cel over conductivity at
    ``temperature`` (Cel), elementwise: 1 at 25 Cel, falling; NaN where the relation has none.
    """

    factor: Elementwise
    relative_uncertainty: Callable[[ArrayLike], Array] = spread_between_salts
    """Standard uncertainty of the factor over the factor, from temperature, Cel."""

    @np.errstate(all="ignore")
    def to_25(self, conductivity: ArrayLike, temperature: ArrayLike, /, **parameters: Any) -> Array:
        """Conductivity at 25 Cel, in the unit it is given in."""
        return column(conductivity) * self.factor(temperature, **parameters)

    @np.errstate(all="ignore")
    def from_25(
        self, conductivity_25: ArrayLike, temperature: ArrayLike, /, **parameters: Any
    ) -> Array:
        """Conductivity at ``temperature`` from that at 25 Cel, in the unit it is given in."""
        return column(conductivity_25) / self.factor(temperature, **parameters)
