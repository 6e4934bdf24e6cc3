"""The reader of plain JSON boards: values, units, faults by their whole message, laws."""

from __future__ import annotations

import json
import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairrules.board import Board
from pairrules.errors import BoardError
from pairrules.readers.plain_json import READER
from tests.readers.plain_json_cases import BAD, GOOD, Bad, text, whole


def board(tree: dict[str, Any]) -> Board:
    return READER.read(text(tree), "board.json", "")


def message(data: bytes, step: str = "") -> str:
    with pytest.raises(BoardError) as caught:
        READER.read(data, "board.json", step)
    assert caught.value.exit_status == 3
    return str(caught.value)


def test_board_itself() -> None:
    read = board(whole())
    assert (read.name, read.format, read.revision, read.units) == ("tide gauge logger", "plain JSON", "1", "mm")
    assert read.copper == ("TOP", "GND")
    assert read.nets == ("GND", "IN_N", "IN_P")
    assert read.net_kinds == ("ground", "", "")
    assert read.complete
    assert read.missing == ()
    assert read.outline is not None
    assert read.outline.tolist() == [[0, 0], [80, 0], [80, 50], [0, 50]]


def test_stackup() -> None:
    stackup = board(whole()).stackup
    assert [(layer.name, layer.kind, layer.thickness_mm) for layer in stackup.layers] == [
        ("TOP", "copper", 0.035),
        ("D1", "dielectric", 0.2),
        ("GND", "copper", 0.035),
    ]
    assert (stackup.layers[1].permittivity, stackup.layers[1].loss_tangent) == (4.2, 0.02)
    assert stackup.barrel_mm(0, 1) == pytest.approx(0.235, rel=1e-12)


def test_parts_and_pads() -> None:
    read = board(whole())
    pads = read.pads
    assert [(part.ref, part.value, part.package, part.side) for part in read.parts] == [
        ("U1", "100k", "R0603", "top"),
        ("MP1", "", "", ""),
    ]
    assert pads.pin == ("1", "2", "3", "4", "5")
    assert pads.at.tolist() == [[10, 10], [12, 10], [14, 10], [16, 10], [18, 10]]
    assert pads.layer.tolist() == [0, -1, 0, 0, 0]
    assert pads.net.tolist() == [2, 1, -1, -1, 0]
    assert pads.part.tolist() == [0] * 5
    assert pads.drill[1] == 0.9
    assert np.isnan(pads.drill[[0, 2, 3, 4]]).all()
    assert pads.rotation.tolist() == [math.pi / 2, 0, 0, 0, 0]
    assert pads.mirror.tolist() == [True, False, False, False, False]
    shapes = [None if row < 0 else pads.shapes[row] for row in pads.shape]
    assert [None if s is None else (s.kind, s.size, s.radius) for s in shapes] == [
        ("rect", (0.8, 0.9), 0.0),
        ("circle", (1.6, 1.6), 0.0),
        ("round_rect", (0.8, 0.9), 0.2),
        ("polygon", (1.0, 1.0), 0.0),
        None,
    ]
    assert shapes[3] is not None
    assert shapes[3].points == ((-0.5, -0.5), (0.5, -0.5), (0.0, 0.5))


def test_like_pads_share_a_shape() -> None:
    tree = whole()
    tree["parts"][1]["pins"] = [tree["parts"][0]["pins"][0] | {"pin": "7"}]
    pads = board(tree).pads
    assert pads.shape[5] == pads.shape[0]
    assert len(pads.shapes) == 4


def test_tracks_are_one_row_a_piece() -> None:
    tracks = board(whole()).tracks
    assert tracks.start.tolist() == [[10, 10], [20, 10], [22, 12]]
    assert tracks.end.tolist() == [[20, 10], [22, 12], [22, 30]]
    assert np.isnan(tracks.centre[[0, 2]]).all()
    assert tracks.centre[1].tolist() == [20, 12]
    assert tracks.sweep.tolist() == pytest.approx([0, math.pi / 2, 0])
    assert tracks.width.tolist() == [0.2] * 3
    assert (tracks.layer.tolist(), tracks.net.tolist()) == ([0] * 3, [2] * 3)


def test_pieces_without_length_are_dropped() -> None:
    tree = whole()
    tree["tracks"][0]["points"] = [[1, 1], [1, 1], [2, 1], [2, 1]]
    tracks = board(tree).tracks
    assert (tracks.start.tolist(), tracks.end.tolist()) == ([[1, 1]], [[2, 1]])


def test_an_arc_back_to_its_start_is_a_full_turn() -> None:
    tree = whole()
    tree["tracks"][0]["points"] = [[1, 0], {"arc_to": [1, 0], "centre": [0, 0], "clockwise": True}]
    assert board(tree).tracks.sweep.tolist() == [-2 * math.pi]


