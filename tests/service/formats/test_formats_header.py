"""Every message about the columns of a table, and where it points."""

import pytest

from models.quantity import NOISE, PROBE, READING, SOIL
from service.formats.errors import FormatError, HeaderError
from tests.service.formats.doubling import conversion, converted, csv_rows


def refusal(body, into="csv", out=None, **options):
    with pytest.raises(FormatError) as caught:
        converted(body.encode(), into, out, **options)
    return caught.value


@pytest.mark.parametrize(
    "header",
    ["apparent_permittivity", "Apparent_Permittivity", " apparent_permittivity\t",
     '"apparent_permittivity"', "APPARENT_PERMITTIVITY"],
)  # fmt: skip
def test_names_are_known_whatever_their_case_and_blanks(header):
    table = csv_rows(converted(f"{header},note\n17.5,x\n".encode()))
    assert table == [[header.strip('"'), "note", "water_content", "flags"],
                     ["17.5", "x", "35.0", ""]]  # fmt: skip


@pytest.mark.parametrize("name", [*READING[1:], *(f"{name}_u" for name in NOISE)])
def test_every_number_of_a_reading_is_read(name):
    other = "travel_time" if name == "real_permittivity" else "real_permittivity"
    work = conversion("csv", "csv")
    work.decoder.feed(f"{other},{name}\n".encode())
    (block,) = work.decoder.close()
    assert set(block.values) == {other, name}


def test_other_names_pass_through():
    header = b"apparent_permittivity,water_content_of_old,soil,bulk_conductivity_25,x,x,"
    body = header + b"\n1,2,3,4,5,6,7\n"
    assert csv_rows(converted(body))[1] == ["1", "2", "3", "4", "5", "6", "7", "2.0", ""]


def test_no_permittivity():
    told = str(refusal("time,temperature\n,14\n"))
    assert told == (
        "line 1: expected a column apparent_permittivity or real_permittivity or travel_time, "
        "found the columns 'time', 'temperature': name the column that holds the permittivity so"
    )


@pytest.mark.parametrize(
    ("written", "meant"),
    [("aparent_permittivity", "apparent_permittivity"), ("Ka", "apparent_permittivity"),
     ("eps'", "real_permittivity"), ("traveltime", "travel_time")],
)  # fmt: skip
def test_no_permittivity_but_something_like_it(written, meant):
    told = str(refusal(f"\n\ntime,{written}\n,14\n"))
    assert told.startswith("line 3: expected a column apparent_permittivity or")
    assert told.endswith(
        f"is {written!r} the {meant}? then name it so".replace("'eps''", '"eps\'"')
    )


def test_no_header():
    told = str(refusal("2026-05-04T06:00:00Z,17.2\n2026-05-04T07:00:00Z,17.3\n"))
    assert told.endswith("the first line must name the columns")


@pytest.mark.parametrize(("separator", "spelt"), [(";", "semicolons"), ("\t", "tabs")])
@pytest.mark.parametrize("names", [("time", "apparent_permittivity"), ("time", "Ka", "T")])
def test_another_separator(separator, spelt, names):
    told = str(refusal(separator.join(names) + "\n" + separator.join(["17,2"] * len(names))))
    assert told == (
        f"line 1: expected commas between the cells, found {spelt}: save the table with commas "
        "between the cells and points in the numbers"
    )


def test_decimal_commas():
    body = 'apparent_permittivity,temperature\n17.2,"14,1"\n17.2,\n17.3,"14,3"\n17.4,"-1,0"\n'
    told = refusal(body)
    assert str(told) == (
        "line 2, column temperature: expected decimal points, found decimal commas: write 17.2, "
        "not 17,2"
    )
    assert isinstance(told, HeaderError)


@pytest.mark.parametrize("name", ["flags", "water_content", "Water_Content ", "FLAGS"])
@pytest.mark.parametrize("into", ["csv", "ndjson"])
def test_a_name_of_the_answer(name, into):
    body = f"apparent_permittivity,{name}\n17,1\n"
    if into == "ndjson":
        body = '{"apparent_permittivity":17}\n' + f'{{"apparent_permittivity":17,"{name}":1}}\n'
    told = refusal(body, into)
    assert str(told).endswith(
        f"found {name!r}: the answer appends a column of this name: rename yours, or leave it out"
    )
    assert (told.line, told.column) == (1 if into == "csv" else 2, name)


