"""What every store does, whatever it keeps things in."""

from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace

import pytest

from service.store.append import packed, unpacked
from service.store.errors import Changed, InUse, SchemaError, Stale
from service.store.interface import COLUMNS, RAW, VALUES, Batch, Document, Span
from service.store.opening import open_store, store_of
from service.store.schema import STEPS, Step, upgrade
from service.store.schema import reading as reading_table

T0 = 1_777_874_400_000_000
MINUTE = 60_000_000


def put(store, kind="station", name="north-1", body=None, expected=None):
    document = Document(kind, name, 0, 0, "office", {} if body is None else body)
    return store.put(document, store.head().documents, expected)


def batch(store, times, values, place="p1", station="north-1", **more):
    columns = {"apparent_permittivity": values, **more}
    return Batch(station, store.head().documents, [place] * len(times), times, columns)


def span(store, columns=("apparent_permittivity",), **more):
    return Span(store.channels(), columns, **more)


def test_the_same_reading_twice_is_one_reading(store):
    put(store)
    sent = batch(store, [T0, T0 + MINUTE], [17.2, 17.3])
    (first,), (second,) = store.append([sent]), store.append([sent])
    assert (first.accepted, first.duplicates) == (2, 0)
    assert (second.accepted, second.duplicates, list(second.clashes)) == (0, 2, [])
    assert [row[1] for row in store.readings(span(store))] == [T0, T0 + MINUTE]


def test_other_values_for_a_key_are_kept_as_a_conflict_and_change_nothing(store):
    put(store)
    store.append([batch(store, [T0], [17.2])])
    for _ in range(2):
        (outcome,) = store.append([batch(store, [T0], [17.9])])
        (clash,) = outcome.clashes
        assert clash.kept == {"apparent_permittivity": 17.2}
        assert clash.sent == {"apparent_permittivity": 17.9}
    assert [row[3] for row in store.readings(span(store))] == [17.2]
    (kept,) = store.conflicts("north-1", 10)
    assert kept["sent"] == {"apparent_permittivity": 17.9}


def test_of_two_batches_in_one_transaction_the_first_counts(store):
    put(store)
    pairs = [batch(store, [T0], [1.5]), batch(store, [T0], [1.5]), batch(store, [T0], [2.5])]
    first, same, other = store.append(pairs)
    assert (first.accepted, same.duplicates, len(other.clashes)) == (1, 1, 1)


def test_a_value_more_or_less_is_another_reading(store):
    put(store)
    store.append([batch(store, [T0], [17.2])])
    (outcome,) = store.append([batch(store, [T0], [17.2], temperature=[14.0])])
    assert len(outcome.clashes) == 1


def test_bulk_and_small_batches_keep_the_same(store):
    put(store)
    times = [T0 + i * MINUTE for i in range(2000)]
    values = [1.5 + i / 100 for i in range(2000)]
    store.append([batch(store, times, values, place="bulk")])
    for start in range(0, 2000, 400):
        part = slice(start, start + 400)
        store.append([batch(store, times[part], values[part], place="small")])
    rows = store.readings(span(store))
    assert [row[1:2] + row[3:] for row in rows[:2000]] == [r[1:2] + r[3:] for r in rows[2000:]]
    assert [row[3] for row in rows[:2000]] == values
    (again,) = store.append([batch(store, times, values, place="bulk")])
    assert again.duplicates == 2000


def test_what_was_checked_against_older_documents_is_handed_back(store):
    put(store)
    old = batch(store, [T0], [17.2])
    put(store, "soil", "loam")
    assert isinstance(store.append([old])[0], Stale)
    assert store.readings(span(store)) == []
    with pytest.raises(Stale):
        store.put(Document("soil", "sand", 0, 0, None, {}), old.documents, None)


def test_every_revision_of_a_document_stays(store):
    first = put(store, "soil", "loam", {"clay": 0.2}, expected=0)
    second = put(store, "soil", "loam", {"clay": 0.3}, expected=first.revision)
    with pytest.raises(Changed) as refused:
        put(store, "soil", "loam", {"clay": 0.4}, expected=first.revision)
    assert refused.value.current == second.revision
    gone = store.put(replace(second, body=None), store.head().documents, second.revision)
    changes = store.documents()
    assert [c.revision for c in changes] == [first.revision, second.revision, gone.revision]
    assert [c.body for c in changes] == [{"clay": 0.2}, {"clay": 0.3}, None]
    assert [c.body for c in store.documents(upto=second.revision)] == [{"clay": 0.2}, {"clay": 0.3}]
    assert {c.author for c in changes} == {"office"}


def test_what_readings_refer_to_cannot_be_deleted(store):
    put(store)
    put(store, "probe", "p1")
    store.append([batch(store, [T0], [17.2])])
    for kind, name in (("station", "north-1"), ("probe", "p1")):
        with pytest.raises(InUse):
            store.put(Document(kind, name, 0, 0, None, None), store.head().documents, None)


