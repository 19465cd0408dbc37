"""What is physically possible, and how probable a band is to hold the truth."""

from dataclasses import dataclass

import numpy as np

from models.relation import Array
from models.uncertainty.coverage import Interval, shortest_interval


@dataclass(frozen=True, slots=True)
class Bounds:
    """The range a quantity lies in, in the unit of the series, and the coverage probability."""

    low: float = -np.inf
    high: float = np.inf
    probability: float = 0.95

    def band(self, value: Array, standard_uncertainty: Array) -> Interval:
        """Shortest interval of a normal distribution that lies in the range."""
        u = standard_uncertainty
        return shortest_interval(
            value, u, u, low=self.low, high=self.high, probability=self.probability
        )
