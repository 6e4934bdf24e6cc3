"""`pairrules waive`, and what `check` then makes of the waiver, from the outside."""

from __future__ import annotations

import json
from itertools import pairwise
from pathlib import Path
from typing import Any

import pytest

from pairrules.cli import run
from pairrules.settings.waivers import FILE_NAME
from tests.cli.boards import LIMITS, board, limits, put

Caught = pytest.CaptureFixture[str]
DAY = ["--today", "2031-01-01"]


@pytest.fixture
def flagged(tmp_path: Path) -> str:
    """A board whose pair IN breaks its one limit."""
    limits(tmp_path)
    return str(put(tmp_path, bump=1.0))


def waived(
    path: str, *more: str, rule: str = "leg-length", pair: str = "IN", reason: str = "short", until: str = "2031-05-17"
) -> int:
    return run(["waive", path, "--rule", rule, "--pair", pair, "--reason", reason, "--until", until, *DAY, *more])


def checked(path: str, caught: Caught, *more: str, today: str = "2031-01-01") -> tuple[int, dict[str, Any]]:
    caught.readouterr()
    status = run(["check", "--format", "json", "--today", today, *more, path])
    return status, json.loads(caught.readouterr().out)


def states(plain: dict[str, Any]) -> list[tuple[str, str, str]]:
    return [(one["rule"], one["pair"], one["state"]) for one in plain["waivers"]]


def test_a_waived_finding_flags_no_more(flagged: str, capsys: Caught) -> None:
    assert waived(flagged, "--who", "A. Tide") == 0
    where = Path(flagged).parent / FILE_NAME
    assert capsys.readouterr().out == f"{where}: leg-length of IN is waived until 2031-05-17\n"
    status, plain = checked(flagged, capsys)
    assert status == 0 and plain["summary"]["waived"] == 1 and states(plain) == [("leg-length", "IN", "held")]
    assert plain["pairs"][0]["verdict"] == "waived" and plain["pairs"][0]["findings"][0]["waived"] is True


def test_it_holds_through_its_last_day(flagged: str, capsys: Caught) -> None:
    waived(flagged)
    assert checked(flagged, capsys, today="2031-05-17")[0] == 0
    status, plain = checked(flagged, capsys, today="2031-05-18")
    assert status == 1 and states(plain) == [("leg-length", "IN", "expired")]
    assert plain["pairs"][0]["verdict"] == "flag" and plain["pairs"][0]["findings"][0]["waived"] is False


def test_other_copper_ends_it(flagged: str, capsys: Caught) -> None:
    waived(flagged)
    put(Path(flagged).parent, bump=1.01)
    status, plain = checked(flagged, capsys)
    assert status == 1 and states(plain) == [("leg-length", "IN", "changed")]


def test_a_moved_board_redrawn_in_pieces_keeps_it(flagged: str, capsys: Caught) -> None:
    waived(flagged)
    tree = board(bump=1.0)
    for part in tree["parts"]:
        for pin in part["pins"]:
            pin["at"] = [pin["at"][0] + 7.1234, pin["at"][1] - 3.3]
    pieces = []
    for track in tree["tracks"]:
        points = [[x + 7.1234, y - 3.3] for x, y in track["points"]]
        pieces += [track | {"points": [b, a]} for a, b in pairwise(points)]
    Path(flagged).write_text(json.dumps(tree | {"tracks": pieces[::-1]}), encoding="utf-8")
    assert states(checked(flagged, capsys)[1]) == [("leg-length", "IN", "held")]


def test_what_is_mended_or_no_longer_there_is_gone(flagged: str, capsys: Caught) -> None:
    waived(flagged)
    put(Path(flagged).parent)
    status, plain = checked(flagged, capsys)
    assert status == 0 and states(plain) == [("leg-length", "IN", "gone")] and plain["summary"]["pass"] == 2
    # A run on other pairs alone says nothing of it.
    assert states(checked(flagged, capsys, "--pair", "OK")[1]) == []
    tree = board()
    tree["tracks"] = tree["tracks"][2:]
    for part in tree["parts"]:
        part["pins"] = part["pins"][2:]
    Path(flagged).write_text(json.dumps(tree), encoding="utf-8")
    plain = checked(flagged, capsys)[1]
    assert states(plain) == [("leg-length", "IN", "gone")]
    assert plain["waivers"][0]["why"] == "no pair has this name, or a net of this name"


def test_a_broken_leg_is_undecided_in_spite_of_it(flagged: str, capsys: Caught) -> None:
    waived(flagged)
    tree = board(bump=1.0)
    tree["tracks"][0]["points"] = tree["tracks"][0]["points"][:3]
    Path(flagged).write_text(json.dumps(tree), encoding="utf-8")
    plain = checked(flagged, capsys)[1]
    assert plain["pairs"][0]["verdict"] == "undecided" and states(plain) == [("leg-length", "IN", "undecided")]


