"""What is a number, what is missing, what cannot be read, and numbers as text."""

import json
import re

import numpy as np
import polars as pl
import pytest
from hypothesis import given
from hypothesis import strategies as st

from models.flags import BIT, FLAGS, SLUGS
from service.formats.cells import (
    MISSING,
    csv_text,
    decimal_commas,
    json_text,
    numbers_as_text,
    numbers_in,
)
from service.formats.flag_text import flags_as_csv, flags_as_json
from service.formats.json.lines import numbers_of, rows_of

NUMBER = re.compile(r"[+-]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]+)?")


def read(*cells):
    values, unreadable = numbers_in(pl.Series(cells, dtype=pl.String))
    return values.tolist(), unreadable.tolist()


@pytest.mark.parametrize(
    ("cell", "value"),
    [("17.2", 17.2), (" 17.2\t", 17.2), ("+5", 5.0), ("-0", 0.0), (".5", 0.5), ("5.", 5.0),
     ("1e3", 1000.0), ("1E+3", 1000.0), ("007", 7.0), ("1e-400", 0.0), ("\u00a017.2", 17.2),
     ("0", 0.0), ("-9999", -9999.0)],
)  # fmt: skip
def test_a_number_is_read(cell, value):
    assert read(cell) == ([value], [False])


@pytest.mark.parametrize(
    "cell",
    ["", " ", "NaN", "nan", "NAN", "NA", "n/a", "N/A", "null", "NULL", "None", "none", "INF", "inf",
     "-INF", "-inf", "M", "m", "-", "--", "---", " NA "],
)  # fmt: skip
def test_a_usual_way_to_say_nothing_is_missing(cell):
    values, unreadable = read(cell)
    assert np.isnan(values).all()
    assert unreadable == [False]


@pytest.mark.parametrize(
    "cell",
    ["abc", "1,5", "1.000,5", "1 000", "1_000", "0x1F", "0b1", "1e999", "-1e999", "Infinity",
     "+inf", "infinity", "True", "false", "17.2 m", "17,2", "1.2.3", "1e", "e5", ".", "+", "----",
     "\u0661\u0662", "\uff15", "1d5", "1f", "5%", "#REF!", "#DIV/0!", "17\x002", "2026-05-04",
     "'17.2", "=17.2", "nil", "NaN()"],
)  # fmt: skip
def test_everything_else_cannot_be_read(cell):
    values, unreadable = read(cell)
    assert np.isnan(values).all()
    assert unreadable == [True]


def test_one_bad_cell_leaves_the_others_alone():
    values, unreadable = read("1", "x", " 3", None, "5")
    np.testing.assert_array_equal(values, [1, np.nan, 3, np.nan, 5])
    assert unreadable == [False, True, False, False, False]


@given(st.lists(st.text(alphabet="0123456789.+-eE_ xnaif,", max_size=8), min_size=1, max_size=5))
def test_a_cell_is_a_number_where_the_grammar_says_so(cells):
    for cell, value, odd in zip(cells, *read(*cells), strict=True):
        text = cell.strip()
        if NUMBER.fullmatch(text) and np.isfinite(float(text)):
            assert (value, odd) == (float(text), False)
        else:
            assert np.isnan(value)
            assert odd == (text.lower() not in MISSING)


def test_what_counts_as_missing_is_what_the_flag_says():
    told = re.search("one of (.*) in any case", FLAGS["missing"].condition)[1]
    assert {word.lower() for word in told.split(", ")} == set(MISSING) - {""}


@given(st.lists(st.floats(), min_size=1, max_size=5))
def test_numbers_are_written_so_that_they_read_back_the_same(values):
    for value, text in zip(values, numbers_as_text(np.array(values)), strict=True):
        if not np.isfinite(value):
            assert text is None
            continue
        assert float(text) == value
        assert json.loads(text) == value
        assert len(re.sub(r"\D", "", text.split("e")[0]).strip("0")) <= 17


@given(st.lists(st.none() | st.text(max_size=6), min_size=1, max_size=4))
def test_text_is_written_as_json(texts):
    assert [
        json.loads(text or "null") for text in json_text(pl.Series(texts, dtype=pl.String))
    ] == texts


