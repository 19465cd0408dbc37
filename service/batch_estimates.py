"""Estimates for the blocks of one table: settled at its first block, the same for all of it."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace

import numpy as np

from models.advisories import Advice, advise
from models.conversion import from_si
from models.estimate import Basis, Estimates, Remarks, columns_of, estimate, narrowed
from models.estimate.beside.ensemble import COLUMNS, EveryModel
from models.flags import BIT
from models.quantity import band_names
from models.readings import Readings
from service.answers.advice import (
    advice_on_columns,
    advice_on_settings,
    in_a_header,
    remarks_of,
)
from service.answers.by_name import Grounds, naming
from service.answers.columns import CONDUCTIVITIES
from service.answers.effort import refuse_effort
from service.formats.block import Answer, Block, row_in_words
from service.formats.header import check_keys, folded
from service.schemas.echo import echo_of, headers_of, headers_of_several, units_of_answer
from service.schemas.echo_beside import ensemble_echo
from service.schemas.estimates import ALL, EstimatesSettings, model_name
from service.schemas.query import basis_of
from service.schemas.wording import QUERY


class TableEstimates:
    """What a conversion calls with each block of a table."""

    def __init__(
        self,
        settings: EstimatesSettings,
        drawn_values: int | None = None,
        grounds: Callable[[tuple[str, ...]], Grounds] | None = None,
        wanted: Sequence[str] | None = None,
    ) -> None:
        """drawn_values: the limit on draws times readings times models, where there is one.

        wanted: the columns that are asked for; None: all.

        grounds: makes what the rows rest on, from the columns that are read, for a table whose
        rows name their soil or probe; None: such a column passes through.
        """
        self.settings, self.drawn_values = settings, drawn_values
        self.rows = 0
        self.columns: tuple[str, ...] = ()
        self.basis: Basis | EveryModel | None = None
        self._worked: Basis | EveryModel | None = None
        self.remarks = Remarks()
        self._make = grounds
        self._wanted = wanted
        self._naming: tuple[str, ...] = ()
        self._grounds: Grounds | None = None
        self._begun = False
        self._named: tuple[Advice, ...] = ()
        self._unread, self._first_unread = 0, dict[str, object]()

    def __call__(self, block: Block) -> Answer:
        """The estimates of a block, in the caller's units.

        Raises ModelError, at the first block, when the request cannot be settled; Unprocessable,
        at the block where it becomes too much, when it asks for more draws than it may.
        """
        self.rows += len(block)
        if self.drawn_values is not None:
            refuse_effort(self.settings, self.rows, self.drawn_values)
        if not self._begun:
            self._begin(block)
        units = self.settings.units
        answer = self._by_name(block) if self._grounds else self._by_request(block)
        self._note(block, answer)
        columns = {name: from_si(name, v, units) for name, v in answer.columns.items()}
        return replace(answer, columns=columns)

    def _note(self, block: Block, answer: Answer) -> None:
        """Rows that cannot be taken apart are said to be that alone; values are remarked on."""
        answer.flags[block.broken] = BIT["unreadable-row"]
        self.remarks.note(block.values, self.settings.units, answer.flags, answer.columns,
                          block.unreadable)  # fmt: skip
        if not block.broken.any():
            return
        self._unread += int(np.count_nonzero(block.broken))
        if not self._first_unread:
            row = int(block.broken.argmax())
            expected, found = row_in_words(block, row)
            self._first_unread = {
                "line": int(block.lines[row]), "expected": expected, "found": found,
            }  # fmt: skip

    def _begin(self, block: Block) -> None:
        self._begun, self.columns = True, tuple(block.values)
        if block.header.form == "ndjson":  # others have told it by their header
            first = str(block.records[0]) if len(block) else ""
            check_keys(block.header.names, self.columns, int(block.lines[0]), first)
        named = naming(block.header.names) if self._make else ()
        if self._make and named:
            self._naming, self._grounds = named, self._make(self.columns)
        else:
            self.basis = self._worked = basis_of(self.settings, self.columns)
            if isinstance(self.basis, Basis) and self._wanted is not None:
                self._worked = narrowed(self.basis, self._wanted)
        self.remarks = remarks_of(self.basis)
        passing = [name for name in block.header.names if folded(name) not in self._naming]
        self._named = advice_on_columns(passing, self.columns)

    def _by_request(self, block: Block) -> Answer:
        assert self._worked is not None  # noqa: S101 - settled at the first block
        result = _estimated(block.readings(self.settings.units), self._worked)
        return Answer(result.columns, result.flags)

    def _by_name(self, block: Block) -> Answer:
        """Each row by the soil and probe it names; the columns do not depend on which."""
        assert self._grounds is not None  # noqa: S101 - see _begin
        readings = block.readings(self.settings.units)
        nothing = np.full(readings.count, np.nan)
        columns = {name: nothing.copy() for name in self._answered}
        flags, refusals = readings.flags.copy(), []
        for part in self._grounds.parts(block):
            rows = part.rows
            if part.ground is None:
                flags[rows] |= np.where(block.broken[rows], np.uint64(0), BIT["not-estimated"])
                refusals += [part.refusal] if part.refusal else []
                continue
            some = {name: values[rows] for name, values in readings.columns.items()}
            own = Readings(len(rows), some, readings.flags[rows])
            result = _estimated(own, part.ground.basis)
            flags[rows] = result.flags
            for name in columns.keys() & result.columns.keys():
                columns[name][rows] = result.columns[name]
        return Answer(columns, flags, tuple(refusals))

    @property
    def _answered(self) -> tuple[str, ...]:
        """The columns of an answer by name: whatever these readings can tell of some soil."""
        if model_name(self.settings) == ALL:
            return COLUMNS
        names = list(band_names("water_content"))
        if {"imaginary_permittivity", "bulk_conductivity"} & set(self.columns):
            names.append("conduction_correction")
        if "bulk_conductivity" in self.columns:
            for quantity in CONDUCTIVITIES:
                names += band_names(quantity)
        return tuple(names)

    @property
    def advice(self) -> tuple[Advice, ...]:
        """What the answer must be read with."""
        bases = [self.basis] if self.basis is not None else []
        bases += [ground.basis for ground in self._grounds.used] if self._grounds else []
        said = (one for basis in bases for one in basis.advice)
        return tuple(dict.fromkeys((*said, *self.seen)))

    @property
    def seen(self) -> tuple[Advice, ...]:
        """What the names, rows and values of this very table give rise to."""
        rows = []
        if self._unread:
            rows.append(advise("unreadable-rows", count=self._unread, **self._first_unread))
        named = (*self._named, *advice_on_settings(self.settings), *rows)
        return (*named, *self.remarks.advice(self.settings.units))

    @property
    def troubles(self) -> tuple[str, ...]:
        """Why rows were not estimated, name by name."""
        return tuple(self._grounds.troubles) if self._grounds else ()

    def headers(self) -> Mapping[str, str]:
        """What a table cannot say in its cells: model, units, advisories, every constant."""
        basis, units = self.basis, self.settings.units
        told = {"Columns-Read": ", ".join((*self._naming, *self.columns))}
        told |= in_a_header("Remarks", [QUERY.text(one.text) for one in self.seen])
        if self._grounds is not None:
            answered = units_of_answer(self._answered, units)
            used = [
                (dict(zip(("soil", "probe"), one.named, strict=True)), one.revisions, one.basis)
                for one in self._grounds.used
            ]
            told |= headers_of_several(used, (one.code for one in self.advice), answered)
            return told | in_a_header("Not-Estimated", self.troubles)
        if basis is None:
            return {}
        remarks = self.seen
        if isinstance(basis, EveryModel):
            echo, names = ensemble_echo(basis, self.settings, remarks), COLUMNS
        else:
            echo, names = echo_of(basis, self.settings, remarks), columns_of(basis)
        return told | headers_of(echo, units_of_answer(names, units))


def _estimated(readings: Readings, basis: Basis | EveryModel) -> Estimates:
    if isinstance(basis, EveryModel):
        together = basis.estimate(readings)
        return Estimates(together.columns, together.flags)
    return estimate(readings, basis)
