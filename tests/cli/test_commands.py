"""The other commands, the entry points, and how they end when the reader goes or the user stops them."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest

from pairrules import __version__, check
from pairrules.cli import run
from pairrules.cli.command_line import group
from pairrules.cli.overview import commands
from pairrules.pipeline import find_pairs
from pairrules.schemas import SCHEMAS, schema_text
from tests.cli.boards import limits, put

ROOT = Path(__file__).resolve().parents[2]


def test_measure_prints_figures_and_judges_nothing(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    path = str(put(tmp_path, bump=1.0))
    assert run(["measure", path]) == 0
    out = capsys.readouterr().out
    assert "length, plus less minus [mm]" in out and "2.000" in out
    assert run(["measure", "--format", "csv", path]) == 0
    assert capsys.readouterr().out.startswith("board,pair,plus,minus,")
    assert run(["measure", "--format", "json", path]) == 0
    assert json.loads(capsys.readouterr().out)["pairs"][0]["measures"]["length_mismatch_mm"] == pytest.approx(2.0)


def test_pairs_as_table_and_json(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = str(put(tmp_path))
    assert run(["pairs", path]) == 0
    out = capsys.readouterr().out
    assert "IN  (no class; found by " in out and "  plus   IN_P\n" in out
    assert run(["pairs", "--format", "json", path]) == 0
    assert [pair["name"] for pair in json.loads(capsys.readouterr().out)["pairs"]] == ["IN", "OK"]


@pytest.mark.parametrize("name", SCHEMAS)
def test_schema(capsys: pytest.CaptureFixture[str], name: str) -> None:
    assert run(["schema", name]) == 0
    assert json.loads(capsys.readouterr().out) == json.loads(schema_text(name))


def test_the_same_from_python(tmp_path: Path) -> None:
    own = limits(tmp_path)
    path = put(tmp_path, bump=1.0)
    found = check(path, own)
    assert [pair.verdict for pair in found.pairs] == ["flag", "pass"]
    assert found == check(str(path)) == check(path, str(own))
    assert [pair.name for pair in find_pairs(path).pairs] == [pair.name for pair in found.pairs]


def test_a_class_of_the_file_that_the_settings_do_not_have(tmp_path: Path) -> None:
    limits(tmp_path)
    declared = [{"name": "IN", "plus": "IN_P", "minus": "IN_N", "class": "sensor"}]
    first = next(pair for pair in check(put(tmp_path, pairs=declared)).pairs if pair.name == "IN")
    assert first.klass == "sensor"
    assert first.missing[-1] == "the file puts the pair in class sensor, which the settings do not have"


def test_the_stage_is_told_for_each_pair(tmp_path: Path) -> None:
    limits(tmp_path)
    told: list[tuple[str, int, int]] = []
    check(put(tmp_path), progress=lambda *what: told.append(what))
    assert told == [("measuring pairs", 0, 2), ("measuring pairs", 1, 2)]


def test_every_command_has_its_file_and_runs_its_help(capsys: pytest.CaptureFixture[str]) -> None:
    assert {"check", "measure", "pairs", "schema"} <= set(commands())
    for name in commands():
        assert run([name, "--help"]) == 0
        assert capsys.readouterr().out.startswith(f"Usage: pairrules {name} ")
    assert run(["--help"]) == 0
    out = capsys.readouterr().out
    assert all(f"\n  {name}" in out for name in commands())


def pairrules(*arguments: str, **more: object) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "pairrules", *arguments]
    return subprocess.run(command, capture_output=True, text=True, check=False, cwd=ROOT)


def test_as_a_module() -> None:
    done = pairrules("--version")
    assert (done.returncode, done.stdout, done.stderr) == (0, f"pairrules {__version__}\n", "")
    done = pairrules("check", "lost.json")
    assert (done.returncode, done.stdout) == (3, "")
    assert done.stderr == "pairrules: lost.json: there is no such file; check the path\n"


def test_a_reader_that_goes_away_is_no_fault_of_ours() -> None:
    command = [sys.executable, "-m", "pairrules", "schema", "result"]
    with subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, cwd=ROOT) as running:
        assert running.stdout is not None and running.stderr is not None
        running.stdout.close()
        said = running.stderr.read()
    assert said == b"" and running.returncode == 141


def test_stopped_by_the_user(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    def stopped(*_: object, **__: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(group, "invoke", stopped)
    assert run(["schema", "board"]) == 130
    out, err = capsys.readouterr()
    assert out == "" and err.strip() == "pairrules: interrupted, nothing more is written"
