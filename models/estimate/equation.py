"""The mixing model of a request as a measurand: what goes in, and water content out.

One block of readings, its inputs with their uncertainties by who shares them, and the model's own
error as one more input, so that first order, quantiles and draws all see the same equation.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any, Self

import numpy as np
from numpy.typing import ArrayLike, NDArray

from models.estimate.basis import Basis
from models.estimate.permittivity import Permittivity
from models.estimate.surroundings import Surroundings
from models.mixing.physical.complex_refractive import relaxation_loss
from models.relation import Array, column
from models.uncertainty.coverage import two_piece
from models.uncertainty.distributions import Distribution, Normal, Symmetric
from models.uncertainty.exact import Exact
from models.uncertainty.first_order import Input

RELAXATIONS = 6
DRY = 0.02
"""m3/m3, below which loss cannot be told from none: the answer without it is taken."""
OWN = "mixing_model"
"""The model's own error, as an input."""
CONDUCTION_ONLY = "conduction_only"
"""Rows whose loss is that of conduction alone, as an input of an equation that takes all of it."""


@dataclass(frozen=True, slots=True)
class Leaning(Symmetric):
    """A two-piece normal with its peak at the mean; width is the larger of its scales."""

    below: Any
    above: Any

    def from_normal(self, z: ArrayLike) -> Array:
        """The mean, and how far the error is where a standard-normal variable is z."""
        return self.mean + two_piece(z, self.below, self.above)

    def deviate(self, z: Array) -> Array:
        """In units of the width."""
        far = two_piece(z, self.below, self.above)
        return np.divide(far, self.width, out=np.zeros_like(far), where=self.width > 0)

    @property
    def standard_uncertainty(self) -> Array:
        """Root of the second moment about the peak."""
        down, up = column(self.below), column(self.above)
        return np.sqrt(np.square(down) - down * up + np.square(up))


@dataclass(frozen=True, slots=True)
class Equation:
    """Water content of some rows as a function of their inputs."""

    basis: Basis
    inputs: Sequence[Input]

    @classmethod
    def of(
        cls,
        basis: Basis,
        found: Permittivity,
        around: Surroundings,
        water: Mapping[str, Input],
    ) -> Self:
        """The equation of a block."""
        inputs = [Input("permittivity", found.value, found.of_reading, found.shared)]
        inputs.extend(water.values())
        if "frequency" in basis.takes:
            inputs.append(Input("frequency", around.frequency))
        if "loss" in basis.takes:
            unknown = np.full(found.value.shape, np.nan)
            loss = unknown if found.loss is None else found.loss
            inputs.append(Input("loss", loss, 0.0 if found.loss_u is None else found.loss_u))
            only = False if found.conduction_only is None else found.conduction_only
            inputs.append(Input(CONDUCTION_ONLY, only))
        inputs.extend(
            Input(name, basis.values[name], shared=u)
            for name, u in basis.uncertainties.items()
            if name in basis.values
        )
        return cls(basis, inputs)

    @property
    def at(self) -> dict[str, Any]:
        """Every input at its value."""
        return {given.name: given.value for given in self.inputs}

    def __call__(self, **named: Array) -> Array:
        """Water content where the named inputs are as given; the model's own error adds to it."""
        permittivity, error = named.pop("permittivity"), named.pop(OWN, 0.0)
        only = named.pop(CONDUCTION_ONLY, None)
        parameters = {**self.basis.values, **named}
        if only is None:
            return self.basis.model.to_water_content(permittivity, **parameters) + error
        return self._with_relaxation(permittivity, only, parameters) + error

    def rows(self, index: NDArray[np.intp]) -> Self:
        """The same for some of the rows."""
        return replace(self, inputs=[_some(g, index) for g in self.inputs])

    def distributions(self, below: Array, above: Array) -> dict[str, Distribution]:
        """All inputs as distributions, the model's own error with its two scales among them."""
        every = {given.name: _distribution(given) for given in self.inputs}
        return every | {OWN: Leaning(0.0, np.maximum(below, above), below, above)}

    def _with_relaxation(
        self, permittivity: Array, only: Array, parameters: dict[str, Any]
    ) -> Array:
        """Where the loss is that of conduction alone, relaxation depends on the answer.

        A fixed point from the water content without loss; a step shrinks the error a hundredfold.
        """
        told = parameters.pop("loss")
        theta = without = self.basis.model.to_water_content(permittivity, **parameters)
        for _ in range(RELAXATIONS):
            relaxing = np.where(column(only) > 0, relaxation_loss(theta, **parameters), 0.0)
            theta = self.basis.model.to_water_content(
                permittivity, loss=told + relaxing, **parameters
            )
        dry = np.isnan(theta) & (without <= DRY) & ~np.isnan(told)
        return np.where(dry, without, theta)


def _distribution(given: Input) -> Distribution:
    """Exact where it was never said to be uncertain, whatever the rows hold."""
    scalars = np.ndim(given.per_reading) == np.ndim(given.shared) == 0
    if scalars and given.per_reading == given.shared == 0.0:
        return Exact(given.value)
    return Normal(given.value, given.total)


def _some(given: Input, index: NDArray[np.intp]) -> Input:
    def of(values: ArrayLike) -> Any:
        return column(values)[index] if np.ndim(values) == 1 else values

    if isinstance(given.value, str):
        return given
    return Input(given.name, of(given.value), of(given.per_reading), of(given.shared))
