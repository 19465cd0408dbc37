"""The mixing model's own error at each reading, and what conduction leaves open beside it."""

from dataclasses import dataclass

import numpy as np

from models.conductivity.loss import conduction_loss
from models.estimate.basis import Basis
from models.estimate.equation import Equation
from models.estimate.own.discrepancy import TDR_LOWEST, Setting, lean_down, model_uncertainty
from models.estimate.permittivity import Permittivity
from models.estimate.surroundings import Surroundings
from models.mixing.apparent import to_real
from models.readings import Readings
from models.relation import Array
from models.soil.description import MINERAL_ORGANIC

UNEXPLAINED_CORRECTION = 0.5
"""Share of a correction for loss that counts as its own standard uncertainty: in soils made by the
complex refractive index, half of the correction to all of it is still missing after it."""


@dataclass(frozen=True, slots=True)
class Reading:
    """A block of readings, what is known around them, and the permittivity that is used."""

    readings: Readings
    basis: Basis
    found: Permittivity
    around: Surroundings

    @property
    def uncorrected(self) -> Array | None:
        """Bulk conductivity of the rows in which nothing was done about it."""
        bulk, model = self.readings.columns.get("bulk_conductivity"), self.basis.model
        if bulk is None or "loss" in self.basis.takes or model.conducting:
            return None
        return bulk if self.found.loss is None else np.where(np.isnan(self.found.loss), bulk, 0.0)

    def setting(self, computed: Array) -> Setting:
        """What of it matters for the model's own error."""
        soil, around = self.basis.query.soil, self.around
        organic = MINERAL_ORGANIC if soil.texture else None
        return Setting(
            permittivity=self.found.value,
            water_content=computed,
            frequency=around.known_frequency,
            temperature=around.temperature,
            temperature_u=around.temperature_u,
            conductivity=self.uncorrected,
            clay=soil.values.get("clay"),
            organic_matter=soil.values.get("organic_matter", organic),
        )


@dataclass(frozen=True, slots=True)
class OwnError:
    """Standard uncertainties of the equation itself, m3/m3, shape (n,)."""

    own: Array
    """Both ways, what a correction for loss leaves open included;"""
    lean: Array | None
    """downward, beside it; None: nowhere."""
    correction: Array | None
    """By how much correcting for loss lowered the value;"""
    untaken: Array | None
    """by how much it would have, where the model holds the conduction of its own soils."""
    of_conduction: tuple[Array | None, Array | None]
    """Variance in ``own``, and square in ``lean``, that is there for conduction."""

    def parted(self, leaning: Array) -> tuple[Array, Array | None]:
        """The model's own part of all of it, and that of conduction; None: there is none.

        leaning: what the lean adds to the second moment.
        """
        both, (unexplained, down) = np.square(self.own) + leaning, self.of_conduction
        if self.lean is not None and down is not None:
            square = np.square(self.lean)
            share = np.divide(down, square, out=np.zeros_like(square), where=square > 0)
            unexplained = share * leaning + (0.0 if unexplained is None else unexplained)
        if unexplained is None:
            return np.sqrt(np.maximum(both, 0.0)), None
        return np.sqrt(np.maximum(both - unexplained, 0.0)), np.sqrt(unexplained)


def own_error(reading: Reading, equation: Equation, computed: Array, pores: float) -> OwnError:
    """The equation's own error around ``computed``, shape (n,), m3/m3.

    pores: porosity, or 1 where it is not known.
    """
    basis, found = reading.basis, reading.found
    own, lean = _of_model(basis, reading.setting(computed), pores)
    correction = unexplained = down = None
    if found.uncorrected is not None:
        moved = equation.at | {"permittivity": found.uncorrected}
        correction = equation(**moved) - computed
        unexplained = np.square(UNEXPLAINED_CORRECTION * correction)
        own = np.sqrt(np.square(own) + unexplained)
    unseen, untaken = _unseen(reading, equation, computed), _untaken(reading, equation, computed)
    for known in (unseen, None if untaken is None else UNEXPLAINED_CORRECTION * untaken):
        if known is not None and basis.query.standard_error is None:
            down = np.square(known) + (0.0 if down is None else down)
            lean = known if lean is None else np.sqrt(np.square(lean) + np.square(known))
    return OwnError(own, lean, correction, untaken, (unexplained, down))


def _of_model(basis: Basis, at: Setting, pores: float) -> tuple[Array, Array | None]:
    """The caller's figure as it stands, or ours, which knows where it is."""
    stated = basis.query.standard_error
    if stated is not None:
        return np.full(at.permittivity.shape, stated), None
    lean = lean_down(basis.model, at, pores)
    if lean is not None:
        lean = np.broadcast_to(lean, at.permittivity.shape)
    return model_uncertainty(basis.model, at), lean


def _unseen(reading: Reading, equation: Equation, computed: Array) -> Array | None:
    """How much too wet a row may read whose conductivity is known and whose frequency is not.

    The correction at the lowest frequency of TDR; None where there is no such row.
    """
    bulk = reading.uncorrected
    if bulk is None or not np.any(bulk > 0.0):
        return None
    loss = conduction_loss(np.nan_to_num(bulk), TDR_LOWEST)
    return _lowered(loss, reading.found, equation, computed)


def _untaken(reading: Reading, equation: Equation, computed: Array) -> Array | None:
    """How much wetter a row reads for all of its loss, where the model makes no correction.

    The soils it was made from conducted as well: how much of it the model holds is not known.
    """
    if not reading.basis.model.conducting or reading.found.loss is None:
        return None
    return _lowered(np.nan_to_num(reading.found.loss), reading.found, equation, computed)


def _lowered(loss: Array, found: Permittivity, equation: Equation, computed: Array) -> Array:
    """By how much less water there would be without that loss."""
    slowest = np.maximum(np.nan_to_num(to_real(found.value, loss)), 1.0)
    off = computed - equation(**equation.at | {"permittivity": slowest})
    return np.maximum(np.nan_to_num(off), 0.0)