def test_text_is_quoted_in_csv_where_it_must_be():
    texts = pl.Series(["plain", 'a "b"', "a,b", "a\nb", "a\rb", "", None, " x "])
    assert csv_text(texts).to_list() == [
        "plain", '"a ""b"""', '"a,b"', '"a\nb"', '"a\rb"', "", "", " x ",
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("cells", "commas"),
    [(["17,2", "", "3,14", " 0,5 "], True), (["17,2", "3.14", "0,5"], False),
     (["17,2", "3,14"], False), (["1,2,3"] * 3, False), (["", "NA"], False)],
)  # fmt: skip
def test_a_column_of_decimal_commas_is_told_from_an_odd_cell(cells, commas):
    assert decimal_commas(pl.Series(cells)) == commas


@pytest.mark.parametrize(
    ("value", "number", "unreadable"),
    [("17.2", 17.2, False), ("17", 17.0, False), ("-0", 0.0, False), ("1e3", 1000.0, False),
     ("123456789012345678901234567890", 123456789012345678901234567890.0, False),
     ("null", np.nan, False), ('"NA"', np.nan, False), ('""', np.nan, False),
     ("true", np.nan, True), ("false", np.nan, True), ('"17.2"', np.nan, True),
     ("1e999", np.nan, True), ("-1e999", np.nan, True), ("1" + "0" * 400, np.nan, True),
     ("[17.2]", np.nan, True), ("{}", np.nan, True), ('"x"', np.nan, True)],
)  # fmt: skip
def test_in_json_only_a_number_is_a_number(value, number, unreadable):
    rows, broken = rows_of([f'{{"temperature": {value}}}'.encode()])
    values, odd = numbers_of([row["temperature"] for row in rows])
    np.testing.assert_array_equal(values, [number])
    assert (odd.tolist(), broken.tolist()) == ([unreadable], [False])


@pytest.mark.parametrize(
    "line",
    ['{"temperature":NaN}', '{"temperature":Infinity}', '{"temperature":-Infinity}', "[1]", "17.2",
     "null", '"text"', "{", "}", '{"a":1}{"a":2}', '{"a":1},', "{'a':1}", '{"a":01}', '{"a":1.}',
     '{"a":"\\ud800"}', "{" * 2000, '{"a":' + "[" * 200 + "]" * 200 + "}",
     '{"a":' + "[" * 900 + "]" * 900 + "}", "time,temperature", "\x00"],
)  # fmt: skip
def test_a_line_without_a_json_object_is_broken_alone(line):
    rows, broken = rows_of([b'{"a":1}', line.encode(), b'{"a":3}'])
    assert broken.tolist() == [False, True, False]
    assert rows == [{"a": 1}, {}, {"a": 3}]


def test_a_long_flat_line_is_no_deep_one():
    line = b'{"a":[' + b",".join([b"[1,2]"] * 300) + b"]}"
    _, broken = rows_of([line])
    assert not broken.any()


@pytest.mark.parametrize("line", [
    b'{"a":1,"a":2}', b'{"a" : 1, "a" : 1}', b'{"a":1,"b":{"c":1,"c":2}}', b'{"a":1,"\\u0061":2}',
])  # fmt: skip
def test_an_object_that_says_a_key_twice_is_none(line):
    """RFC 8259, 4: names should be unique; else what is read is the reader's own affair."""
    rows, broken = rows_of([b'{"a":3}', line])
    assert rows == [{"a": 3}, {}]
    assert broken.tolist() == [False, True]


@pytest.mark.parametrize("line", [
    b'{"a":"\\":","b":1}', b'{"a" : 1, "b" : {"a" : 2}}', b'{"a":[{"b":1},{"b":2}]}',
])  # fmt: skip
def test_what_only_looks_like_a_key_twice_stays(line):
    rows, broken = rows_of([line, b'{"a":1}'])
    assert rows == [json.loads(line), {"a": 1}]
    assert not broken.any()


def test_flags_are_spelt_in_order():
    flags = np.array([0, BIT["frozen"] | BIT["missing:temperature"], BIT["lossy"], 0], np.uint64)
    assert flags_as_csv(flags).to_list() == ["", "missing:temperature;frozen", "lossy", ""]
    assert [json.loads(text) for text in flags_as_json(flags)] == [
        [], ["missing:temperature", "frozen"], ["lossy"], [],
    ]  # fmt: skip
    assert flags_as_json(flags[:1]).to_list() == ["[]"]
    assert flags_as_csv(flags[:0]).to_list() == []


def test_every_flag_can_be_spelt():
    every = np.array([np.bitwise_or.reduce(list(BIT.values()))], np.uint64)
    assert flags_as_csv(every)[0].split(";") == list(SLUGS)
