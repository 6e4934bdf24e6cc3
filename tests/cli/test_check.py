"""`pairrules check` from the outside: what it prints, what it exits with, what it leaves on disk."""

from __future__ import annotations

import json
import stat
from pathlib import Path

import pytest

from pairrules.cli import run
from tests.cli.boards import LIMITS, limits, put


def test_nothing_flagged_is_0(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    assert run(["check", str(put(tmp_path))]) == 0
    out, err = capsys.readouterr()
    assert "2 pairs: 2 passed" in " ".join(out.split()) and "Passed (2): IN, OK" in out and err == ""


def test_something_flagged_is_1(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    assert run(["check", str(put(tmp_path, bump=1.0))]) == 1
    out, _ = capsys.readouterr()
    assert "  review     leg-length: plus is 2.00 mm longer than minus; 0.50 mm is allowed\n" in out
    assert "to do: add 2.00 mm to minus" in out


@pytest.mark.parametrize(("severity", "status"), [("note", 1), ("review", 1), ("blocker", 0)])
def test_severity_decides_the_status_not_the_listing(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], severity: str, status: int
) -> None:
    limits(tmp_path)
    assert run(["check", "--severity", severity, str(put(tmp_path, bump=1.0))]) == status
    assert "leg-length" in capsys.readouterr().out


def test_without_any_limit_the_pairs_are_undecided_and_the_status_0(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    limits(tmp_path, "extends: []\n")
    assert run(["check", "--format", "json", str(put(tmp_path))]) == 0
    plain = json.loads(capsys.readouterr().out)
    assert plain["summary"] == {"pairs": 2, "pass": 0, "flag": 0, "waived": 0, "undecided": 2}
    assert plain["pairs"][0]["missing"][-1] == (
        "no limit holds for the pair; give it a class with limits in the settings"
    )


def test_only_the_pairs_asked_for(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    path = str(put(tmp_path, bump=1.0))
    assert run(["check", "--pair", "OK", "--format", "json", path]) == 0
    assert [pair["name"] for pair in json.loads(capsys.readouterr().out)["pairs"]] == ["OK"]
    assert run(["check", "--pair", "IN_?", "--format", "json", path]) == 1
    assert [pair["name"] for pair in json.loads(capsys.readouterr().out)["pairs"]] == ["IN"]


def test_same_input_same_bytes(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    path = str(put(tmp_path, bump=1.0))
    texts = []
    for _ in range(2):
        run(["check", "--format", "json", path])
        texts.append(capsys.readouterr().out)
    assert texts[0] == texts[1]


def test_several_boards_are_listed_in_turn_and_the_worst_status_counts(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    limits(tmp_path)
    good, bad, lost = put(tmp_path, "good.json"), put(tmp_path, "bad.json", bump=1.0), tmp_path / "lost.json"
    assert run(["check", str(bad), str(good)]) == 1
    out, _ = capsys.readouterr()
    assert 0 <= out.index("bad.json") < out.index("good.json")
    assert run(["check", "--format", "json", str(good), str(lost), str(bad)]) == 3
    out, err = capsys.readouterr()
    assert [Path(one["board"]["file"]).name for one in json.loads(out)] == ["good.json", "bad.json"]
    assert err == f"pairrules: {lost}: there is no such file; check the path\n"


def test_output_goes_into_the_file_alone(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    path, target = put(tmp_path, bump=1.0), tmp_path / "result.json"
    target.write_text("old")
    target.chmod(0o640)
    assert run(["check", "--format", "json", "--output", str(target), str(path)]) == 1
    assert capsys.readouterr() == ("", "")
    assert json.loads(target.read_text())["pairrules_result"] == 1
    assert stat.S_IMODE(target.stat().st_mode) == 0o640
    assert sorted(file.name for file in tmp_path.iterdir()) == ["buoy.json", "pairrules.yaml", "result.json"]


def test_a_failure_leaves_the_file_as_it_was(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    good, target = put(tmp_path), tmp_path / "result.json"
    target.write_text("old")
    (tmp_path / "bad.json").write_text("{}")
    assert run(["check", "--output", str(target), str(good), str(tmp_path / "bad.json")]) == 3
    assert target.read_text() == "old" and capsys.readouterr().out == ""
    assert not [file for file in tmp_path.iterdir() if file.name.startswith(".")]


def test_where_output_cannot_be_written(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    path = str(put(tmp_path))
    assert run(["check", "--output", str(tmp_path), path]) == 2
    assert capsys.readouterr().err == f"pairrules: {tmp_path}: --output names a folder; name a file in it\n"
    target = tmp_path / "nowhere" / "result.json"
    assert run(["check", "--output", str(target), path]) == 2
    assert capsys.readouterr().err == (
        f"pairrules: {target}: --output cannot be written (No such file or directory); "
        "name a file in a folder you may write to\n"
    )


def test_boards_that_cannot_be_read(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    empty = tmp_path / "empty.json"
    empty.write_bytes(b"")
    for path, said in (
        (tmp_path / "lost.json", "there is no such file; check the path"),
        (empty, "the file is empty; export the board again"),
    ):
        assert run(["check", str(path)]) == 3
        assert capsys.readouterr() == ("", f"pairrules: {path}: {said}\n")


def test_an_unknown_kind_of_file(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "notes.txt"
    path.write_text("high water at noon")
    assert run(["check", str(path)]) == 3
    assert capsys.readouterr().err == (
        f"pairrules: {path}: this is no board file; give an IPC-2581 XML file or a plain JSON board "
        "(see `pairrules schema board`)\n"
    )


def test_settings_faults_are_one_line_each(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    wrong = tmp_path / "wrong.yaml"
    wrong.write_text("extends: []\nlimits:\n  leg-length: {most: 0.5}\n  leg-lenght: {most: 1 mm}\n")
    path = str(put(tmp_path))
    assert run(["check", "--settings", str(wrong), path, path]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    lines = err.splitlines()
    assert len(lines) == 2 and all(line.startswith(f"pairrules: {wrong}: line ") for line in lines)


def test_settings_that_are_not_there(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    lost = tmp_path / "lost.yaml"
    assert run(["check", "--settings", str(lost), str(put(tmp_path))]) == 2
    assert capsys.readouterr().err.startswith(f"pairrules: {lost}: ")


def test_a_stackup_with_other_layers(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = put(tmp_path, stackup=[{"name": "TOP", "kind": "copper"}, {"name": "GND", "kind": "copper"}])
    own = limits(tmp_path, LIMITS + "stackup:\n  - {name: OUT, kind: copper, thickness: 35 um}\n")
    assert run(["check", str(path)]) == 2
    assert capsys.readouterr().err == (
        f"pairrules: {own}: stackup: the stackup has no copper layer 'TOP', which the board has; "
        "name every copper layer as the board file does, top to bottom\n"
    )


def test_hostile_names_cannot_steer_the_terminal(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    text = put(tmp_path, bump=1.0).read_text().replace("IN_", "\\u001b[2J\\u202eIN_")
    (tmp_path / "evil.json").write_text(text)
    run(["check", str(tmp_path / "evil.json")])
    out, err = capsys.readouterr()
    assert "\x1b" not in out + err and "\u202e" not in out + err


DIRE = (
    "pairrules check: invalid value for '--severity': 'dire' is not one of 'blocker', 'review', 'note'; "
    "see `pairrules check --help`"
)


@pytest.mark.parametrize(
    ("arguments", "line"),
    [
        (["check"], "pairrules check: no BOARD is given; name a file, or take --demo; see `pairrules check --help`"),
        (["check", "--demo", "x"], "pairrules check: --demo takes no BOARD; see `pairrules check --help`"),
        (["check", "--severity", "dire", "x"], DIRE),
        (["chek"], "pairrules: no such command 'chek'; see `pairrules --help`"),
        (["measure"], "pairrules measure: missing argument 'BOARD'; see `pairrules measure --help`"),
    ],
)
def test_wrong_usage_is_one_line_and_2(capsys: pytest.CaptureFixture[str], arguments: list[str], line: str) -> None:
    assert run(arguments) == 2
    assert capsys.readouterr() == ("", line + "\n")


def test_the_demo_board_is_checked_with_its_own_settings(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["check", "--demo", "--format", "json"]) == 1
    plain = json.loads(capsys.readouterr().out)
    assert plain["board"]["file"] == "tide-gauge-buoy.json"
    assert plain["summary"]["flag"] > 0 and plain["summary"]["pass"] > 0
    assert {pair["class"] for pair in plain["pairs"]} > {"rs485", "usb"}


def test_a_pattern_that_matches_nothing(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = put(tmp_path)
    assert run(["check", "--pair", "NO*", str(path)]) == 2
    assert capsys.readouterr().err == (
        f"pairrules: {path}: no pair or net of a pair matches 'NO*'; `pairrules pairs` lists them\n"
    )
