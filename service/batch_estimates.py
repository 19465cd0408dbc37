"""Estimates for the blocks of one table: settled at its first block, the same for all of it."""

from collections.abc import Mapping

from models.advisories import Advice
from models.conversion import from_si
from models.estimate import Basis, Estimates, Remarks, columns_of, estimate
from models.estimate.beside.ensemble import COLUMNS, EveryModel
from models.quantity import band_names
from models.readings import Readings
from service.answers.effort import refuse_effort
from service.errors import Unprocessable
from service.faults import Fault, nearest, shown
from service.formats.block import Answer, Block
from service.schemas.echo import echo_of, headers_of, units_of_answer
from service.schemas.echo_beside import ensemble_echo
from service.schemas.estimates import EstimatesSettings
from service.schemas.query import basis_of

APPENDED = frozenset({
    "conduction_correction",
    "model_spread",
    *band_names("water_content"),
    *band_names("bulk_conductivity_25"),
    *band_names("pore_water_conductivity"),
    *band_names("saturation_extract_conductivity"),
})  # fmt: skip
"""Every column an answer may append, so that no table already has one of the name."""


def wanted_columns(text: str | None) -> tuple[str, ...] | None:
    """Names of the columns to append; None: all of them.

    Raises Unprocessable for a name that no answer has.
    """
    if text is None:
        return None
    names = tuple(name.strip() for name in text.split(",") if name.strip())
    faults = []
    for name in names:
        if name not in APPENDED:
            meant = nearest(name, APPENDED)
            hint = f"; did you mean {meant}?" if meant else ""
            faults.append(Fault(f"no answer has a column {shown(name)}{hint}", "?columns"))
    if faults:
        raise Unprocessable("columns names what no answer has", faults)
    return names


class TableEstimates:
    """What a conversion calls with each block of a table."""

    def __init__(self, settings: EstimatesSettings, drawn_values: int | None = None) -> None:
        """drawn_values: the limit on draws times readings times models, where there is one."""
        self.settings, self.drawn_values = settings, drawn_values
        self.rows = 0
        self.columns: tuple[str, ...] = ()
        self.basis: Basis | EveryModel | None = None
        self.remarks = Remarks()

    def __call__(self, block: Block) -> Answer:
        """The estimates of a block, in the caller's units.

        Raises ModelError, at the first block, when the request cannot be settled; Unprocessable,
        at the block where it becomes too much, when it asks for more draws than it may.
        """
        self.rows += len(block)
        if self.drawn_values is not None:
            refuse_effort(self.settings, self.rows, self.drawn_values)
        if self.basis is None:
            self.columns = tuple(block.values)
            self.basis = basis_of(self.settings, self.columns)
        units = self.settings.units
        readings: Readings = block.readings(units)
        if isinstance(self.basis, EveryModel):
            together = self.basis.estimate(readings)
            result = Estimates(together.columns, together.flags)
        else:
            result = estimate(readings, self.basis)
        self.remarks.note(block.values, units, result.flags, result.columns)
        columns = {name: from_si(name, v, units) for name, v in result.columns.items()}
        return Answer(columns, result.flags)

    @property
    def advice(self) -> tuple[Advice, ...]:
        """What the answer must be read with."""
        if self.basis is None:
            return ()
        return (*self.basis.advice, *self.remarks.advice(self.settings.units))

    def headers(self) -> Mapping[str, str]:
        """What a table cannot say in its cells: model, units, advisories, every constant."""
        basis, units = self.basis, self.settings.units
        if basis is None:
            return {}
        remarks = self.remarks.advice(units)
        if isinstance(basis, EveryModel):
            echo, names = ensemble_echo(basis, self.settings, remarks), COLUMNS
        else:
            echo, names = echo_of(basis, self.settings, remarks), columns_of(basis)
        told = {"Columns-Read": ", ".join(self.columns)}
        return told | headers_of(echo, units_of_answer(names, units))
