"""`gleyline convert`: what is read, what is passed over, and what is never written over."""

import gzip

import pyarrow as pa
import pytest
from click.testing import CliRunner

from service.cli import main
from tests.service.batch.test_convert_command import HEAD, convert
from tests.service.formats.typed import read_typed

ROW = HEAD + b"17,14\n"


@pytest.fixture
def folder(tmp_path):
    (tmp_path / "in").mkdir()
    (tmp_path / "in" / "a.csv").write_bytes(ROW)
    return tmp_path


def one_at_a_time(folder, *words):
    return convert(folder / "in", "-o", folder / "out", "--processes", "1", *words)


def streamed(path):
    table = pa.table({"apparent_permittivity": [17.0], "temperature": [14.0]})
    with pa.ipc.new_stream(path, table.schema) as writer:
        writer.write_table(table)


def test_a_folder_names_what_it_passes_over_and_why(folder):
    (folder / "in" / "notes.txt").write_bytes(b"no table")
    (folder / "in" / "b.parquet.gz").write_bytes(gzip.compress(b"PAR1"))
    (folder / "in" / ".hidden").write_bytes(b"")
    code, _, told = one_at_a_time(folder)
    assert code == 0
    skipped = [line for line in told.splitlines() if line.startswith("skipped")]
    assert len(skipped) == 2
    for name, line in zip(("b.parquet.gz", "notes.txt"), skipped, strict=True):
        assert f"{name}: expected a name that ends in .csv, .ndjson," in line


def test_files_of_one_kind_are_counted_rather_than_all_named(folder):
    for number in range(30):
        (folder / "in" / f"{number}.jpg").write_bytes(b"")
    _, _, told = one_at_a_time(folder)
    assert told.count("skipped") == 21
    assert "skipped 10 more files like these" in told


@pytest.mark.parametrize("name", [None, "notes.txt", "a.xlsx"])
def test_a_folder_without_a_table_is_no_success(tmp_path, name):
    (tmp_path / "in").mkdir()
    if name:
        (tmp_path / "in" / name).write_bytes(b"x")
    code, _, told = one_at_a_time(tmp_path)
    assert code == 2
    assert "found no table to convert: expected a name that ends in" in told
    assert not (tmp_path / "out").exists()


def test_a_folder_cannot_hold_tables_and_their_answers(folder):
    code, _, told = convert(folder / "in", "-o", folder / "in")
    assert code == 2
    assert "cannot hold tables and their answers: name another folder with -o" in told
    assert (folder / "in" / "a.csv").read_bytes() == ROW


@pytest.mark.parametrize("out", ["in/answers", ".", "in/../other"])
def test_answers_may_lie_within_the_tables_or_around_them(folder, out):
    for _ in range(2):  # answers of the first time are no tables of the second
        code, _, _ = convert(folder / "in", "-o", folder / out, "--processes", "1")
        assert code == 0
    assert (folder / out / "a.csv").read_bytes().startswith(HEAD.strip() + b",water_content")
    assert len(list(folder.rglob("*.csv"))) == 2


def test_streams_are_read_by_either_ending(folder):
    streamed(folder / "in" / "b.arrow")
    assert one_at_a_time(folder)[0] == 0
    written = read_typed((folder / "out" / "b.arrow").read_bytes(), "arrow")
    assert written["water_content"].to_pylist()[0] == pytest.approx(0.31, abs=0.01)


def test_an_arrow_file_is_told_how_to_become_a_stream(folder):
    table = pa.table({"apparent_permittivity": [17.0]})
    with pa.ipc.new_file(folder / "in" / "b.arrow", table.schema) as writer:
        writer.write_table(table)
    code, _, told = one_at_a_time(folder)
    assert code == 2
    assert "b.arrow: line 1: expected an Arrow stream, found an Arrow file" in told


@pytest.mark.parametrize(
    ("name", "body"),
    [("z.csv.gz", ROW), ("z.ndjson.gz", b'{"apparent_permittivity":17,"temperature":14}\n')],
)
def test_a_compressed_table_is_answered_as_the_plain_one(folder, name, body):
    plain, packed = folder / name.removesuffix(".gz"), folder / name
    plain.write_bytes(body)
    packed.write_bytes(gzip.compress(body))
    answers = [convert(source) for source in (plain, packed)]
    assert [code for code, _, _ in answers] == [0, 0]
    assert answers[0][1] == answers[1][1]
    convert(packed, "-o", folder / "in")
    assert (folder / "in" / plain.name).read_bytes() == answers[0][1]


