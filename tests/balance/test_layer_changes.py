"""Where the reference changes with the layer, and how far the nearest way for the return current is."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from fixtures.boards import via_pair
from pairrules.pipeline import check
from pairrules.result import PairResult

SETTINGS = (
    "extends: []\nreference_nets: [GND]\nlimits: {return-via: {most: 2 mm, severity: review, source: this test}}\n"
)


def judged(tmp_path: Path, *, cut: float | None = None, ground: tuple[float, float] | None = None) -> PairResult:
    """The pair that changes layer at x = 10: its tracks cut so far from the vias, a ground via set there."""
    board = via_pair().board
    if cut is not None:
        for track in board["tracks"]:
            (start, end), at = track["points"], 10 - cut if track["layer"] == "TOP" else 10 + cut
            track["points"] = [start, [at, start[1]], end]
    if ground is not None:
        board["vias"].append({"net": "GND", "at": ground, "from": "TOP", "to": "BOTTOM", "drill": 0.25, "pad": 0.5})
    (tmp_path / "board.json").write_text(json.dumps(board), encoding="utf-8")
    (tmp_path / "pairrules.yaml").write_text(SETTINGS, encoding="utf-8")
    (found,) = check(tmp_path / "board.json").pairs
    return found


# The antipads reach 0.45 mm from the vias: within them the tracks have no reference copper.
@pytest.mark.parametrize("cut", [None, 3.0, 0.7, 0.4, 0.1])
def test_a_change_is_seen_however_short_the_tracks_beside_the_via_are(tmp_path: Path, cut: float | None) -> None:
    (finding,) = judged(tmp_path, cut=cut, ground=(10.0, 3.4)).findings
    assert finding.message == (
        "the nearest return via is 3.80 mm from a layer change of minus, and at 1 more; 2.00 mm is allowed"
    )


@pytest.mark.parametrize("cut", [None, 0.4])
def test_a_ground_via_beside_it_serves_both_legs(tmp_path: Path, cut: float | None) -> None:
    found = judged(tmp_path, cut=cut, ground=(11.0, 0.0))
    assert (found.findings, found.unjudged) == ((), ())


def test_without_any_it_is_told(tmp_path: Path) -> None:
    (finding,) = judged(tmp_path, cut=0.4).findings
    assert finding.message == (
        "no via joins the reference of plus on both sides of its layer change, and at 1 more; "
        "one within 2.00 mm is required"
    )
