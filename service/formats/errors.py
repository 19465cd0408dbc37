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


KNOWN: tuple[tuple[bytes, str], ...] = (
    (b"ARROW1", "an Arrow file: write the streaming format (pyarrow.ipc.new_stream, "
     "polars write_ipc_stream)"),
    (b"\xff\xff\xff\xff", "an Arrow stream: send it as application/vnd.apache.arrow.stream"),
    (b"PAR1", "a Parquet file: send it as application/vnd.apache.parquet"),
    (b"\x1f\x8b", "a body compressed by gzip: say so with Content-Encoding: gzip"),
    (b"\x28\xb5\x2f\xfd", "a body compressed by zstd: send it uncompressed, or by gzip"),
    (b"PK\x03\x04", "a zip archive or spreadsheet: save the table as CSV"),
    (b"\xd0\xcf\x11\xe0", "a spreadsheet: save the table as CSV"),
    (b"SQLite format 3", "a database: export the table as CSV"),
    (b"\xff\xfe", "UTF-16 text: save the table as UTF-8"),
    (b"\xfe\xff", "UTF-16 text: save the table as UTF-8"),
)  # fmt: skip
MAGIC = max(len(begin) for begin, _ in KNOWN)
"""Bytes by which they are told apart."""


def looks_like(begin: bytes) -> str | None:
    """What a body with these first bytes is, and what to do about it; None where not known."""
    return next((told for known, told in KNOWN if begin.startswith(known)), None)


class FormatError(ValueError):
    """The body is not what its media type promises.

    line: where, counted from 1, in the lines of the body as it was sent; None: it has none.
    row: of the table, counted from 1 without the header; None: not of one row.
    column: the name of the column or key it is about.
    expected, found: read "expected <expected>, found <found>".
    mend: what to change, as a half-sentence.
    """

    def __init__(
        self,
        expected: str,
        found: str,
        *,
        line: int | None = 1,
        column: str | None = None,
        mend: str = "",
        row: int | None = None,
    ) -> None:
        spelt = f"line {line}" if row is None else f"line {line} (row {row})"
        place = f"row {row}" if line is None else spelt
        told = f"expected {expected}, found {found}"
        told = f"{place}: {told}" if column is None else f"{place}, column {column}: {told}"
        super().__init__(f"{told}: {mend}" if mend else told)
        self.line, self.row, self.column = line, row, column
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
