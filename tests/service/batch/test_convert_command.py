"""`gleyline convert`: files, folders, standard input; goes on where it was interrupted."""

import subprocess
import sys
from pathlib import Path

import pytest
from click.testing import CliRunner

from service.cli import main
from service.convert.progress import Progress
from tests.service.conftest import ROOT
from tests.service.formats.typed import read_typed

WORDS = ["--mixing-model", "crim", "--texture", "loam"]
HEAD = b"apparent_permittivity,temperature\n"


def convert(*words, body=None):
    """In this process, one file at a time."""
    arguments = ["convert", *map(str, words), *WORDS]
    ended = CliRunner().invoke(main, arguments, input=body, catch_exceptions=False)
    return ended.exit_code, ended.stdout_bytes, ended.stderr


@pytest.fixture
def folder(tmp_path):
    (tmp_path / "in" / "deep").mkdir(parents=True)
    (tmp_path / "in" / "a.csv").write_bytes(HEAD + b"17,14\n")
    (tmp_path / "in" / "deep" / "b.ndjson").write_bytes(
        b'{"apparent_permittivity":17,"temperature":14}\n'
    )
    (tmp_path / "in" / "notes.txt").write_bytes(b"no table")
    return tmp_path


def test_standard_input_goes_to_standard_output():
    ended = subprocess.run(
        [sys.executable, "-m", "service.cli", "convert", "-", "--columns", "water_content", *WORDS],
        cwd=ROOT, input=HEAD + b"17,14\nx,14\n", capture_output=True, check=True, timeout=60,
    )  # fmt: skip
    lines = ended.stdout.decode().splitlines()
    assert lines[0] == "apparent_permittivity,temperature,water_content,flags"
    assert lines[2] == "x,14,,unreadable:apparent_permittivity"
    assert "2 rows, 1 of them flagged" in ended.stderr.decode()
    code, typed, _ = convert("-", "--format", "arrow", body=HEAD + b"17,14\n")
    number = read_typed(typed, "arrow")["water_content"].to_pylist()
    assert (code, number) == (0, [float(lines[1].split(",")[2])])


def test_a_folder_is_answered_file_by_file_and_goes_on_where_it_was(folder):
    words = ["-o", str(folder / "out"), *WORDS]
    subprocess.run(
        [sys.executable, "-m", "service.cli", "convert", folder / "in", "--processes", "2", *words],
        cwd=ROOT, capture_output=True, check=True, timeout=60,
    )  # fmt: skip
    out = folder / "out"
    assert (out / "a.csv").read_bytes().startswith(b"apparent_permittivity,temperature,water")
    assert b'"water_content":' in (out / "deep" / "b.ndjson").read_bytes()
    assert not (out / "notes.txt").exists()
    assert list(out.rglob("*.part")) == []

    before = (out / "a.csv").stat().st_mtime_ns
    (folder / "in" / "deep" / "b.ndjson").write_bytes(b'{"apparent_permittivity":9}\n')
    _, _, told = convert(folder / "in", "-o", out, "--processes", "1")
    assert "1 of 2 files were finished before" in told
    assert (out / "a.csv").stat().st_mtime_ns == before
    assert b'"apparent_permittivity":9,' in (out / "deep" / "b.ndjson").read_bytes()

    other = ("--coverage-probability", "0.9")  # another wish: all of it is due
    _, _, told = convert(folder / "in", "-o", out, "--processes", "1", *other)
    assert "finished before" not in told
    assert (out / "a.csv").stat().st_mtime_ns > before


def test_a_file_that_is_refused_does_not_stop_the_others(folder):
    (folder / "in" / "bad.csv").write_bytes(b"depth\n1\n")
    code, _, told = convert(folder / "in", "-o", folder / "out", "--processes", "1")
    assert code == 2
    assert "bad.csv: line 1: expected a column" in told
    assert (folder / "out" / "a.csv").exists()
    assert not (folder / "out" / "bad.csv").exists()


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (["{in}"], "several files need a folder"),
        (["{in}/a.csv", "-", "-o", "{out}"], "standard input cannot be one of several files"),
        (["{in}/a.csv", "{in}/a.csv", "-o", "{out}"], "would both become"),
        (
            ["{in}/notes.txt"],
            "expected a name that ends in .csv, .ndjson, .arrows, .parquet, .arrow",
        ),
        (["{in}/a.csv", "--columns", "water"], 'no answer has a column "water"'),
        (["{in}/a.csv", "--parameter", "x"], "expected NAME=VALUE"),
    ],
)
def test_what_cannot_be_done_is_said(folder, words, told):
    places = {"in": folder / "in", "out": folder / "out"}
    code, _, said = convert(*(word.format(**places) for word in words))
    assert code == 2
    assert told in said


def test_an_answer_that_is_not_complete_is_not_there(folder):
    (folder / "in" / "a.csv").write_bytes(HEAD + b"17,14\nwarm,14\n")
    target = folder / "a_out.csv"
    target.write_bytes(b"of yesterday")
    code, _, told = convert(folder / "in" / "a.csv", "-o", target, "--strict", "--overwrite")
    assert code == 2
    assert "line 3 (row 2), column apparent_permittivity: expected a number, found 'warm'" in told
    assert target.read_bytes() == b"of yesterday"
    assert sorted(path.name for path in folder.iterdir()) == ["a_out.csv", "in"]


def test_progress_tells_rate_and_time_left(tmp_path):
    now = 0.0
    with Path(tmp_path / "shown").open("w") as out:
        progress = Progress(200_000_000, out, lambda: now)
        now = 2.0
        progress.add(50_000_000)
        assert progress.line(now) == " 25% of 200.0 MB, 50.0 MB, 25.0 MB/s, 6 s left"
        assert Progress(0, out, lambda: now).line(now + 1) == "0.0 MB, 0.0 MB/s"
    assert (tmp_path / "shown").read_text() == ""  # no terminal, no line
