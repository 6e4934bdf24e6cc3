"""Many boards at once: folders, patterns, files that are none, and the table at the end."""

from __future__ import annotations

import importlib
import json
from pathlib import Path

import pytest

from pairrules.cli import run
from pairrules.running.kept_results import KeptResults
from pairrules.running.section_file import SectionFile
from tests.balance.test_electrical import straight
from tests.cli.boards import limits, put


@pytest.fixture
def archive(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    limits(tmp_path)
    (tmp_path / "sub").mkdir()
    (tmp_path / ".hidden").mkdir()
    put(tmp_path, "a.json", bump=1.0)
    put(tmp_path / "sub", "b.json")
    put(tmp_path / ".hidden", "c.json", bump=1.0)
    (tmp_path / "package.json").write_text('{"name": "no board"}', encoding="utf-8")
    (tmp_path / "page.xml").write_text("<html/>", encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    return tmp_path


def table(text: str) -> list[list[str]]:
    lines = text.splitlines()
    start = max(i for i, line in enumerate(lines) if line.startswith("board ") and line.endswith("undecided"))
    return [line.split() for line in lines[start + 1 :]]


def test_a_folder_means_the_boards_in_it(archive: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["check", str(archive), "--no-cache"]) == 1
    told = capsys.readouterr()
    assert table(told.out) == [
        [str(archive / "a.json"), "2", "1", "1", "0", "0", "flagged"],
        [str(archive / "sub" / "b.json"), "2", "2", "0", "0", "0"],
    ]
    assert told.err == ""


def test_a_pattern_is_matched_where_no_file_has_that_name(archive: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["check", "**/*.json", "--no-cache"]) == 1
    assert [row[0] for row in table(capsys.readouterr().out)] == ["a.json", "sub/b.json"]
    put(archive, "[ab].json")
    assert run(["check", "[ab].json", "--no-cache"]) == 0
    assert "a.json" not in capsys.readouterr().out.replace("[ab].json", "")


def test_a_failing_file_does_not_stop_the_rest_and_the_worst_status_wins(
    archive: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (archive / "broken.xml").write_text("<IPC-2581", encoding="utf-8")
    assert run(["check", ".", "--no-cache"]) == 3
    told = capsys.readouterr()
    assert [row[-1] for row in table(told.out)] == ["flagged", "judged", "0"]
    assert told.err.startswith("pairrules: broken.xml: ")
    assert told.err.count("\n") == 1


def test_foreign_files_are_passed_over_when_asked(archive: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["check", "package.json", "page.xml", "--skip-foreign"]) == 0
    assert capsys.readouterr() == ("", "")
    assert run(["check", "package.json", "a.json", "--skip-foreign", "--no-cache"]) == 1
    assert run(["check", "package.json"]) == 3


def test_a_folder_without_boards(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "page.xml").write_text("<html/>", encoding="utf-8")
    assert run(["check", str(tmp_path)]) == 2
    said = f"pairrules: {tmp_path}: none of the files is a board; name a board, or the folder it is in\n"
    assert capsys.readouterr().err == said
    (tmp_path / "page.xml").unlink()
    assert run(["check", str(tmp_path)]) == 3
    assert capsys.readouterr().err == f"pairrules: {tmp_path}: this is a folder; name the board file in it\n"


def test_the_commands_cache_and_no_cache(
    archive: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    (archive / "a.json").write_text(json.dumps(straight()), encoding="utf-8")
    kept = KeptResults(archive / "kept")
    for user in ("boards", "measure", "cache"):
        monkeypatch.setattr(importlib.import_module(f"pairrules.cli.{user}"), "kept_results", lambda: kept)
    run(["check", "a.json", "--no-cache"])
    run(["measure", "a.json", "--no-cache"])
    assert not kept.folder.exists()
    run(["check", "a.json"])
    solved = SectionFile(kept.folder)
    assert solved.extent().sections == 1
    # What is kept is not even read where that is not wanted.
    monkeypatch.setattr(SectionFile, "read", lambda _: pytest.fail("read"))
    run(["check", "a.json", "--no-cache"])
    monkeypatch.undo()
    monkeypatch.chdir(archive)
    for user in ("boards", "cache"):
        monkeypatch.setattr(importlib.import_module(f"pairrules.cli.{user}"), "kept_results", lambda: kept)
    first = capsys.readouterr().out
    run(["check", "a.json"])
    assert first.endswith(capsys.readouterr().out)
    assert run(["cache"]) == 0
    told = capsys.readouterr().out.splitlines()
    assert told == [f"1 {what} kept, 0.0 MB, in {kept.folder}" for what in ("result", "solved cross-section")]
    assert run(["cache", "--clear"]) == 0
    told = capsys.readouterr().out.splitlines()
    assert told == [f"1 {what} dropped, 0.0 MB, in {kept.folder}" for what in ("result", "solved cross-section")]
    assert (kept.extent().results, solved.extent().sections) == (0, 0)
    assert not list(kept.folder.iterdir())