def test_via_ends_stand_top_first() -> None:
    vias = board(whole()).vias
    assert (vias.first.tolist(), vias.last.tolist()) == ([0], [1])
    assert (vias.drill.tolist(), vias.pad.tolist(), vias.antipad.tolist()) == ([0.3], [0.6], [0.9])
    assert (vias.at.tolist(), vias.net.tolist()) == ([[22, 30]], [2])


def test_sizes_of_a_via_left_out_are_unknown() -> None:
    tree = whole()
    tree["vias"][0].pop("pad")
    tree["vias"][0]["antipad"] = None
    vias = board(tree).vias
    assert np.isnan(vias.pad).all()
    assert np.isnan(vias.antipad).all()


def test_area_with_a_round_hole() -> None:
    (area,) = board(whole()).areas
    assert (area.net, area.layer, len(area.outline)) == (0, 1, 4)
    (hole,) = area.holes
    radii = np.hypot(hole[:, 0] - 6, hole[:, 1] - 5)
    assert radii == pytest.approx(1.0)
    turned = np.roll(hole, -1, axis=0)
    enclosed = 0.5 * abs(np.sum(hole[:, 0] * turned[:, 1] - hole[:, 1] * turned[:, 0]))
    # Chords lie inside the circle, nowhere more than half a micrometre.
    assert math.pi * (1 - 0.0005) ** 2 < enclosed < math.pi


def test_declared_pair() -> None:
    (pair,) = board(whole()).pairs
    assert (pair.name, pair.plus, pair.minus, pair.klass) == ("IN", "IN_P", "IN_N", "sensor")
    assert (pair.source, pair.load) == ("U1", "MP1")


@pytest.mark.parametrize(("unit", "size"), [("mm", 1.0), ("um", 0.001), ("mil", 0.0254), ("in", 25.4)])
def test_unit_holds_for_every_length(unit: str, size: float) -> None:
    plain, scaled = board(whole()), board(whole() | {"units": unit})
    assert scaled.units == unit
    assert plain.outline is not None
    assert scaled.outline is not None
    pairs = [
        (plain.outline, scaled.outline),
        (plain.pads.at, scaled.pads.at),
        (plain.pads.drill, scaled.pads.drill),
        (plain.tracks.start, scaled.tracks.start),
        (plain.tracks.end, scaled.tracks.end),
        (plain.tracks.centre, scaled.tracks.centre),
        (plain.tracks.width, scaled.tracks.width),
        (plain.vias.at, scaled.vias.at),
        (plain.vias.drill, scaled.vias.drill),
        (plain.vias.pad, scaled.vias.pad),
        (plain.vias.antipad, scaled.vias.antipad),
        (plain.areas[0].outline, scaled.areas[0].outline),
        ([s.size for s in plain.pads.shapes], [s.size for s in scaled.pads.shapes]),
        ([s.radius for s in plain.pads.shapes], [s.radius for s in scaled.pads.shapes]),
        (plain.pads.shapes[3].points, scaled.pads.shapes[3].points),
    ]
    for in_mm, in_unit in pairs:
        np.testing.assert_allclose(np.array(in_unit), np.array(in_mm) * size, rtol=1e-12)
    np.testing.assert_allclose(scaled.tracks.sweep, plain.tracks.sweep, rtol=1e-12)
    assert scaled.stackup.layers[1].thickness_mm == pytest.approx(0.2 * size)
    assert scaled.stackup.layers[1].permittivity == 4.2
    assert scaled.pads.rotation[0] == plain.pads.rotation[0]


@pytest.mark.parametrize("case", BAD, ids=[case.name for case in BAD])
def test_fault(case: Bad) -> None:
    assert message(text(case.tree())) == f"board.json: {case.message}"


@pytest.mark.parametrize("name", GOOD)
def test_good_board(name: str) -> None:
    assert board(GOOD[name]()).copper == ("TOP", "GND")


@pytest.mark.parametrize(
    ("data", "said"),
    [
        (b"{", "line 1, column 2: the file ends in the middle of the JSON; mend the file or export it again"),
        (b'{\n "a" 1}', 'line 2, column 6: no valid JSON at "1"; mend the file or export it again'),
        (b'{} {"a": 1}', 'line 1, column 4: no valid JSON at "{"; mend the file or export it again'),
        (b'{\n"a": "\xff"}', "line 2: holds bytes that are no UTF-8; save it as UTF-8"),
        (b'{"a": ' + b"[" * 100_000, "is nested too deep; a board needs no more than ten levels"),
        (b'{"units": "mm", "units": "in"}', "units stands twice; keep one of them"),
        (b'{"x": [0, {"y": {"a": 1, "b": 2, "a": 1}}]}', "x[1].y.a stands twice; keep one of them"),
        (b"{}", "pairrules_board is missing; give 1, the version of the plain JSON board"),
        (b'{"pairrules_board": 1e999}', "pairrules_board is inf; give 1, the only version there is"),
        (b'{"pairrules_board": NaN}', "pairrules_board is nan; give 1, the only version there is"),
    ],
    ids=[
        "cut short",
        "no colon",
        "two values",
        "no UTF-8",
        "deep",
        "twice",
        "twice inside",
        "empty",
        "infinite",
        "NaN",
    ],
)
def test_text_that_is_no_board(data: bytes, said: str) -> None:
    # What begins with a place is set off by a colon, what begins with a path or a verb goes on from the file's name.
    assert message(data) == f"board.json: {said}"


