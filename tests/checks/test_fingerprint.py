"""Fingerprints: what leaves them as they are, what gives another, on drawn pairs and on the demo board."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from pairrules.board import Board
from pairrules.board.columns import Floats
from pairrules.checks.fingerprint import VERSION, copper_digest, fingerprint, is_fingerprint, same_copper, version_of
from pairrules.checks.judge_pair import judge_pair
from pairrules.checks.rule import Subject, all_rules
from pairrules.geometry.board_copper import BoardCopper
from pairrules.geometry.measure import measure_link
from pairrules.shipped import demo_folder
from tests.checks.drawn_pairs import limit, subject

PLUS = [[0, 0], [10.0127, 0.0005], [12, -1], {"arc_to": [14, 1], "centre": [12, 1], "clockwise": False}, [14, 8]]
MINUS = [[0, 0.5], [9.5, 0.5], [9.5, 8]]
PLANE = {
    "net": "GND",
    "outline": [[-5, -5], [30, -5], [30, 15], [-5, 15]],
    "holes": [[[8, -1], [9, -1], [9, 1], [8, 1]]],
}
BESIDE = {"net": "PUMP", "points": [[2, -0.6], [7, -0.6]]}
FAR = {"net": "HEATER", "points": [[0, -12], [20, -12]]}
CASE: dict[str, Any] = {
    "plus": [PLUS],
    "minus": [MINUS],
    "vias": [{"net": "A_P", "at": [14, 8]}],
    "areas": [PLANE],
    "tracks": [BESIDE, FAR],
    "reference": ["GND"],
}


def mark(case: dict[str, Any] | Subject) -> str:
    on = subject(case) if isinstance(case, dict) else case
    return fingerprint("leg-length", on, copper_digest(on, BoardCopper(on.board, on.reference)))


def placed(board: Board, place: Callable[[Floats], Floats], turn: float = 0.0) -> Board:
    """The board with every point elsewhere."""
    tracks, vias, pads = board.tracks, board.vias, board.pads
    return replace(
        board,
        tracks=replace(tracks, start=place(tracks.start), end=place(tracks.end), centre=place(tracks.centre)),
        vias=replace(vias, at=place(vias.at)),
        pads=replace(pads, at=place(pads.at), rotation=pads.rotation + turn),
        areas=tuple(
            replace(area, outline=place(area.outline), holes=tuple(place(hole) for hole in area.holes))
            for area in board.areas
        ),
    )


def on_board(of: Subject, board: Board) -> Subject:
    """The same link, measured on another board."""
    geometry = measure_link(board, of.link, reach_mm=None, reference=of.reference)
    return replace(of, board=board, geometry=geometry)


HERE = subject(CASE)
MARK = mark(HERE)


@pytest.mark.parametrize("by", [(100.0, -37.0), (0.0127, 2.54), (1e-4 / 3, 7.7777777), (-1234.5678, 0.1)])
def test_moving_the_board_leaves_it(by: tuple[float, float]) -> None:
    assert same_copper(mark(on_board(HERE, placed(HERE.board, lambda at: at + by))), MARK)


@pytest.mark.parametrize("angle", [math.pi / 2, math.pi, 0.3])
def test_turning_the_board_leaves_it(angle: float) -> None:
    turn = np.array([[math.cos(angle), math.sin(angle)], [-math.sin(angle), math.cos(angle)]])
    assert same_copper(mark(on_board(HERE, placed(HERE.board, lambda at: at @ turn, angle))), MARK)


@pytest.mark.parametrize("seed", range(8))
@pytest.mark.parametrize("size", [1e-6, 2e-5])
def test_noise_leaves_it(seed: int, size: float) -> None:
    rng = np.random.default_rng(seed)
    noisy = placed(HERE.board, lambda at: at + rng.uniform(-size, size, at.shape))
    assert same_copper(mark(on_board(HERE, noisy)), MARK)


def test_drawing_order_direction_and_pieces_leave_it() -> None:
    middle = [12 + 2 * math.sin(0.7), 1 - 2 * math.cos(0.7)]
    cut = [
        [[14, 8], [14, 1]],
        [[12, -1], {"arc_to": middle, "centre": [12, 1], "clockwise": False}],
        [[14, 1], {"arc_to": middle, "centre": [12, 1], "clockwise": True}],
        [[10.0127, 0.0005], [12, -1]],
        [[10.0127, 0.0005], [0, 0]],
    ]
    ends = {"ends_plus": [[0, 0], [14, 8]], "ends_minus": [[0, 0.5], [9.5, 8]]}
    overlapping = [[[9.5, 8], [9.5, 0.5]], [[6, 0.5], [0, 0.5]], [[4, 0.5], [9.5, 0.5]], [[0, 0.5], [4, 0.5]]]
    beside = [{"net": "PUMP", "points": [[7, -0.6], [4, -0.6]]}, {"net": "PUMP", "points": [[2, -0.6], [5, -0.6]]}]
    other = CASE | {"plus": cut, "minus": overlapping, "tracks": [FAR, *beside]} | ends
    assert same_copper(mark(other), MARK)


def test_units_leave_it() -> None:
    def inches(value: Any) -> Any:
        if isinstance(value, list):
            return [inches(one) for one in value]
        if isinstance(value, dict):
            return {key: one if key in {"net", "clockwise"} else inches(one) for key, one in value.items()}
        return value / 25.4

    size = {"width": 0.2 / 25.4}
    legs = {leg: [{"points": inches(CASE[leg][0])} | size] for leg in ("plus", "minus")}
    here = subject({key: CASE[key] for key in ("plus", "minus")})
    there = subject({"units": "in", **legs})
    # Pads and stack are the drawing's own and would be in inches too.
    there = on_board(there, replace(there.board, stackup=here.board.stackup, pads=here.board.pads))
    assert same_copper(mark(there), mark(here))


@pytest.mark.parametrize("seed", range(4))
def test_the_order_of_the_file_leaves_it(seed: int) -> None:
    board, rng = HERE.board, np.random.default_rng(seed)
    order = rng.permutation(len(board.tracks))
    tracks = {name: getattr(board.tracks, name)[order] for name in type(board.tracks).__dataclass_fields__}
    assert same_copper(mark(on_board(HERE, replace(board, tracks=replace(board.tracks, **tracks)))), MARK)


@pytest.mark.parametrize(
    "more",
    [
        {"tracks": [BESIDE]},
        {"tracks": [BESIDE, {"net": "HEATER", "points": [[0, -11], [20, -13], [20, 14]]}]},
        {"areas": [PLANE | {"outline": [[-6, -5], [30, -5], [30, 15], [-5, 15]]}]},
    ],
    ids=["without it", "another track", "edge of the plane"],
)
def test_what_is_far_away_leaves_it(more: dict[str, Any]) -> None:
    assert same_copper(mark(CASE | more), MARK)


def slot(right: float) -> dict[str, Any]:
    return PLANE | {"holes": [[[8, -1], [right, -1], [right, 1], [8, 1]]]}


@pytest.mark.parametrize(
    "more",
    [
        {"plus": [[PLUS[0], [10.0127, 0.0055], *PLUS[2:]]]},
        {"plus": [{"points": PLUS, "width": 0.205}]},
        {"minus": [[*MINUS[:2], [9.505, 8]]]},
        {"minus": [[[0, 0.5], [9.5, 0.5]], {"points": MINUS[1:], "layer": "BOT"}]},
        {"plus": [PLUS, [[5, 0.0003], [5, -0.2]]]},
        {"vias": []},
        {"vias": [{"net": "A_P", "at": [14, 8], "pad": 0.65}]},
        {"tracks": [FAR, BESIDE | {"points": [[2, -0.605], [7, -0.605]]}]},
        {"tracks": [FAR]},
        {"tracks": [FAR, BESIDE | {"net": "GND"}]},
        {"areas": [slot(9.02)]},
        {"areas": [PLANE | {"outline": [[40, 40], [41, 40], [41, 41], [40, 41]], "holes": []}]},
        {"areas": [PLANE, {"net": "A_P", "layer": "TOP", "outline": [[3, -0.1], [3.3, -0.1], [3.3, 0.1], [3, 0.1]]}]},
    ],
    ids=[
        "corner", "width", "other leg", "layer", "stub", "via gone", "via pad", "neighbour nearer", "neighbour gone",
        "neighbour becomes reference", "slot longer", "plane gone", "copper on the leg",
    ],
)  # fmt: skip
def test_what_matters_gives_another(more: dict[str, Any]) -> None:
    assert not same_copper(mark(CASE | more), MARK)


def test_a_broken_leg_has_one_too() -> None:
    broken = CASE | {"minus": [[[0, 0.5], [4, 0.5]], [[6, 0.5], [9.5, 0.5], [9.5, 8]]]}
    here = mark(broken)
    assert is_fingerprint(here) and same_copper(here, mark(broken)) and not same_copper(here, MARK)


def test_each_rule_has_its_own() -> None:
    rules = all_rules()
    said = {"leg-length": {"most": "0.5 mm"}, "width-match": {"most": "0.01 mm"}}
    case = CASE | {"minus": [{"points": [[0, 0.5], [9.5, 0.5], [9.5, 8]], "width": 0.3}]}
    limits = {name: limit(name, rules[name], one) for name, one in said.items()}
    marks = [finding.fingerprint for finding in judge_pair(subject(case), limits, rules).findings]
    assert len(marks) == 2 and not same_copper(*marks)
    assert all(is_fingerprint(one) and version_of(one) == VERSION for one in marks)


def test_another_version_is_never_the_same() -> None:
    assert same_copper(MARK, MARK)
    assert not same_copper(MARK.replace("1:", "2:", 1), MARK.replace("1:", "2:", 1))
    assert version_of(MARK.replace("1:", "2:", 1)) == 2 and version_of("none") == 0


def test_numbers_may_differ_by_a_few_steps_round_the_turn_too() -> None:
    head, sketch = MARK[:-32], MARK[-32:]
    for first, second, same in (("0000", "0018", True), ("0000", "0019", False), ("ffff", "0017", True)):
        assert same_copper(head + first + sketch[4:], head + second + sketch[4:]) is same


def test_both_formats_of_the_demo_board_have_the_same() -> None:
    from pairrules.pipeline import check

    settings = demo_folder() / "pairrules.yaml"
    marks = []
    for name in ("tide-gauge-buoy.json", "tide-gauge-buoy.xml"):
        found = check(demo_folder() / name, settings, pairs="LCK_?").pairs
        marks.append({one.rule: one.fingerprint for pair in found for one in pair.findings})
    assert marks[0].keys() == marks[1].keys() >= {"leg-length", "via-match"}
    assert all(same_copper(marks[0][rule], marks[1][rule]) for rule in marks[0])