def test_a_revision_tells_what_was_known(store):
    put(store)
    store.append([batch(store, [T0], [17.2])])
    before = store.head().revision
    store.append([batch(store, [T0 - MINUTE], [16.0], temperature=[14.0])])
    assert len(store.readings(span(store))) == 2
    assert [row[3] for row in store.readings(span(store, upto=before))] == [17.2]
    (channel,) = store.channels()
    assert channel.held_at(before) == {"apparent_permittivity"}
    assert channel.held_at(None) == {"apparent_permittivity", "temperature"}
    assert store.stamp(span(store, upto=before)) == (1, before)


def test_pages_follow_one_another_without_loss_while_readings_arrive(store):
    put(store)
    for place in ("p1", "p2"):
        times = [T0 + i * MINUTE for i in range(7)]
        store.append([batch(store, times, [2.0] * 7, place=place)])
    found, after = [], None
    while rows := store.readings(span(store, after=after, limit=3)):
        found += rows
        after = rows[-1][:2]
        store.append([batch(store, [T0 - len(found) * MINUTE], [3.0], place="p1")])
    keys = [row[:2] for row in found]
    assert len(set(keys)) == len(keys) == 14


def test_the_newest_of_each_series_is_found_before_a_moment(store):
    put(store)
    for place, count in (("p1", 3), ("p2", 2)):
        times = [T0 + i * 40 * 1440 * MINUTE for i in range(count)]
        store.append([batch(store, times, [float(i + 2) for i in range(count)], place=place)])
    assert [row[3] for row in store.newest(span(store))] == [4.0, 3.0]
    assert [row[3] for row in store.newest(span(store, end=T0 + 1))] == [2.0, 2.0]


def test_a_raw_record_comes_back_whole(store):
    put(store)
    trace = {"waveform": {"samples": [0.1, -0.25, 1e-9] * 400}}
    store.append([batch(store, [T0], [17.2], **{RAW: [packed(trace)]})])
    (row,) = store.readings(span(store, (RAW,)))
    assert unpacked(row[3]) == trace
    assert len(row[3]) < 200


def test_two_writers_racing_on_one_key_leave_one_reading_and_one_conflict(settings, store):
    put(store)
    other = open_store(settings)
    sent = [batch(store, [T0 + i * MINUTE for i in range(50)], [v] * 50) for v in (2.0, 3.0)]
    with ThreadPoolExecutor(2) as pool:
        outcomes = list(pool.map(lambda s, b: s.append([b])[0], (store, other), sent))
    other.close()
    assert sorted(o.accepted for o in outcomes) == [0, 50]
    assert sum(len(o.clashes) for o in outcomes) == 50
    assert len({row[3] for row in store.readings(span(store))}) == 1


def test_many_writers_never_find_the_store_locked(settings, store):
    put(store)
    stores = [open_store(settings) for _ in range(4)]

    def write(number):
        for i in range(25):
            (outcome,) = stores[number].append([batch(store, [T0 + i], [2.0], place=f"p{number}")])
            assert outcome.accepted == 1

    with ThreadPoolExecutor(4) as pool:
        list(pool.map(write, range(4)))
    for opened in stores:
        opened.close()
    assert len(store.readings(span(store))) == 100


def test_newer_tables_are_left_alone_and_older_ones_wait_to_be_upgraded(settings, store):
    later = Step(["ALTER TABLE store ADD COLUMN note TEXT"], ["ALTER TABLE store ADD note TEXT"])
    put(store)
    with store.engine.connect().execution_options(write=True) as connection, connection.begin():
        assert upgrade(connection, (*STEPS, later)) == (len(STEPS), len(STEPS) + 1)
    with store.engine.connect().execution_options(write=True) as connection, connection.begin():
        assert upgrade(connection, (*STEPS, later)) == (len(STEPS) + 1, len(STEPS) + 1)
    newer = store_of(settings)
    with pytest.raises(SchemaError, match="newer gleyline"):
        newer.prepare()
    with pytest.raises(SchemaError, match="newer gleyline"):
        newer.upgrade()
    newer.close()


def test_the_table_of_readings_has_a_column_for_every_number_of_the_vocabulary(store):
    with store.engine.connect() as connection:
        found = connection.exec_driver_sql("SELECT * FROM reading WHERE channel = 0")
        assert list(found.keys()) == [c.name for c in reading_table.columns]
    assert [c.name for c in reading_table.columns][3:] == list(COLUMNS) == [*VALUES, RAW]


def test_a_sound_store_has_no_faults(store):
    put(store)
    assert [fault for fault in store.check() if "fsync" not in fault] == []
