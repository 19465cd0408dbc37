"""Everything of another store, from the lines of its export, into one that is empty."""

import hashlib
from abc import abstractmethod
from collections.abc import Callable, Iterable, Mapping, Sequence
from itertools import islice
from typing import Any

import orjson
from sqlalchemy import Connection, text

from service.store import schema
from service.store.append import packed
from service.store.asking import Asking
from service.store.errors import RestoreError
from service.store.interface import COLUMNS, RAW, Row

FORM = 2
"""Of the lines of an export."""
AT_ONCE = 10_000
"""Lines that are put in at a time."""
Entry = Mapping[str, Any]


def digest_of(sent: bytes) -> str:
    """What tells one contradicting reading from another; sent: JSON with sorted keys."""
    return hashlib.sha256(sent).hexdigest()


class Restoring(Asking):
    """See Store."""

    @abstractmethod
    def _insert(self, connection: Connection, names: tuple[str, ...], rows: Sequence[Row]) -> int:
        """Insert readings whose key is new; how many there were."""

    def restore(self, lines: Iterable[bytes]) -> int:
        """Put in what ``exported`` gave, in one transaction; the revision that is reached.

        Raises RestoreError where the store is not empty, or a line is none of an export.
        """
        with self._transaction(write=True) as connection:
            self._lock(connection)
            reached = connection.execute(text("SELECT revision FROM store")).scalar_one()
            if reached:
                raise RestoreError(
                    f"an import goes into an empty store, and this one is at revision {reached}: "
                    "name another folder with --data, or an empty database with --database-url"
                )
            numbered = enumerate(lines, 1)
            head = _head(*next(numbered, (1, b"")))
            ended, last = False, 1
            while part := list(islice(numbered, AT_ONCE)):
                entries = [_entry(number, line) for number, line in part]
                last = entries[-1][0]
                ended = _is_end(entries)
                self._put_in(connection, entries[:-1] if ended else entries)
            if not ended:
                raise RestoreError(
                    f"the file ends with line {last}, which does not say that it is the end: it "
                    "was cut off, and nothing of it was imported; make it again with gleyline "
                    "store export"
                )
            connection.execute(_REACHED, head)
        return int(head["revision"])

    def _put_in(self, connection: Connection, entries: Sequence[tuple[int, str, Entry]]) -> None:
        by_kind: dict[str, list[Entry]] = {}
        for number, kind, entry in entries:
            if kind not in _ROWS and kind != "reading":
                raise RestoreError(
                    f"line {number}: an export has no {kind[:40]} there: the file is no whole "
                    "export; make it again with gleyline store export"
                )
            by_kind.setdefault(kind, []).append(entry)
        try:
            for kind in ("document", "series"):
                self._put_rows(connection, kind, by_kind.get(kind, ()), {})
            found = connection.execute(_CHANNELS).all()
            numbers = {(station, place): number for number, station, place in found}
            for kind in ("earlier", "conflict"):
                self._put_rows(connection, kind, by_kind.get(kind, ()), numbers)
            self._put_readings(connection, by_kind.get("reading", ()), numbers)
        except (KeyError, TypeError) as error:
            first, last = entries[0][0], entries[-1][0]
            raise RestoreError(
                f"lines {first} to {last}: {type(error).__name__} at {error}: the file is no whole "
                "export; make it again with gleyline store export"
            ) from None

    def _put_rows(
        self,
        connection: Connection,
        kind: str,
        entries: Sequence[Entry],
        numbers: Mapping[Any, int],
    ) -> None:
        if entries:
            table, row_of = _ROWS[kind]
            connection.execute(table.insert(), [row_of(entry, numbers) for entry in entries])

    def _put_readings(
        self, connection: Connection, entries: Sequence[Entry], numbers: Mapping[Any, int]
    ) -> None:
        grouped: dict[tuple[str, ...], list[Row]] = {}
        for entry in entries:
            names = tuple(name for name in COLUMNS if name in entry)
            number = numbers[entry["station"], entry["place"]]
            values = (_cell(name, entry[name]) for name in names)
            row = (number, entry["time"], entry["revision"], *values)
            grouped.setdefault(names, []).append(row)
        for names, rows in grouped.items():
            self._insert(connection, names, rows)


def _is_end(entries: Sequence[tuple[int, str, Entry]]) -> bool:
    """Whether these are the last lines; raises RestoreError where lines before are missing."""
    number, kind, entry = entries[-1]
    if kind == "end" and entry.get("lines") != number - 1:
        raise RestoreError(
            f"line {number} is the end after {entry.get('lines')} lines, and {number - 1} came: "
            "the file is no whole export; make it again with gleyline store export"
        )
    return kind == "end"


_REACHED = text("UPDATE store SET revision = :revision, documents = :documents")
_CHANNELS = text("SELECT id, station, place FROM channel")


def _head(number: int, line: bytes) -> Entry:
    _, kind, entry = _entry(number, line) if line.strip() else (number, "", {})
    if kind != "store" or entry.get("form") != FORM:
        raise RestoreError(
            f"the first line is not the one of an export of form {FORM}: make the file with "
            "gleyline store export"
        )
    return entry


def _entry(number: int, line: bytes) -> tuple[int, str, Entry]:
    try:
        ((kind, entry),) = orjson.loads(line).items()
        return number, kind, dict(entry)
    except (ValueError, TypeError, AttributeError):
        raise RestoreError(
            f"line {number}: expected an object with one key, found {line[:40]!r}"
        ) from None


def _cell(name: str, value: Any) -> Any:
    return packed(value) if name == RAW else value


def _document(entry: Entry, _: Mapping[Any, int]) -> dict[str, Any]:
    body = entry["body"]
    return {**entry, "body": None if body is None else orjson.dumps(body).decode()}


def _series(entry: Entry, _: Mapping[Any, int]) -> dict[str, Any]:
    return {**entry, "held": orjson.dumps(entry["held"]).decode()}


def _earlier(entry: Entry, numbers: Mapping[Any, int]) -> dict[str, Any]:
    values = {name: _cell(name, entry[name]) if name in entry else None for name in COLUMNS}
    key = {name: entry[name] for name in ("time", "revision", "until")}
    return {**values, **key, "channel": numbers[entry["station"], entry["place"]]}


def _conflict(entry: Entry, numbers: Mapping[Any, int]) -> dict[str, Any]:
    sent = orjson.dumps(entry["sent"], option=orjson.OPT_SORT_KEYS)
    return {
        "channel": numbers[entry["station"], entry["place"]],
        "sent": sent.decode(), "digest": digest_of(sent),
        **{name: entry[name] for name in ("time", "revision", "received")},
    }  # fmt: skip


_ROWS: Mapping[str, tuple[Any, Callable[[Entry, Mapping[Any, int]], dict[str, Any]]]] = {
    "document": (schema.document, _document),
    "series": (schema.channel, _series),
    "earlier": (schema.earlier, _earlier),
    "conflict": (schema.conflict, _conflict),
}
