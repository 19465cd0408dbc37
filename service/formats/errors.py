"""What can be wrong with a body that should be a table.

FormatError          the body is not what its media type promises
    HeaderError      its columns do not fit the request
    CellError        a cell is refused, where the caller asked for strictness
    RecordTooLong    one record exceeds what is taken
SpoolFull            there is no room for the answer
    AnswerTooLong    it is longer than one may be
"""

SHOWN = 60
"""Characters of what was found that a message repeats."""


def shown(text: str) -> str:
    """Text as a message can hold it: quoted, shortened, on one line."""
    return repr(text if len(text) <= SHOWN else text[: SHOWN - 1] + "…")


class FormatError(ValueError):
    """The body is not what its media type promises.

    line: where, counted from 1, in the lines of the body as it was sent.
    column: the name of the column or key it is about.
    expected, found: read "expected <expected>, found <found>".
    mend: what to change, as a half-sentence.
    """

    def __init__(
        self, expected: str, found: str, *, line: int = 1, column: str | None = None, mend: str = ""
    ) -> None:
        place = f"line {line}" if column is None else f"line {line}, column {column}"
        told = f"{place}: expected {expected}, found {found}"
        super().__init__(f"{told}: {mend}" if mend else told)
        self.line, self.column = line, column
        self.expected, self.found, self.mend = expected, found, mend


class HeaderError(FormatError):
    """The columns of the table do not fit the request."""


class CellError(FormatError):
    """A cell or a row is refused, because the caller asked for strictness."""


class RecordTooLong(FormatError):
    """One record of the table is longer than this service takes."""


class SpoolFull(Exception):
    """There is no room for the answer on this machine."""


class AnswerTooLong(SpoolFull):
    """The answer is longer than one may be."""
