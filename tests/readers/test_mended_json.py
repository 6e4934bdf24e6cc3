"""What a plain JSON board says amiss and is mended by a stated rule: each told with its place."""

from __future__ import annotations

from pairrules.board import Board
from pairrules.readers import plain_json
from tests.readers.plain_json_cases import Tree, text, whole


def read(tree: Tree) -> Board:
    return plain_json.READER.read(text(tree), "board.json", "")


def test_points_that_repeat_are_left_out_and_told() -> None:
    tree = whole()
    tree["tracks"][0]["points"] = [[10, 10], [10, 10], [20, 10], [20, 10], [30, 10]]
    board = read(tree)
    assert len(board.tracks) == 2
    assert board.missing == ("tracks[0].points[1] repeats the point before it and is left out, and so do 1 more",)


def test_the_closing_point_of_an_outline_is_no_repetition() -> None:
    tree = whole()
    tree["areas"][0]["outline"].append([0, 0])
    assert read(tree).missing == ()


def test_an_arc_about_its_own_start_is_left_out_and_told() -> None:
    tree = whole()
    tree["tracks"][0]["points"] = [[10, 10], {"arc_to": [10, 10], "centre": [10, 10], "clockwise": True}, [20, 10]]
    board = read(tree)
    assert len(board.tracks) == 1
    assert board.missing == ("tracks[0].points[1] turns about its own start and is left out",)


def test_an_outline_that_crosses_itself_is_told() -> None:
    tree = whole()
    tree["areas"][0] = {"net": "GND", "layer": "GND", "outline": [[0, 0], [2, 2], [2, 0], [0, 2]]}
    assert read(tree).missing == ("areas[0].outline crosses or touches itself and is read by what its lines enclose",)


def test_a_net_of_no_pin_and_a_part_of_no_pin_are_no_fault() -> None:
    tree = whole()
    tree["parts"].append({"ref": "MP2", "pins": []})
    tree["nets"].append({"name": "SPARE"})
    board = read(tree)
    assert "SPARE" in board.nets
    assert [part.ref for part in board.parts][-1] == "MP2"


def test_a_thousand_layers() -> None:
    tree = whole()
    tree["stackup"] += [{"name": f"L{i}", "kind": "copper" if i % 2 else "dielectric"} for i in range(2000)]
    board = read(tree)
    assert len(board.copper) == 1002
    assert len(board.missing) < 10
