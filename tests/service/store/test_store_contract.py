"""What every store does, whatever it keeps things in."""

from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace

import pytest

from service.store.append import kind_of, packed, unpacked
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


def one(store, time=T0, place="p1", **columns):
    """The outcome of one reading with these columns."""
    seen = store.head().documents
    (outcome,) = store.append([Batch("north-1", seen, [place], [time], columns)])
    return outcome


def test_what_a_kept_reading_lacks_completes_it_and_less_of_it_is_the_same(store):
    put(store)
    one(store, apparent_permittivity=[17.2])
    more = one(store, apparent_permittivity=[17.2], temperature=[14.0])
    assert (more.accepted, more.completed, more.duplicates, more.clashes) == (0, 1, 0, [])
    for less in ({"temperature": [14.0]}, {"apparent_permittivity": [17.2]}, {}):
        outcome = one(store, **less)
        assert (outcome.duplicates, outcome.completed, outcome.clashes) == (1, 0, [])
    both = one(store, temperature=[15.0], bulk_conductivity=[0.5])
    assert (len(both.clashes), both.completed) == (1, 0)
    (row,) = store.readings(span(store, ("apparent_permittivity", "temperature")))
    assert row[3:] == (17.2, 14.0)


def test_a_reading_that_was_empty_is_completed_by_its_values(store):
    put(store)
    assert one(store, apparent_permittivity=[None]).accepted == 1
    assert one(store, apparent_permittivity=[17.2]).completed == 1
    assert one(store, apparent_permittivity=[None]).duplicates == 1
    assert len(one(store, apparent_permittivity=[17.3]).clashes) == 1
    assert [row[3] for row in store.readings(span(store))] == [17.2]


def test_a_revision_tells_a_reading_as_it_was_before_it_was_completed(store):
    put(store)
    columns = ("apparent_permittivity", "temperature")
    one(store, apparent_permittivity=[17.2])
    one(store, time=T0 + MINUTE, apparent_permittivity=[17.3])
    first = store.head().revision
    one(store, temperature=[14.0])
    second = store.head().revision
    one(store, bulk_conductivity=[0.5])
    one(store, time=T0 + 2 * MINUTE, apparent_permittivity=[17.4])

    def known(upto, **more):
        asked = span(store, columns, upto=upto, **more)
        return [row[3:] for row in store.readings(asked)], store.stamp(asked)

    assert known(first) == ([(17.2, None), (17.3, None)], (2, first))
    assert known(second) == ([(17.2, 14.0), (17.3, None)], (2, second))
    assert known(None)[0] == [(17.2, 14.0), (17.3, None), (17.4, None)]
    assert known(first, end=T0 + 1)[0] == [(17.2, None)]
    assert known(first, after=(store.channels()[0].number, T0))[0] == [(17.3, None)]
    newest = span(store, columns, end=T0 + 1, upto=first)
    assert [row[2:] for row in store.newest(newest)] == [(first - 1, 17.2, None)]
    assert [row[3:] for row in store.newest(replace(newest, upto=second))] == [(17.2, 14.0)]


def test_parts_of_a_reading_in_one_transaction_become_one(store):
    put(store)
    seen = store.head().documents
    parts = ({"apparent_permittivity": [17.2]}, {"temperature": [14.0]}, {"temperature": [15.0]},
             {"apparent_permittivity": [17.2]})  # fmt: skip
    sent = [Batch("north-1", seen, ["p1"], [T0], columns) for columns in parts]
    found = [(o.accepted, o.completed, o.duplicates, len(o.clashes)) for o in store.append(sent)]
    assert found == [(1, 0, 0, 0), (0, 1, 0, 0), (0, 0, 0, 1), (0, 0, 1, 0)]
    (row,) = store.readings(span(store, ("apparent_permittivity", "temperature")))
    assert row[3:] == (17.2, 14.0)


def test_batches_of_other_columns_do_not_swap_their_readings(store):
    put(store)
    seen = store.head().documents
    places = (["other"], ["p1"], ["p1"])
    columns = ({"temperature": [14.0]}, {"apparent_permittivity": [17.2]}, {"temperature": [15.0]})
    sent = [
        Batch("north-1", seen, place, [T0], c) for place, c in zip(places, columns, strict=True)
    ]
    assert [len(outcome.clashes) for outcome in store.append(sent)] == [0, 0, 0]
    rows = store.readings(span(store, ("apparent_permittivity", "temperature")))
    assert {row[3:] for row in rows} == {(None, 14.0), (17.2, 15.0)}


def test_a_raw_record_does_not_complete_a_permittivity(store):
    put(store)
    one(store, apparent_permittivity=[17.2])
    assert len(one(store, **{RAW: [packed({"waveform": {}})]}).clashes) == 1


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


def test_readings_that_hold_a_raw_record_are_found_alone(store):
    put(store)
    one(store, apparent_permittivity=[17.2])
    one(store, time=T0 + MINUTE, **{RAW: [packed({"waveform": {"level": [1.0]}})]})
    (row,) = store.readings(span(store, (RAW,), holding=RAW))
    assert (row[1], kind_of(row[3])) == (T0 + MINUTE, "waveform")


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


def test_numbers_that_differ_by_rounding_are_the_same(store):
    put(store)
    store.append([batch(store, [T0], [17.2], bulk_conductivity=[0.23799999999999996])])
    (again,) = store.append([batch(store, [T0], [17.2], bulk_conductivity=[0.238])])
    (other,) = store.append([batch(store, [T0], [17.2], bulk_conductivity=[0.238001])])
    assert (again.duplicates, len(again.clashes), len(other.clashes)) == (1, 0, 1)


def test_an_impossible_value_gives_way_and_is_shown_and_stays_at_its_revision(store):
    put(store)
    store.append([batch(store, [T0], [-7999.0], temperature=[14.0])])
    before = store.head().revision
    (right,) = store.append([batch(store, [T0], [17.2])])
    assert (right.completed, right.gave_way, len(right.clashes)) == (1, 1, 0)
    for upto, value in ((None, 17.2), (before, -7999.0)):
        (row,) = store.readings(span(store, ("apparent_permittivity", "temperature"), upto=upto))
        assert row[3:] == (value, 14.0)
    (shown,) = store.conflicts("north-1", 9)
    assert shown["sent"] == {"apparent_permittivity": -7999.0}
    (late,) = store.append([batch(store, [T0], [-7999.0])])
    assert (late.completed, len(late.clashes)) == (0, 1)


def test_an_impossible_value_of_the_same_transaction_is_not_lost(store):
    """As of no revision would it be there: the right one waits among the conflicts for a resend."""
    put(store)
    wrong, right = batch(store, [T0], [-7999.0]), batch(store, [T0], [17.2])
    _, contradicting = store.append([wrong, right])
    assert len(contradicting.clashes) == 1
    (again,) = store.append([right])
    assert (again.completed, again.gave_way) == (1, 1)
    sent = [row["sent"]["apparent_permittivity"] for row in store.conflicts("north-1", 9)]
    assert sorted(sent) == [-7999.0, 17.2]
