"""The README is true: its tables are the declarations, its curl lines are answered."""

import csv
import io
import re
import shlex
import subprocess
import sys

import pytest

from tests import readme_tables
from tests.service.conftest import ROOT

README = (ROOT / "README.md").read_text("utf-8")
CURL = re.compile(r"^curl .*$", flags=re.MULTILINE)
CURLS = CURL.findall(README)


def test_the_tables_are_what_the_declarations_say():
    assert readme_tables.vocabulary() in README
    assert readme_tables.mixing_models() in README


def test_there_are_three_lines_of_curl():
    section = README.partition("## Three lines of curl\n")[2].partition("\n## ")[0]
    assert len(CURL.findall(section)) == 3


@pytest.mark.parametrize("line", CURLS, ids=[f"line-{n}" for n in range(len(CURLS))])
def test_a_line_of_curl_is_answered(server, line):
    words = [
        word.replace("localhost:8000", server.base_url.removeprefix("http://"))
        for word in shlex.split(line)
    ]
    ran = subprocess.run([*words, "--fail-with-body"], cwd=ROOT, capture_output=True, text=True,
                         check=False)  # fmt: skip
    assert ran.returncode == 0, ran.stdout + ran.stderr
    if "text/csv" in line:
        sent = (ROOT / "openapi_examples" / "farm_week.csv").read_text("utf-8")
        assert len(list(csv.reader(io.StringIO(ran.stdout)))) == len(sent.splitlines())
    else:
        assert re.search(r"0\.312|roth-1990|cannot be told apart|calibration-scope", ran.stdout)


def test_the_demonstration_prints_a_table_and_ends_well():
    ran = subprocess.run([sys.executable, "-m", "service.cli", "demo", "--once"], cwd=ROOT,
                         capture_output=True, text=True, check=False)  # fmt: skip
    assert ran.returncode == 0, ran.stderr
    assert "the same numbers." in ran.stdout
    assert len(re.findall(r"0\.\d{3} m3/m3 +0\.\d{3} to 0\.\d{3}", ran.stdout)) >= 8
    assert "invented" in ran.stdout


def test_the_convert_line_works(tmp_path):
    line = next(x for x in README.splitlines() if x.startswith("gleyline convert"))
    words = shlex.split(line.replace("farm_week_estimates.csv", str(tmp_path / "out.csv")))[1:]
    ran = subprocess.run([sys.executable, "-m", "service.cli", *words], cwd=ROOT,
                         capture_output=True, text=True, check=False)  # fmt: skip
    assert ran.returncode == 0, ran.stderr
    assert (tmp_path / "out.csv").stat().st_size > 100_000
