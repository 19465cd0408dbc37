"""Estimates for the blocks of one table: settled at its first block, the same for all of it."""

from collections.abc import Mapping

from models.advisories import Advice
from models.conversion import from_si
from models.estimate import Basis, Remarks, columns_of, estimate
from models.quantity import band_names
from models.readings import Readings
from service.formats.block import Answer, Block
from service.schemas.echo import units_of_answer
from service.schemas.estimates import EstimatesSettings
from service.schemas.query import basis_of

APPENDED = frozenset({
    "conduction_correction",
    *band_names("water_content"),
    *band_names("bulk_conductivity_25"),
    *band_names("pore_water_conductivity"),
    *band_names("saturation_extract_conductivity"),
})  # fmt: skip
"""Every column an answer may append, so that no table already has one of the name."""


class TableEstimates:
    """What a conversion calls with each block of a table."""

    def __init__(self, settings: EstimatesSettings) -> None:
        self.settings = settings
        self.basis: Basis | None = None
        self.remarks = Remarks()

    def __call__(self, block: Block) -> Answer:
        """The estimates of a block, in the caller's units.

        Raises ModelError, at the first block, when the request cannot be settled.
        """
        if self.basis is None:
            self.basis = basis_of(self.settings, block.values)
        units = self.settings.units
        readings: Readings = block.readings(units)
        result = estimate(readings, self.basis)
        self.remarks.note(block.values, units, result.flags)
        columns = {name: from_si(name, v, units) for name, v in result.columns.items()}
        return Answer(columns, result.flags)

    @property
    def advice(self) -> tuple[Advice, ...]:
        """What the answer must be read with."""
        if self.basis is None:
            return ()
        return (*self.basis.advice, *self.remarks.advice(self.settings.units))

    def headers(self) -> Mapping[str, str]:
        """What a table cannot say in its cells: model, units, advisories."""
        if self.basis is None:
            return {}
        basis = self.basis
        units = units_of_answer(columns_of(basis), self.settings.units)
        return {
            "Mixing-Model": basis.model.key,
            **({"Pore-Water-Model": basis.salinity.model.key} if basis.salinity else {}),
            "Units": ", ".join(f"{name}={unit}" for name, unit in units.items()),
            "Advisories": ", ".join(said.code for said in self.advice),
        }