def test_the_same_twice_changes_nothing_and_another_reason_renews(flagged: str, capsys: Caught) -> None:
    file = Path(flagged).parent / FILE_NAME
    file.write_text("# Agreed at the buoy review.\n", encoding="utf-8")
    waived(flagged, "--who", "A. Tide")
    first = file.read_text(encoding="utf-8")
    assert first.startswith("# Agreed at the buoy review.\n- rule: leg-length\n  pair: IN\n")
    capsys.readouterr()
    assert waived(flagged) == 0
    assert capsys.readouterr().out == f"{file}: leg-length of IN is waived as before until 2031-05-17\n"
    assert file.read_text(encoding="utf-8") == first
    waived(flagged, pair="IN_N", reason="still short", until="2032-01-01")
    assert file.read_text(encoding="utf-8") == first.replace('"short"', '"still short"').replace(
        "2031-05", "2032-01"
    ).replace("2032-01-17", "2032-01-01")


def test_the_settings_say_where(tmp_path: Path, capsys: Caught) -> None:
    limits(tmp_path, LIMITS + "waivers: agreed.yaml\n")
    path = str(put(tmp_path, bump=1.0))
    assert checked(path, capsys)[1]["waivers"] == []
    assert waived(path) == 0
    assert (tmp_path / "agreed.yaml").is_file() and not (tmp_path / FILE_NAME).exists()
    assert checked(path, capsys)[0] == 0


@pytest.mark.parametrize(
    ("more", "line"),
    [
        ({"pair": "OK"}, "{board}: OK has no finding of leg-length; nothing is to be waived"),
        ({"rule": "leg-lengt"}, "--rule 'leg-lengt' is no rule; write 'leg-length'"),
        ({"rule": "via-match"}, "{board}: IN has no finding of via-match; it has findings of leg-length"),
        ({"reason": "  "}, "--reason is empty; say why the finding is lived with"),
        ({"reason": "a\x1bb"}, "--reason holds a character that cannot be printed; leave it out"),
        ({"until": "2030-12-31"}, "--until 2030-12-31 is past; give a day to come"),
        ({"pair": "I*"}, "{board}: no pair or net of a pair matches 'I[*]'; `pairrules pairs` lists them"),
    ],
)
def test_refusals(flagged: str, capsys: Caught, more: dict[str, str], line: str) -> None:
    assert waived(flagged, **more) == 2
    assert capsys.readouterr().err == f"pairrules: {line.format(board=flagged)}\n"
    assert not (Path(flagged).parent / FILE_NAME).exists()


def test_an_undecided_rule_cannot_be_waived(flagged: str, capsys: Caught) -> None:
    tree = board(bump=1.0)
    tree["tracks"][0]["points"] = tree["tracks"][0]["points"][:3]
    Path(flagged).write_text(json.dumps(tree), encoding="utf-8")
    assert waived(flagged) == 2
    assert "leg-length is undecided for IN: " in capsys.readouterr().err


def test_a_file_that_cannot_be_edited_is_left_alone(flagged: str, capsys: Caught) -> None:
    file = Path(flagged).parent / FILE_NAME
    mark = "1:00c0ffee-" + "0" * 32
    text = (
        f'- {{rule: via-match, pair: IN, reason: &r shared, until: 2031-05-17, fingerprint: "{mark}"}}\n'
        f'- {{rule: leg-length, pair: IN, reason: *r, until: 2031-05-17, fingerprint: "{mark}"}}\n'
    )
    file.write_text(text, encoding="utf-8")
    assert waived(flagged) == 2
    assert capsys.readouterr().err == (
        f"pairrules: {file}: the file is laid out in a way that cannot be edited here; "
        "write the waiver into the file by hand\n"
    )
    assert file.read_text(encoding="utf-8") == text


def test_faults_of_the_file_end_a_check_with_their_places(flagged: str, capsys: Caught) -> None:
    file = Path(flagged).parent / FILE_NAME
    file.write_text("- rule: leg-length\n  pair: IN\n  until: soon\n", encoding="utf-8")
    assert run(["check", flagged]) == 2
    assert capsys.readouterr().err == (
        f"pairrules: {file}: line 1, column 3: waivers[0] lacks 'reason'; add it\n"
        f"pairrules: {file}: line 1, column 3: waivers[0] lacks 'fingerprint'; add it\n"
        f"pairrules: {file}: line 3, column 10: waivers[0].until is 'soon'; write a day, such as 2031-05-17\n"
    )


def test_a_day_that_is_none(flagged: str, capsys: Caught) -> None:
    assert run(["check", "--today", "tomorrow", flagged]) == 2
    assert "'tomorrow' is no day; write it as 2031-05-17" in capsys.readouterr().err
