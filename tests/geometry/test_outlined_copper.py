"""Legs whose copper is drawn as outlines: measured along the straight line that it covers, else undecided."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from fixtures.boards import area_joined, straight_pair
from pairrules import check
from pairrules.result import PairResult

Tree = dict[str, Any]


def judged(folder: Path, tree: Tree) -> PairResult:
    path = folder / "board.json"
    path.write_text(json.dumps(tree), encoding="utf-8")
    (pair,) = check(path, "").pairs
    return pair


def strip(net: str, x0: float, x1: float, y: float) -> Tree:
    corners = [[x0, y - 0.1], [x1, y - 0.1], [x1, y + 0.1], [x0, y + 0.1]]
    return {"net": net, "layer": "TOP", "outline": corners}


def track(net: str, x0: float, x1: float, y: float) -> Tree:
    return {"net": net, "layer": "TOP", "width": 0.2, "points": [[x0, y], [x1, y]]}


def test_a_pair_drawn_as_outlines_alone_is_undecided(tmp_path: Path) -> None:
    tree = straight_pair().board
    tree["tracks"] = []
    tree["areas"] += [strip("IN_P", 0, 20, 0.2), strip("IN_N", 0, 20, -0.2)]
    pair = judged(tmp_path, tree)
    assert pair.verdict == "undecided"
    said = "most of plus is drawn as outlines of copper, of which neither width nor spacing is known"
    assert pair.missing[0] == said


def test_a_bend_within_an_outline_leaves_the_centre_line_unknown(tmp_path: Path) -> None:
    """Plus goes 4.9 mm up and down again inside one outline: its straight way is not in the copper."""
    tree = straight_pair().board
    tree["tracks"] = [track("IN_P", 0, 8, 0.2), track("IN_P", 12, 20, 0.2), track("IN_N", 0, 20, -0.2)]
    bend = [[7.9, 0.1], [8.1, 0.1], [8.1, 5], [11.9, 5], [11.9, 0.1], [12.1, 0.1], [12.1, 5.2], [7.9, 5.2]]
    tree["areas"].append({"net": "IN_P", "layer": "TOP", "outline": bend})
    pair = judged(tmp_path, tree)
    assert (pair.verdict, pair.measures.length_plus_mm) == ("undecided", None)
    assert pair.missing[0] == (
        "plus bends on TOP at (10.000, 0.200) mm within an outline of copper, where its centre line is not known"
    )


def test_a_short_straight_outline_in_one_leg_is_measured(tmp_path: Path) -> None:
    pair = judged(tmp_path, area_joined().board)
    assert pair.measures.length_plus_mm == pytest.approx(20)
    assert pair.verdict == "pass"


@pytest.mark.parametrize(("end", "verdict"), [(10.9, "pass"), (13.0, "undecided")])
def test_where_both_legs_are_outlines_nobody_sees_their_spacing(tmp_path: Path, end: float, verdict: str) -> None:
    tree, nets = straight_pair().board, (("IN_P", 0.2), ("IN_N", -0.2))
    tree["tracks"] = [one for net, y in nets for one in (track(net, 0, 10, y), track(net, end, 20, y))]
    tree["areas"] += [strip(net, 10, end, y) for net, y in nets]
    pair = judged(tmp_path, tree)
    assert pair.measures.length_plus_mm == pytest.approx(20)
    assert pair.verdict == verdict
    assert any(said.startswith("both legs run through copper drawn as outlines") for said in pair.missing) == (
        verdict == "undecided"
    )


def test_teardrops_change_nothing(tmp_path: Path) -> None:
    tree = straight_pair().board
    before = judged(tmp_path, tree)
    for net, y in (("IN_P", 0.2), ("IN_N", -0.2)):
        drops = ([[0, y - 0.15], [0, y + 0.15], [1, y]], [[20, y - 0.15], [20, y + 0.15], [19, y]])
        tree["areas"] += [{"net": net, "layer": "TOP", "outline": drop} for drop in drops]
    after = judged(tmp_path, tree)
    assert after.verdict == before.verdict == "pass"
    assert after.measures.length_plus_mm == before.measures.length_plus_mm
    assert after.measures.gap_median_mm == before.measures.gap_median_mm


def test_a_leg_without_length_is_undecided(tmp_path: Path) -> None:
    tree = straight_pair().board
    tree["parts"][1]["pins"][0]["at"] = [0, 0.2]
    pair = judged(tmp_path, tree)
    assert pair.verdict == "undecided"
    assert pair.missing[0] == "plus has no length: the pads at its two ends lie at one place"


def test_a_leg_longer_than_any_board_is_not_measured(tmp_path: Path) -> None:
    """A hundred turns of nine metres to and fro."""
    tree = straight_pair().board
    points = [[x, 0.2 + y] for y in range(100) for x in ((0, 9000) if y % 2 == 0 else (9000, 0))]
    tree["tracks"][0]["points"] = points
    tree["parts"][1]["pins"][0]["at"] = points[-1]
    pair = judged(tmp_path, tree)
    assert pair.verdict == "undecided"
    assert pair.missing[0] == "plus is 900 m long; legs longer than 50 m are not measured"


def test_an_end_that_is_not_known_leaves_the_pair_undecided(tmp_path: Path) -> None:
    """J1, the declared load, has no pin on plus any more: a pad of another part stands in."""
    tree = straight_pair().board
    tree["parts"][1]["ref"] = "J9"
    tree["parts"].append({"ref": "J1", "pins": []})
    pair = judged(tmp_path, tree)
    assert pair.verdict == "undecided"
    assert "the file declares J1 as load, which has no pins at the ends of both legs" in pair.missing
