"""Pairs of a request as rows with their places, in SI, whichever shape they came in."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from typing import Any

from models.conversion import Units, to_si
from models.errors import Complaint, ParameterError
from service.calibrations.bodies import DENSITY, MEASURED, PERMITTIVITIES, WATERS

Place = tuple[str, ...]
SHOWN = 20
"""Complaints that an answer holds at most."""


@dataclass(frozen=True, slots=True)
class Row:
    """One pair, in SI."""

    number: int
    """From 1, as people count."""
    in_columns: bool
    values: Mapping[str, float]
    """By quantity name or name_u; only what was said."""
    level: str | float | None

    def place(self, name: str = "") -> Place:
        """The steps to a value of it in the request, or to the pair itself."""
        index = str(self.number - 1)
        if not self.in_columns:
            return ("pairs", index, name) if name else ("pairs", index)
        return ("pairs", name, index) if name else ("pairs",)

    def complaint(self, name: str, detail: str) -> Complaint:
        """What is wrong with it, and where."""
        return Complaint(name, f"pair {self.number}: {detail}", self.place(name))

    def kind(self, names: tuple[str, ...]) -> str:
        """Which of several quantities it carries."""
        return next(name for name in names if name in self.values)


def rows_of(pairs: Any, of_all: Mapping[str, float], units: Units) -> list[Row]:
    """The pairs, each complete.

    pairs: a list of bodies or one of columns. of_all: what was said once, SI.
    Raises ParameterError that names every pair that cannot be used, and how to mend it.
    """
    in_columns = not isinstance(pairs, list)
    sent = list(_of_columns(pairs) if in_columns else _of_list(pairs))
    rows: list[Row] = []
    wrong: list[Complaint] = []
    for number, given in enumerate(sent, 1):
        level = given.pop("level", None)
        row = Row(number, in_columns, given, level)
        try:
            row = replace(row, values=to_si("pairs", given, units))
        except ParameterError as error:
            wrong += [row.complaint(_key(c), c.detail) for c in error.complaints]
            continue
        wrong += _incomplete(row, of_all)
        rows.append(row)
    wrong = wrong or list(_uneven(rows, of_all))
    if wrong:
        raise ParameterError("pairs", wrong[:SHOWN])
    return rows


def _key(complaint: Complaint) -> str:
    return complaint.place[-1] if complaint.place else complaint.name


def _of_list(pairs: list[Any]) -> Iterator[dict[str, Any]]:
    for pair in pairs:
        yield pair.model_dump(exclude_none=True)


def _of_columns(columns: Any) -> Iterator[dict[str, Any]]:
    """Rows out of columns; one number stands for all of them.

    Raises ParameterError where columns differ in length.
    """
    given = columns.model_dump(exclude_none=True)
    lengths = {name: len(cells) for name, cells in given.items() if isinstance(cells, list)}
    if len(set(lengths.values())) > 1:
        told = ", ".join(f"{name} {count}" for name, count in lengths.items())
        detail = f"columns must be of equal length, found {told}"
        raise ParameterError("pairs", [Complaint("pairs", detail, ("pairs",))])
    for index in range(next(iter(lengths.values()), 0)):
        cells = {n: c[index] if isinstance(c, list) else c for n, c in given.items()}
        yield {name: cell for name, cell in cells.items() if cell is not None}


def _incomplete(row: Row, of_all: Mapping[str, float]) -> Iterator[Complaint]:
    """What a pair lacks, or says twice."""
    for names in (PERMITTIVITIES, WATERS):
        found = [name for name in names if name in row.values]
        if not found:
            yield row.complaint("", f"has neither {' nor '.join(names)}: give one of them")
        if len(found) > 1:
            yield row.complaint(found[1], f"has {' and '.join(found)}: give one of them")
    for name in MEASURED:
        if f"{name}_u" in row.values and name not in row.values:
            yield row.complaint(f"{name}_u", f"{name}_u stands without {name}")
    has_density = DENSITY in row.values or DENSITY in of_all
    if WATERS[1] in row.values and not has_density:
        detail = (
            "a gravimetric water content needs a bulk density: give bulk_density in the pair, or "
            "once for all pairs"
        )
        yield row.complaint("", detail)


def _uneven(rows: list[Row], of_all: Mapping[str, float]) -> Iterator[Complaint]:
    """Pairs that do not say the uncertainty that others of their kind say."""
    for name in MEASURED:
        width = f"{name}_u"
        if (width in of_all and name != DENSITY) or not any(width in row.values for row in rows):
            continue
        for row in rows:
            if name in row.values and width not in row.values:
                detail = (
                    f"has no {width} while other pairs have one, and would count as exact: give "
                    f"it, or {width} once for all pairs"
                )
                yield row.complaint(width if not row.in_columns else "", detail)