@pytest.mark.parametrize("body", [gzip.compress(ROW * 100)[:-20], b"apparent_permittivity\n17\n"])
def test_what_is_not_whole_gzip_is_refused(folder, body):
    (folder / "z.csv.gz").write_bytes(body)
    code, _, told = convert(folder / "z.csv.gz", "-o", folder / "z_out.csv")
    assert code == 2
    assert "cannot be unpacked as gzip" in told
    assert not (folder / "z_out.csv").exists()


def test_a_table_is_never_written_over(folder):
    source = folder / "in" / "a.csv"
    linked = folder / "link.csv"
    linked.hardlink_to(source)
    for target in (source, folder / "in", linked):
        code, _, told = convert(source, "-o", target, "--overwrite")
        assert code == 2
        assert "which is read: name another file or folder with -o" in told
    code, _, told = convert(source, linked, "-o", folder / "in", "--overwrite")
    assert code == 2
    assert "which is read" in told
    assert source.read_bytes() == ROW


def test_a_file_that_is_there_is_written_over_only_where_that_is_asked_for(folder):
    target = folder / "answer.csv"
    target.write_bytes(b"somebody's own")
    code, _, told = convert(folder / "in" / "a.csv", "-o", target)
    assert code == 2
    assert "answer.csv is there: name another place with -o, or write over it with" in told
    assert target.read_bytes() == b"somebody's own"
    assert convert(folder / "in" / "a.csv", "-o", target, "--overwrite")[0] == 0
    assert target.read_bytes().startswith(HEAD.strip())


def test_in_a_folder_only_answers_of_before_are_written_over(folder, monkeypatch):
    (folder / "in" / "b.csv").write_bytes(ROW)
    (folder / "out").mkdir()
    (folder / "out" / "b.csv").write_bytes(b"somebody's own")
    code, _, told = one_at_a_time(folder)
    assert code == 2
    assert "out/b.csv is there" in told
    assert (folder / "out" / "b.csv").read_bytes() == b"somebody's own"

    (folder / "in" / "a.csv").write_bytes(HEAD + b"18,14\n")
    monkeypatch.chdir(folder)  # the same folder by another name
    code, _, told = convert("in", "-o", "out", "--processes", "1")
    assert "a.csv: 1 rows" in told
    assert (folder / "out" / "a.csv").read_bytes().splitlines()[1].startswith(b"18,14,")
    assert one_at_a_time(folder, "--overwrite")[0] == 0
    assert (folder / "out" / "b.csv").read_bytes().startswith(HEAD.strip())


def test_what_an_interrupted_command_had_begun_is_its_own(folder, monkeypatch):
    """A file may be complete before its end is noted; the next command must go on from there."""
    monkeypatch.setattr("service.convert.ledger.Ledger.note", lambda *_: None)
    assert one_at_a_time(folder)[0] == 0
    monkeypatch.undo()
    code, _, told = one_at_a_time(folder)
    assert code == 0
    assert "a.csv: 1 rows" in told


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (["--porosity", "45"], "--porosity: expected porosity from 0.05 to 0.99 m3/m3, found 45: "
         "that looks like %; send 0.45, or name the unit: --units porosity:%"),
        (["--mixing-model", "square-root"], "--parameter slope: needs slope"),
        (["--mixing-model", "square-root"], "give --parameter slope=..."),
        (["--columns", "theta"], "--columns: no answer has a column"),
        (["--propagation", "mc"], "--propagation: expected 'first-order' or 'monte-carlo'"),
        (["--assume-temperature", "300"], "--assume-temperature: expected temperature from"),
    ],
)  # fmt: skip
def test_what_is_wrong_is_said_in_options(folder, words, told):
    arguments = ["convert", str(folder / "in" / "a.csv"), *words]
    ended = CliRunner().invoke(main, arguments, catch_exceptions=False)
    assert ended.exit_code == 2
    assert told in ended.stderr
    assert "#/" not in ended.stderr


def test_a_table_of_another_kind_at_standard_input_is_told_the_option():
    code, _, told = convert("-", body=b"PAR1....PAR1\xff")
    assert code == 2
    assert "a Parquet file: say --read parquet" in told


def test_columns_that_were_not_read_are_told_in_full():
    body = b"apparent_permittivity,temprature,bulk_conductivity_u\n17,14,1\n"
    _, _, told = convert("-", body=body)
    assert "name-not-known: column 'temprature' was not read" in told
    assert "did you mean temperature?" in told
    assert "uncertainty-alone: bulk_conductivity_u came without bulk_conductivity" in told
