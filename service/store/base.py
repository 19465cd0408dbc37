"""What the two databases have in common when they keep something: readings and documents."""

import time
from abc import abstractmethod
from collections.abc import Mapping, Sequence
from dataclasses import replace
from itertools import repeat

import orjson
from sqlalchemy import Connection, Engine, bindparam, exists, select, text

from service.store import schema
from service.store.append import Examined, Kept, examine
from service.store.errors import Changed, InUse, Stale
from service.store.interface import COLUMNS, Batch, Document, Head, Kind, Outcome, Row
from service.store.schema import channel, earlier, reading
from service.store.transfer.restoring import Restoring, digest_of

_ADVANCE = text("UPDATE store SET revision = revision + 1 RETURNING revision, documents")
_OPEN_CHANNEL = text(
    "INSERT INTO channel (station, place, held) VALUES (:station, :place, '{}') "
    "ON CONFLICT (station, place) DO NOTHING"
)
_CHANNEL = text("SELECT id, held FROM channel WHERE station = :station AND place = :place")
_HOLD = text("UPDATE channel SET held = :held WHERE id = :id")
_CONFLICT = text(
    "INSERT INTO conflict (channel, time, digest, revision, received, sent) "
    "VALUES (:channel, :time, :digest, :revision, :received, :sent) "
    "ON CONFLICT (channel, time, digest) DO NOTHING"
)
_SET_ASIDE = earlier.insert()
_COMPLETE = (
    reading.update()
    .where(reading.c.channel == bindparam("of_channel"), reading.c.time == bindparam("of_time"))
    .values({name: bindparam(f"new_{name}") for name in ("revision", *COLUMNS)})
)
_DOCUMENT = text(
    "INSERT INTO document (revision, kind, name, changed, author, body) "
    "VALUES (:revision, :kind, :name, :changed, :author, :body)"
)
_ANY_READING = exists().where(reading.c.channel == channel.c.id)
_PLAIN = ("revision", "kind", "name", "changed", "author")
Place = tuple[str, str]
"""Station and place."""


def now() -> int:
    """Microseconds since 1970."""
    return time.time_ns() // 1000