@pytest.mark.parametrize("name", ["texture", *SOIL, "clay_u", *(set(PROBE) - set(READING))])
@pytest.mark.parametrize("into", ["csv", "ndjson"])
def test_a_word_for_soil_or_probe(name, into):
    body = f"apparent_permittivity,{name}\n17,1\n"
    if into == "ndjson":
        body = f'{{"apparent_permittivity":17,"{name}":1}}\n'
    whose = "probe" if name in PROBE else "soil"
    told = str(refusal(body, into))
    assert told == (
        f"line 1, column {name}: expected what varies from reading to reading, found {name!r}: it "
        f"describes the {whose}: give it in the query, or rename the column"
    )


def test_a_name_twice():
    told = str(refusal("temperature,apparent_permittivity, Temperature\n1,2,3\n"))
    assert told == (
        "line 1, column  Temperature: expected each column once, found 'temperature' and "
        "' Temperature': rename one of them, or leave it out"
    )
    assert "each column once" in str(refusal('{"temperature":1,"Temperature":2}', "ndjson"))


def test_two_spellings_of_a_key_in_different_lines():
    body = '{"temperature":1}\n{"Temperature":2}\n'
    for limits in ({}, {"block_bytes": 18}):
        told = refusal(body, "ndjson", **limits)
        assert str(told) == (
            "line 2, column Temperature: expected one spelling of each name, found 'temperature' "
            "and 'Temperature': write temperature on every line"
        )


def test_more_columns_than_are_taken():
    names = ["apparent_permittivity", *(f"c{i}" for i in range(1000))]
    told = str(refusal(",".join(names)))
    assert told == "line 1: expected at most 1000 columns, found 1001"
    row = "{" + ",".join(f'"{name}":1' for name in names) + "}"
    assert str(refusal(row, "ndjson", "csv")) == told


@pytest.mark.parametrize("body", ["", "\n", "\ufeff", " \r\n\r\n"])
@pytest.mark.parametrize(
    ("into", "expected"),
    [("csv", "a header record and rows"), ("ndjson", "a JSON object on each line")],
)
def test_an_empty_body(body, into, expected):
    assert str(refusal(body, into)) == f"line 1: expected {expected}, found an empty body"


def test_a_header_alone():
    for ending in ("", "\n", "\r\n"):
        body = converted(f"time,apparent_permittivity{ending}".encode())
        assert csv_rows(body) == [["time", "apparent_permittivity", "water_content", "flags"]]
    assert converted(b"time,apparent_permittivity\n", "csv", "ndjson") == b""


def test_line_ends_of_carriage_returns_alone():
    told = str(refusal("time,apparent_permittivity\r1,2\r3,4"))
    assert told == (
        r"line 1: expected a header record, found 'time,apparent_permittivity\r1,2\r3,4': end "
        "each line with LF or CRLF"
    )


def test_two_bytes_a_character():
    body = "time,apparent_permittivity\n".encode("utf-16-le")
    with pytest.raises(FormatError, match="line 1: expected UTF-8, found NUL characters: save the"):
        converted(body)


def test_a_name_twice_is_no_json():
    body = "apparent_permittivity,x,x\n17,1,2\n"
    assert str(refusal(body, "csv", "ndjson")) == (
        "line 1, column x: expected each column once, found 'x' twice: JSON tells columns apart by "
        "name: rename one of them, or ask for text/csv"
    )


@pytest.mark.parametrize("out", ["csv", "arrow", "parquet"])
@pytest.mark.parametrize("block_bytes", [60, 1 << 20])
def test_a_key_that_comes_too_late_for_an_answer_with_columns(out, block_bytes):
    lines = ['{"apparent_permittivity":17}'] * 3_000  # more than the first 64 KiB
    lines[2_800] = '{"apparent_permittivity":17,"late":1}'
    told = refusal("\n".join(lines), "ndjson", out, block_bytes=block_bytes)
    assert str(told) == (
        "line 2801: expected the same names as in the first rows, found 'late': this answer has "
        "the columns of the first rows: name it there, with null, or ask for application/x-ndjson"
    )


def test_what_is_found_is_shortened():
    told = str(refusal(f"{'x' * 5000},y\n"))
    assert len(told) < 300