def test_board_of_another_name() -> None:
    assert message(text(whole()), "buoy") == (
        'board.json: holds one board, "tide gauge logger", not "buoy"; leave the board\'s name out'
    )
    assert READER.read(text(whole()), "board.json", "tide gauge logger").name == "tide gauge logger"


def test_unknown_members_are_counted_by_kind() -> None:
    tree = whole() | {"colour": "red"}
    tree["parts"][0]["pins"][0]["swap"] = 1
    tree["parts"][0]["pins"][1]["swap"] = 2
    assert board(tree).missing == (
        "colour is not understood and was left out",
        "parts[].pins[].swap (2 times) is not understood and was left out",
    )


def test_a_flood_of_unknown_members_is_told_in_short() -> None:
    told = board(whole() | {f"x{number:02d}": 0 for number in range(25)}).missing
    assert told[19] == "x19 is not understood and was left out"
    assert told[20:] == ("members of 5 more names are not understood and were left out",)


def test_stackup_without_figures() -> None:
    tree = whole()
    for layer in tree["stackup"]:
        for key in ("thickness", "permittivity", "loss_tangent"):
            layer.pop(key, None)
    assert board(tree).missing == (
        "the stackup has no thickness for TOP, D1, GND: the barrels through it and impedance are unknown",
        "the stackup has no permittivity for D1: delay and impedance are unknown there",
        "the stackup has no loss tangent for D1: loss in the dielectric is unknown",
    )


def test_stackup_without_dielectric() -> None:
    tree = whole()
    del tree["stackup"][1]
    read = board(tree)
    assert read.missing == ("the stackup has no dielectric, so that barrels, delay and impedance are unknown",)
    assert math.isnan(read.stackup.barrel_mm(0, 1))


def test_declared_pair_without_copper() -> None:
    tree = whole()
    tree["pairs"].append({"plus": "CK_P", "minus": "CK_N"})
    read = board(tree)
    assert read.missing == (
        'pairs[1].plus is "CK_P", a net without a pin or copper in the file',
        'pairs[1].minus is "CK_N", a net without a pin or copper in the file',
    )
    assert read.nets == ("CK_N", "CK_P", "GND", "IN_N", "IN_P")
    assert read.nets[read.tracks.net[0]] == "IN_P"


def test_text_is_made_safe_to_print() -> None:
    tree = whole()
    tree["name"] = "tide\x1b[31m \u202egauge\ud800"
    read = board(tree)
    assert read.name == "tide[31m gauge"
    assert read.missing == ("unprintable characters were taken out of 1 text",)
    tree["units"] = "\x1b[2Jmm\n" + "x" * 500
    assert message(text(tree)) == f'board.json: units is "[2Jmm{"x" * 55}…"; give "mm", "um", "mil" or "in"'


@pytest.mark.parametrize(
    ("data", "is_board"),
    [(b"{", True), (b"\xef\xbb\xbf \r\n\t{}", True), (b"<a/>", False), (b"", False), (b"[]", False), (b"\x00{", False)],
)
def test_recognises(data: bytes, is_board: bool) -> None:
    assert READER.recognises(data) is is_board


def test_byte_order_mark_is_no_part_of_the_text() -> None:
    assert READER.read(b"\xef\xbb\xbf" + text(whole()), "board.json", "").name == "tide gauge logger"


def test_cut_anywhere_it_is_a_fault_and_no_more() -> None:
    data = text(whole())
    for length in range(1, len(data)):
        with pytest.raises(BoardError):
            READER.read(data[:length], "board.json", "")


Json = st.recursive(
    st.none() | st.booleans() | st.floats() | st.integers() | st.text(max_size=5),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=5), inner, max_size=3),
    max_leaves=6,
)
PLACES = [
    ("stackup",), ("stackup", 0), ("parts",), ("parts", 0), ("parts", 0, "pins", 0), ("parts", 0, "pins", 0, "pad"),
    ("tracks",), ("tracks", 0), ("tracks", 0, "points"), ("tracks", 0, "points", 2), ("vias", 0), ("areas", 0),
    ("areas", 0, "holes"), ("pairs", 0), ("nets", 0), ("outline",), ("tracks", 0, "width"), ("vias", 0, "at"),
]  # fmt: skip


@given(place=st.sampled_from(PLACES), value=Json)
def test_anything_anywhere_is_read_or_a_fault(place: tuple[str | int, ...], value: object) -> None:
    said = ""
    try:
        READER.read(json.dumps(Bad("", place, value, "").tree()).encode(), "board.json", "")
    except BoardError as fault:
        said = str(fault)
    assert said.isprintable()
