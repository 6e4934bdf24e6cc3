"""`pairrules compare` and `check --since` from the outside."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from pairrules.cli import run
from tests.cli.boards import board, limits, put

Caught = pytest.CaptureFixture[str]


def compared(capsys: Caught, *arguments: str) -> tuple[int, dict[str, Any]]:
    capsys.readouterr()
    status = run(["compare", "--format", "json", *arguments])
    return status, json.loads(capsys.readouterr().out)


def saved(path: Path, capsys: Caught) -> Path:
    """The result of a board as JSON in a file."""
    target = path.with_suffix(".result.json")
    run(["check", "--format", "json", "--output", str(target), str(path)])
    capsys.readouterr()
    return target


def renamed(tree: dict[str, Any], names: dict[str, str]) -> dict[str, Any]:
    text = json.dumps(tree)
    for old, new in names.items():
        text = text.replace(f'"{old}"', f'"{new}"')
    changed: dict[str, Any] = json.loads(text)
    return changed


def test_a_board_with_itself_is_the_same(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    path = put(tmp_path, bump=1.0)
    status, plain = compared(capsys, str(path), str(path))
    assert status == 0 and plain["pairrules_comparison"] == 1 and plain["worse"] is False
    assert [(pair["name"], pair["change"], pair["matched_by"]) for pair in plain["pairs"]] == [
        ("IN", "same", "nets"),
        ("OK", "same", "nets"),
    ]


def test_worse_and_better(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    old, new = put(tmp_path, "old.json", bump=1.0), put(tmp_path, "new.json", bump=1.1)
    status, plain = compared(capsys, str(old), str(new))
    worse = plain["pairs"][0]
    assert status == 1 and worse["change"] == "worse" and worse["worse"] is True
    found = worse["findings"][0]
    assert (found["rule"], found["change"]) == ("leg-length", "worse")
    assert (found["old_measured"], found["new_measured"]) == (pytest.approx(2.0), pytest.approx(2.2))
    assert {one["figure"] for one in worse["figures"] if one["change"] == "worse"} >= {
        "length_mismatch_mm",
        "loop_area_mm2",
    }
    status, plain = compared(capsys, str(new), str(old))
    assert status == 0 and plain["pairs"][0]["change"] == "better" and plain["worse"] is False


def test_rounding_is_no_change(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    old, new = put(tmp_path, "old.json", bump=1.0), put(tmp_path, "new.json", bump=1.0004)
    assert compared(capsys, str(old), str(new))[1]["summary"]["same"] == 2


def test_the_listing(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    old, new = put(tmp_path, "o.json"), put(tmp_path, "n.json", bump=1.0)
    assert run(["compare", str(old), str(new)]) == 1
    out = capsys.readouterr().out
    assert " ".join(out.split("\n\n", 1)[0].split()) == f"{old} to {new}: 1 worse, 1 same"
    assert "IN  flag, was pass\n  appeared   leg-length: plus is 2.00 mm longer than minus; 0.50 mm is allowed\n" in out
    assert "  worse      length_mismatch_mm is 2, was 0\n" in out
    assert out.endswith("The same (1): OK\n")


def test_saved_results_stand_for_boards(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    old, new = put(tmp_path, "old.json", bump=1.0), put(tmp_path, "new.json", bump=1.1)
    whole = compared(capsys, str(old), str(new))[1]
    for first, second in (
        (saved(old, capsys), new),
        (old, saved(new, capsys)),
        (saved(old, capsys), saved(new, capsys)),
    ):
        assert compared(capsys, str(first), str(second))[1]["pairs"] == whole["pairs"]


def test_renamed_nets_are_found_by_the_pins_at_their_ends(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    old, new = put(tmp_path, "old.json", bump=1.0), tmp_path / "new.json"
    names = {"IN_P": "GAUGE_P", "IN_N": "GAUGE_N"}
    new.write_text(json.dumps(renamed(board(bump=1.1), names)), encoding="utf-8")
    for first in (old, saved(old, capsys)):
        status, plain = compared(capsys, str(first), str(new))
        pair = next(one for one in plain["pairs"] if one["name"] == "GAUGE")
        assert status == 1 and (pair["old_name"], pair["matched_by"]) == ("IN", "pins at its ends")
        assert pair["findings"][0]["change"] == "worse"


def test_a_pair_that_appeared_and_one_that_vanished(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    tree = board(bump=1.0)
    tree["tracks"] = tree["tracks"][2:]
    for part in tree["parts"]:
        part["pins"] = part["pins"][2:]
    without = tmp_path / "without.json"
    without.write_text(json.dumps(tree), encoding="utf-8")
    whole = put(tmp_path, "with.json", bump=1.0)
    status, plain = compared(capsys, str(without), str(whole))
    assert status == 1 and [(p["name"], p["change"]) for p in plain["pairs"]] == [("IN", "appeared"), ("OK", "same")]
    status, plain = compared(capsys, str(whole), str(without))
    assert status == 0 and [(p["old_name"], p["change"]) for p in plain["pairs"]] == [
        ("OK", "same"),
        ("IN", "vanished"),
    ]


def test_a_pair_that_loses_a_leg_is_worse(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    half = tmp_path / "half.json"
    half.write_text(json.dumps(renamed(board(), {"OK_N": "OTHER"})), encoding="utf-8")
    status, plain = compared(capsys, str(put(tmp_path)), str(half))
    gone = plain["pairs"][-1]
    assert status == 1 and (gone["change"], gone["worse"]) == ("vanished", True)
    assert gone["notes"] == [{"change": "worse", "message": "OK_P is left without its other leg"}]


def test_a_rule_that_cannot_judge_any_more_is_worse(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    tree = board(bump=1.0)
    tree["tracks"][0]["points"] = tree["tracks"][0]["points"][:3]
    broken = tmp_path / "broken.json"
    broken.write_text(json.dumps(tree), encoding="utf-8")
    status, plain = compared(capsys, str(put(tmp_path, bump=1.0)), str(broken))
    pair = plain["pairs"][0]
    assert status == 1 and pair["change"] == "worse" and pair["findings"] == []
    assert [note["message"].split(":")[0] for note in pair["notes"]] == [
        "its route is partial, was complete",
        "leg-length cannot be judged any more",
    ]


def since(capsys: Caught, old: Path, new: Path, *more: str) -> tuple[int, dict[str, Any]]:
    capsys.readouterr()
    status = run(["check", "--since", str(old), "--format", "json", *more, str(new)])
    return status, json.loads(capsys.readouterr().out)


def test_since_flags_only_what_got_worse(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    old = put(tmp_path, "old.json", bump=1.0)
    for first in (old, saved(old, capsys)):
        for bump, status, baseline in ((1.0, 0, "unchanged"), (0.9, 0, "unchanged"), (1.1, 1, "worse")):
            got, plain = since(capsys, first, put(tmp_path, "new.json", bump=bump))
            pair = plain["pairs"][0]
            assert got == status and pair["findings"][0]["baseline"] == baseline
            # The verdict stays what it is.
            assert pair["verdict"] == "flag" and plain["summary"]["flag"] == 1
    got, plain = since(capsys, put(tmp_path, "old.json"), put(tmp_path, "new.json", bump=1.0))
    assert got == 1 and plain["pairs"][0]["findings"][0]["baseline"] == "new"


def test_since_shows_what_stood_before(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    path = put(tmp_path, bump=1.0)
    assert run(["check", "--since", str(path), str(path)]) == 0
    out = capsys.readouterr().out
    assert "  review     leg-length: stood before; plus is 2.00 mm longer than minus;" in out
    assert "2 pairs: 1 flagged (1 as before), 1 passed" in " ".join(out.split())


def test_since_judges_both_boards_by_the_settings_of_the_new_one(tmp_path: Path, capsys: Caught) -> None:
    there, here = tmp_path / "there", tmp_path / "here"
    there.mkdir()
    here.mkdir()
    limits(there, "extends: []\n")
    limits(here)
    old, new = put(there, bump=1.0), put(here, bump=1.0)
    assert since(capsys, old, new)[1]["pairs"][0]["findings"][0]["baseline"] == "unchanged"


def test_a_waiver_that_no_longer_holds_is_not_hidden_by_since(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    path = put(tmp_path, bump=1.0)
    run(
        [
            "waive",
            str(path),
            "--rule",
            "leg-length",
            "--pair",
            "IN",
            "--reason",
            "r",
            "--until",
            "2031-05-17",
            "--today",
            "2031-01-01",
        ]
    )
    old = tmp_path / "old.result.json"
    run(["check", "--format", "json", "--output", str(old), "--today", "2031-01-01", str(path)])
    status, plain = since(capsys, old, path, "--today", "2031-06-01")
    assert status == 1 and plain["pairs"][0]["findings"][0]["baseline"] == "new"


def test_since_takes_one_board(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path)
    path = str(put(tmp_path))
    assert run(["check", "--since", path, path, path]) == 2
    assert capsys.readouterr().err == "pairrules check: --since takes one BOARD; see `pairrules check --help`\n"


@pytest.mark.parametrize("which", [0, 1])
def test_what_is_no_board_ends_with_3(tmp_path: Path, capsys: Caught, which: int) -> None:
    limits(tmp_path)
    paths = [str(put(tmp_path))] * 2
    paths[which] = str(tmp_path / "lost.json")
    assert run(["compare", *paths]) == 3
    assert capsys.readouterr().err == f"pairrules: {tmp_path / 'lost.json'}: there is no such file; check the path\n"
