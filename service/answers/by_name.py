"""Rows of a table that name their own soil and probe: what the estimate of each rests on.

A ``soil`` or ``probe`` column names what is stored. A row that leaves it empty has what the
request describes. What is not there, or does not suffice, gives that row a flag and no number,
and the answer says which name it was, and on which line.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import polars as pl
from numpy.typing import NDArray

from models.errors import ModelError
from models.estimate import Basis
from models.estimate.beside.ensemble import EveryModel
from service.errors import Unprocessable
from service.formats.block import Block, Marks, Refusal
from service.formats.errors import shown
from service.formats.header import folded
from service.schemas.estimates import EstimatesSettings
from service.schemas.query import basis_of, refuse_unknown_names, settings_of
from service.stations.documents import Documents
from service.stations.named import KINDS, with_stored

Named = tuple[str, str]
"""The soil and the probe of a row; empty: that of the request."""


@dataclass(frozen=True, slots=True)
class Ground:
    """What the estimates of some rows rest on."""

    named: Named
    settings: EstimatesSettings
    basis: Basis | EveryModel
    revisions: Mapping[str, int]
    """Of the stored soil and probe, by kind."""


@dataclass(slots=True)
class Part:
    """The rows of a block that name the same soil and probe."""

    rows: NDArray[np.intp]
    ground: Ground | None
    """None: they cannot be estimated."""
    refusal: Refusal | None = None


def naming(names: tuple[str, ...]) -> tuple[str, ...]:
    """Which of soil and probe the columns of a table name."""
    written = {folded(name) for name in names}
    return tuple(kind for kind in KINDS if kind in written)


@dataclass(slots=True)
class Grounds:
    """What the rows of one table rest on, by the names they hold."""

    document: Mapping[str, Any]
    """The request without readings."""
    documents: Documents
    columns: tuple[str, ...]
    """Names of the columns that are read."""
    troubles: list[str] = field(default_factory=list)
    """Why rows cannot be estimated, by the line where it first happened."""
    _known: dict[Named, Ground | str] = field(default_factory=dict)

    def __post_init__(self) -> None:
        """Raise ModelError for what is wrong with the request, whatever its rows name."""
        refuse_unknown_names(settings_of(self.document))

    @property
    def used(self) -> list[Ground]:
        """Every ground that rows were estimated on."""
        return [ground for ground in self._known.values() if isinstance(ground, Ground)]

    def parts(self, block: Block) -> Iterator[Part]:
        """The rows of a block by what they name, each row in one part."""
        cells = {folded(column.name): column for column in block.cells()}
        nothing = pl.repeat("", len(block), dtype=pl.String, eager=True)
        said = [
            cells[kind].fill_null("").str.strip_chars() if kind in cells else nothing
            for kind in KINDS
        ]
        frame = pl.DataFrame([column.alias(kind) for column, kind in zip(said, KINDS, strict=True)])
        alike = frame.with_row_index("row").group_by(KINDS, maintain_order=True).agg("row")
        for soil, probe, rows in alike.iter_rows():
            yield self._part((soil, probe), np.array(rows, np.intp), block)

    def _part(self, named: Named, rows: NDArray[np.intp], block: Block) -> Part:
        known = self._known.get(named)
        first = known is None
        if known is None:
            known = self._known[named] = self._ground(named)
        if isinstance(known, Ground):
            return Part(rows, known)
        if first:
            told = ", ".join(f"{k} {shown(n)}" for k, n in zip(KINDS, named, strict=True) if n)
            self.troubles.append(f"line {block.lines[rows[0]]}, {told or 'no soil named'}: {known}")
        marks: Marks = np.zeros(len(block), dtype=np.bool_)
        marks[rows] = True
        column = next((kind for kind, name in zip(KINDS, named, strict=True) if name), KINDS[0])
        return Part(rows, None, Refusal(column, marks, "what is stored and suffices", known))

    def _ground(self, named: Named) -> Ground | str:
        """What rows with these names rest on, or why they cannot be estimated."""
        document = dict(self.document)
        document |= {kind: name for kind, name in zip(KINDS, named, strict=True) if name}
        try:
            settings = settings_of(with_stored(document, self.documents))
            basis = basis_of(settings, self.columns)
        except (ModelError, Unprocessable) as error:
            if isinstance(error, Unprocessable):
                return "; ".join(fault.detail for fault in error.errors) or str(error.detail)
            return str(error)
        revisions = {
            str(kind): stored.revision
            for kind, name in zip(KINDS, named, strict=True)
            if name and (stored := self.documents.find(kind, name))
        }
        return Ground(named, settings, basis, revisions)