class SqlStore(Restoring):
    """See Store. What is written twice, once for each database, is abstract here."""

    def __init__(self, engine: Engine) -> None:
        super().__init__(engine)
        self._known: dict[Place, tuple[int, frozenset[str]]] = {}
        """Number and held columns of a channel."""

    @abstractmethod
    def _kept(self, connection: Connection, number: int, times: Sequence[int]) -> list[Row]:
        """The kept readings of a channel at these times: time, revision, every column."""

    def append(self, batches: Sequence[Batch]) -> list[Outcome | Stale]:
        """See Store."""
        opened = dict(self._known)
        with self._transaction(write=True) as connection:
            head = Head(*connection.execute(_ADVANCE).one())
            fresh = [b for b in batches if b.documents == head.documents]
            numbers = [self._numbers(connection, b, opened, head.revision) for b in fresh]
            rows = list(zip(fresh, numbers, strict=True))
            new = 0
            grouped: dict[tuple[str, ...], list[Row]] = {}
            for batch, of_row in rows:
                columns = (of_row, batch.times, repeat(head.revision), *batch.values.values())
                grouped.setdefault(tuple(batch.values), []).extend(zip(*columns, strict=False))
            for names, group in grouped.items():
                new += self._insert(connection, names, group)
            if new == sum(map(len, fresh)):
                found = [Examined(len(batch)) for batch in fresh]
            else:
                fetch = lambda number, times: self._kept(connection, number, times)  # noqa: E731
                found, completed = examine(rows, head.revision, fetch)
                _complete(connection, completed, head.revision)
                self._keep_conflicts(connection, found, head.revision)
        self._known = opened
        outcomes = iter(found)
        return [
            next(outcomes).outcome() if b.documents == head.documents else Stale() for b in batches
        ]

    def _numbers(
        self,
        connection: Connection,
        batch: Batch,
        known: dict[Place, tuple[int, frozenset[str]]],
        revision: int,
    ) -> Sequence[int]:
        """The channel number of each row; new places are opened, new columns noted."""
        number_of: dict[str, int] = {}
        for place in dict.fromkeys(batch.places):
            number, held = known.get((batch.station, place), (0, frozenset[str]()))
            if not number or not held.issuperset(batch.values):
                number, held = _opened(connection, batch, place, revision)
                known[batch.station, place] = number, held
            number_of[place] = number
        return [number_of[place] for place in batch.places]

    def _keep_conflicts(
        self, connection: Connection, found: Sequence[Examined], revision: int
    ) -> None:
        received = now()
        rows = []
        for examined in found:
            clashes = zip(examined.keys, (clash.sent for clash in examined.clashes), strict=True)
            for (number, moment), values in (*clashes, *examined.gave_way):
                sent = orjson.dumps(values, option=orjson.OPT_SORT_KEYS)
                rows.append(
                    {
                        "channel": number, "time": moment, "revision": revision,
                        "digest": digest_of(sent), "received": received,
                        "sent": sent.decode(),
                    }
                )  # fmt: skip
        if rows:
            connection.execute(_CONFLICT, rows)

    def put(self, document: Document, seen: int, expected: int | None) -> Document:
        """See Store."""
        with self._transaction(write=True) as connection:
            head = Head(*connection.execute(_ADVANCE).one())
            if head.documents != seen:
                raise Stale
            d = schema.document.c
            latest = select(d.revision, d.body).where(
                d.kind == document.kind, d.name == document.name
            )
            row = connection.execute(latest.order_by(d.revision.desc()).limit(1)).one_or_none()
            current = row.revision if row and row.body is not None else 0
            if expected is not None and expected != current:
                raise Changed(current)
            if document.body is None:
                self._refuse_in_use(connection, document)
            body = None if document.body is None else orjson.dumps(document.body).decode()
            kept = replace(document, revision=head.revision, changed=now())
            row_of = {name: getattr(kept, name) for name in _PLAIN}
            connection.execute(_DOCUMENT, {**row_of, "body": body})
            connection.execute(text("UPDATE store SET documents = revision"))
        return kept

    def _refuse_in_use(self, connection: Connection, gone: Document) -> None:
        used = select(channel.c.station).where(_ANY_READING)
        if gone.kind == "station":
            used = used.where(channel.c.station == gone.name)
        elif gone.kind == "probe":
            used = used.where(channel.c.place == gone.name)
        else:
            return
        if station := connection.execute(used.limit(1)).scalar():
            raise InUse(_NEEDED[gone.kind].format(name=gone.name, station=station))


_NEEDED: Mapping[Kind, str] = {
    "station": "readings of the station {name} are kept, and a record stays: end what is installed "
    "there with until (PUT /v1/stations/{name}), and take another name for a new station",
    "probe": "readings of the station {station} name the probe {name}, and are estimated with it: "
    "end its installations with until (PUT /v1/stations/{station}), and take another name for a "
    "new probe",
}
"""What to do instead of deleting what readings refer to."""


def _complete(connection: Connection, completed: Sequence[Kept], revision: int) -> None:
    """Give kept readings what they lacked; as they were, they stay for questions of before."""
    before, after = [], []
    for known in completed:
        number, moment = known.key
        if known.revision < revision:
            row = dict(zip(COLUMNS, known.before, strict=True))
            before.append(row | {"channel": number, "time": moment, "revision": known.revision,
                                 "until": revision})  # fmt: skip
        new = {f"new_{name}": v for name, v in zip(COLUMNS, known.values, strict=True)}
        after.append(new | {"of_channel": number, "of_time": moment, "new_revision": revision})
    if before:
        connection.execute(_SET_ASIDE, before)
    if after:
        connection.execute(_COMPLETE, after)


def _opened(
    connection: Connection, batch: Batch, place: str, revision: int
) -> tuple[int, frozenset[str]]:
    """The channel of a place, with the columns of this batch noted; other processes' kept."""
    where = {"station": batch.station, "place": place}
    connection.execute(_OPEN_CHANNEL, where)
    number, held = connection.execute(_CHANNEL, where).one()
    columns = {**dict.fromkeys(batch.values, revision), **orjson.loads(held)}
    connection.execute(_HOLD, {"held": orjson.dumps(columns).decode(), "id": number})
    return number, frozenset(columns)
