"""What a store is asked: documents, series, readings, conflicts."""

from collections.abc import Mapping
from typing import Any

import orjson
from sqlalchemy import Select, and_, func, or_, select

from service.store.append import columns_of
from service.store.connected import Connected
from service.store.interface import Channel, Document, Row, Span
from service.store.schema import channel, conflict, document, reading


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
        wanted = _within(select(*columns_of(span)), span)
        if span.after is not None:
            r = reading.c
            number, moment = span.after
            wanted = wanted.where(
                or_(r.channel > number, and_(r.channel == number, r.time > moment))
            )
        wanted = wanted.order_by(reading.c.channel, reading.c.time).limit(span.limit)
        with self._transaction(write=False) as connection:
            return list(map(tuple, connection.execute(wanted).fetchall()))

    def newest(self, span: Span) -> list[Row]:
        """See Store."""
        r, other = reading.c, reading.alias("other")
        last = select(func.max(other.c.time)).where(other.c.channel == channel.c.id)
        if span.end is not None:
            last = last.where(other.c.time < span.end)
        if span.upto is not None:
            last = last.where(other.c.revision <= span.upto)
        wanted = select(*columns_of(span)).join_from(
            channel,
            reading,
            and_(r.channel == channel.c.id, r.time == last.correlate(channel).scalar_subquery()),
        )
        numbers = [known.number for known in span.channels]
        wanted = wanted.where(channel.c.id.in_(numbers)).order_by(r.channel)
        with self._transaction(write=False) as connection:
            return list(map(tuple, connection.execute(wanted).fetchall()))

    def stamp(self, span: Span) -> tuple[int, int]:
        """See Store."""
        r = reading.c
        wanted = _within(select(func.count(), func.max(r.revision)).select_from(reading), span)
        with self._transaction(write=False) as connection:
            count, highest = connection.execute(wanted).one()
        return count, highest or 0

    def conflicts(self, station: str, limit: int) -> list[Mapping[str, Any]]:
        """See Store."""
        c = conflict.c
        wanted = (
            select(channel.c.place, c.time, c.received, c.sent)
            .join_from(conflict, channel, channel.c.id == c.channel)
            .where(channel.c.station == station)
            .order_by(c.received.desc(), c.time.desc())
            .limit(limit)
        )
        with self._transaction(write=False) as connection:
            rows = connection.execute(wanted).all()
        return [
            {"place": place, "time": moment, "received": received, "sent": orjson.loads(sent)}
            for place, moment, received, sent in rows
        ]


def _within(wanted: Select[*tuple[Any, ...]], span: Span) -> Select[*tuple[Any, ...]]:
    r = reading.c
    wanted = wanted.where(r.channel.in_([known.number for known in span.channels]))
    if span.start is not None:
        wanted = wanted.where(r.time >= span.start)
    if span.end is not None:
        wanted = wanted.where(r.time < span.end)
    if span.upto is not None:
        wanted = wanted.where(r.revision <= span.upto)
    return wanted
