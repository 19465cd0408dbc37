"""What stands in an answer, to the letter, for tables with odd rows."""

import pytest

from tests.service.formats.doubling import converted, csv_rows, json_rows


def test_csv_to_csv_to_the_letter():
    body = (
        b'\xef\xbb\xbf time , "x" ,apparent_permittivity\r\n'
        b'"2026",=1+1,017.20\n'
        b'5" deep,"a\nb\r\nc",\r\n'
        b"\r\n"
        b"one,too,many,cells\n"
        b'last," ""q"" ",NA'
    )
    assert converted(body) == (
        b' time , "x" ,apparent_permittivity,water_content,flags\r\n'
        b'"2026",=1+1,017.20,34.4,\r\n'
        b'5" deep,"a\nb\r\nc",,,missing:apparent_permittivity\r\n'
        b'"one,too,many,cells",,,,unreadable-row\r\n'
        b'last," ""q"" ",NA,,missing:apparent_permittivity\r\n'
    )


def test_ndjson_to_ndjson_to_the_letter():
    body = (
        b'{ "apparent_permittivity" : 17.20 , "id":12345678901234567890123 } \r\n'
        b"{}\n \n"
        b'{"id":1,"id":2}\n'
        b'{"apparent_permittivity":NaN}\n'
        b"{ }"
    )
    assert converted(body, "ndjson") == (
        b'{ "apparent_permittivity" : 17.20 , "id":12345678901234567890123 ,'
        b'"water_content":34.4,"flags":[]}\n'
        b'{"water_content":null,"flags":[]}\n'
        b'{"unreadable_row":"{\\"id\\":1,\\"id\\":2}","water_content":null,'
        b'"flags":["unreadable-row"]}\n'
        b'{"unreadable_row":"{\\"apparent_permittivity\\":NaN}",'
        b'"water_content":null,"flags":["unreadable-row"]}\n'
        b'{ "water_content":null,"flags":[]}\n'
    )  # fmt: skip


def test_csv_to_ndjson_has_numbers_where_they_are_ours_and_text_elsewhere():
    body = b"id,Temperature,apparent_permittivity\n007,warm,17.20\n,NA,1e1\n8,,x\n"
    assert json_rows(converted(body, "csv", "ndjson")) == [
        {"id": "007", "Temperature": "warm", "apparent_permittivity": 17.2, "water_content": 34.4,
         "flags": ["unreadable:temperature"]},
        {"id": "", "Temperature": None, "apparent_permittivity": 10.0, "water_content": 20.0,
         "flags": ["missing:temperature"]},
        {"id": "8", "Temperature": None, "apparent_permittivity": "x", "water_content": None,
         "flags": ["unreadable:apparent_permittivity", "missing:temperature"]},
    ]  # fmt: skip


def test_ndjson_to_csv_has_values_as_they_were_written():
    body = (
        b'{"apparent_permittivity":17.20,"id":12345678901234567890123,'
        b'"on":true,"note":"a,\\"b\\""}\n'
        b'{"note":null,"list":[1.50,{"k":"v\\u00e9"},null],"id":-0}\n'
        b'{"apparent_permittivity":1E1,"note":"\\u000a"}\n'
    )
    assert csv_rows(converted(body, "ndjson", "csv")) == [
        ["apparent_permittivity", "id", "on", "note", "list", "water_content", "flags"],
        ["17.20", "12345678901234567890123", "true", 'a,"b"', "", "34.4", ""],
        ["", "-0", "", "", '[1.50,{"k":"vé"},null]', "", ""],
        ["1E1", "", "", "\n", "", "20.0", ""],
    ]  # fmt: skip


def test_a_key_that_only_the_neighbours_have_is_not_missing():
    body = b'{"apparent_permittivity":17}\n{"apparent_permittivity":17,"temperature":null}\n'
    assert [row["flags"] for row in json_rows(converted(body, "ndjson"))] == [
        [],
        ["missing:temperature"],
    ]


@pytest.mark.parametrize("line", ["[1]", "{}"])
def test_rows_without_any_key_have_a_csv_answer(line):
    rows = csv_rows(converted(line.encode(), "ndjson", "csv"))
    assert rows[0] == ["unreadable_row", "water_content", "flags"]
    assert rows[1][0] == line.replace("{}", "")


def test_lines_that_lend_each_other_their_braces_are_broken():
    body = b'{"a":1},{"a":2}\n{"a":3\n"b":4}\n'
    rows = json_rows(converted(body, "ndjson"))
    assert [row["unreadable_row"] for row in rows] == body.decode().splitlines()
