"""What a store is asked: documents, series, readings, conflicts."""

from collections.abc import Iterator, Mapping
from typing import Any

import orjson
from sqlalchemy import (
    ColumnElement,
    Connection,
    FromClause,
    Select,
    and_,
    exists,
    func,
    or_,
    select,
    union_all,
)

from service.store.connected import Connected
from service.store.interface import COLUMNS, Channel, Document, Row, Span
from service.store.schema import channel, conflict, document, earlier, reading


class Asking(Connected):
    """See Store."""

    def documents(self, after: int = 0, upto: int | None = None) -> list[Document]:
        """See Store."""
        d = document.c
        wanted = select(d.kind, d.name, d.revision, d.changed, d.author, d.body)
        wanted = wanted.where(d.revision > after).order_by(d.revision)
        if upto is not None:
            wanted = wanted.where(d.revision <= upto)
        with self._transaction(write=False) as connection:
            rows = connection.execute(wanted).all()
        return [Document(*row[:5], orjson.loads(row[5]) if row[5] else None) for row in rows]

    def channels(self, station: str | None = None) -> list[Channel]:
        """See Store."""
        c = channel.c
        wanted = select(c.id, c.station, c.place, c.held).order_by(c.station, c.place)
        if station is not None:
            wanted = wanted.where(c.station == station)
        with self._transaction(write=False) as connection:
            return [Channel(*row[:3], orjson.loads(row[3])) for row in connection.execute(wanted)]

    def readings(self, span: Span) -> list[Row]:
        """See Store."""
        with self._transaction(write=False) as connection:
            known = known_at(connection, span)
            r = known.c
            wanted = _within(select(*columns_of(span, known)), span, known)
            if span.after is not None:
                number, moment = span.after
                wanted = wanted.where(
                    or_(r.channel > number, and_(r.channel == number, r.time > moment))
                )
            wanted = wanted.order_by(r.channel, r.time).limit(span.limit)
            return list(map(tuple, connection.execute(wanted).fetchall()))

    def completed(self, series: Channel) -> list[Row]:
        """Readings of a series as they were: time, revision, until which one, every column."""
        e = earlier.c
        wanted = select(e.time, e.revision, e.until, *(e[name] for name in COLUMNS))
        wanted = wanted.where(e.channel == series.number).order_by(e.time, e.revision)
        with self._transaction(write=False) as connection:
            return list(map(tuple, connection.execute(wanted).fetchall()))

    def newest(self, span: Span) -> list[Row]:
        """See Store."""
        with self._transaction(write=False) as connection:
            known = known_at(connection, span)
            r, other = known.c, known.alias("other")
            last = select(func.max(other.c.time)).where(other.c.channel == channel.c.id)
            if span.end is not None:
                last = last.where(other.c.time < span.end)
            wanted = select(*columns_of(span, known)).join_from(
                channel,
                known,
                and_(
                    r.channel == channel.c.id, r.time == last.correlate(channel).scalar_subquery()
                ),
            )
            numbers = [known.number for known in span.channels]
            wanted = wanted.where(channel.c.id.in_(numbers)).order_by(r.channel)
            return list(map(tuple, connection.execute(wanted).fetchall()))

    def stamp(self, span: Span) -> tuple[int, int]:
        """See Store."""
        with self._transaction(write=False) as connection:
            known = known_at(connection, span)
            counted = select(func.count(), func.max(known.c.revision)).select_from(known)
            count, highest = connection.execute(_within(counted, span, known)).one()
        return count, highest or 0

    def conflicts(self, station: str, limit: int) -> list[Mapping[str, Any]]:
        """See Store."""
        c = conflict.c
        wanted = (
            select(channel.c.place, c.time, c.received, c.revision, c.sent)
            .join_from(conflict, channel, channel.c.id == c.channel)
            .where(channel.c.station == station)
            .order_by(c.received.desc(), c.time.desc())
            .limit(limit)
        )
        with self._transaction(write=False) as connection:
            rows = connection.execute(wanted).all()
        return [
            {
                "place": place,
                "time": moment,
                "received": received,
                "revision": revision,
                "sent": orjson.loads(sent),
            }
            for place, moment, received, revision, sent in rows
        ]


def known_at(connection: Connection, span: Span) -> FromClause:
    """The readings as they were known at the revision a span is asked at.

    Nearly always these are rows of one table; the others are looked for only where there are any.
    """
    if span.upto is None:
        return reading
    r, e = reading.c, earlier.c
    were = (e.revision <= span.upto, e.until > span.upto)
    numbers = [known.number for known in span.channels]
    some = exists().where(e.channel.in_(numbers), *were).select()
    known = select(reading).where(r.revision <= span.upto)
    if connection.execute(some).scalar():
        columns = [e[column.name] for column in r]
        return union_all(known, select(*columns).where(*were)).subquery("known")
    return known.subquery("known")


def columns_of(span: Span, known: FromClause) -> Iterator[ColumnElement[Any]]:
    """What a row of a span holds."""
    for name in ("channel", "time", "revision", *span.columns):
        yield known.c[name]


def _within(
    wanted: Select[*tuple[Any, ...]], span: Span, known: FromClause
) -> Select[*tuple[Any, ...]]:
    r = known.c
    wanted = wanted.where(r.channel.in_([channel.number for channel in span.channels]))
    if span.start is not None:
        wanted = wanted.where(r.time >= span.start)
    if span.end is not None:
        wanted = wanted.where(r.time < span.end)
    if span.holding is not None:
        wanted = wanted.where(r[span.holding].is_not(None))
    return wanted
