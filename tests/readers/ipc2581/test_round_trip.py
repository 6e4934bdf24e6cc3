"""A board written as IPC-2581 reads as the same board that its plain JSON reads as, in every revision and dress."""

from __future__ import annotations

import json
from typing import Any

import numpy as np
import pytest

from fixtures.ipc2581_writer import to_ipc2581
from pairrules.board import Board
from pairrules.readers import plain_json
from pairrules.readers.ipc2581 import READER
from pairrules.readers.reader import read_board
from tests.readers.ipc2581.documents import CONSORTIUM

BOARD: dict[str, Any] = {
    "pairrules_board": 1,
    "name": "buoy",
    "units": "mm",
    "outline": [[0, 0], [80, 0], {"arc_to": [80, 50], "centre": [80, 25], "clockwise": False}, [0, 50]],
    "stackup": [
        {"name": "MASK", "kind": "dielectric", "thickness": 0.02, "permittivity": 3.5, "loss_tangent": 0.025},
        {"name": "TOP", "kind": "copper", "thickness": 0.035},
        {"name": "D1", "kind": "dielectric", "thickness": 0.2, "permittivity": 4.2, "loss_tangent": 0.02},
        {"name": "GND", "kind": "copper", "thickness": 0.018},
        {"name": "D2", "kind": "dielectric", "thickness": 1.2, "permittivity": 4.4, "loss_tangent": 0.016},
        {"name": "BOT", "kind": "copper", "thickness": 0.035},
    ],
    "nets": [{"name": "GROUND", "kind": "ground"}, {"name": "IN_P", "kind": "signal"}],
    "parts": [
        {
            "ref": "R1",
            "value": "100k",
            "package": "R0603",
            "side": "top",
            "pins": [
                {
                    "pin": "1",
                    "net": "IN_P",
                    "at": [10, 10],
                    "layer": "TOP",
                    "pad": {"shape": "rect", "size": [0.8, 0.9]},
                },
                {
                    "pin": "2",
                    "net": "IN_N",
                    "at": [11.5, 10],
                    "layer": "TOP",
                    "pad": {"shape": "round_rect", "size": [0.8, 0.9], "radius": 0.2, "rotation": 30},
                },
            ],
        },
        {
            "ref": "J1",
            "package": "JACK",
            "side": "top",
            "pins": [
                {
                    "pin": "1",
                    "net": "IN_P",
                    "at": [40, 9],
                    "layer": "all",
                    "drill": 0.8,
                    "pad": {"shape": "circle", "size": 1.4},
                },
                {
                    "pin": "2",
                    "net": "GROUND",
                    "at": [44, 9],
                    "layer": "all",
                    "drill": 0.8,
                    "pad": {"shape": "oval", "size": [1.2, 2]},
                },
            ],
        },
        {
            "ref": "U1",
            "value": "amplifier",
            "package": "SO8",
            "side": "bottom",
            "pins": [
                {
                    "pin": "3",
                    "net": "IN_N",
                    "at": [60, 20],
                    "layer": "BOT",
                    "pad": {"shape": "polygon", "points": [[-1, -1], [1, -1], [0, 2]], "rotation": 90, "mirror": True},
                },
                {"pin": "4", "net": None, "at": [62, 20], "layer": "BOT"},
            ],
        },
    ],
    "tracks": [
        {
            "net": "IN_P",
            "layer": "TOP",
            "width": 0.2,
            "points": [[10, 10], [20, 10], {"arc_to": [22, 12], "centre": [20, 12], "clockwise": False}, [22, 30]],
        },
        {"net": "IN_N", "layer": "TOP", "width": 0.25, "points": [[11.5, 10], [11.5, 30]]},
        {
            "net": "IN_N",
            "layer": "BOT",
            "width": 0.25,
            "points": [[11.5, 30], {"arc_to": [31.5, 30], "centre": [21.5, 30], "clockwise": True}],
        },
        {"net": None, "layer": "BOT", "width": 1.0, "points": [[1, 1], [2, 1]]},
    ],
    "vias": [
        {"net": "IN_P", "at": [22, 30], "from": "TOP", "to": "BOT", "drill": 0.3, "pad": 0.6, "antipad": 0.9},
        {"net": "IN_N", "at": [11.5, 30], "from": "TOP", "to": "GND", "drill": 0.15, "pad": 0.4},
    ],
    "areas": [
        {
            "net": "GROUND",
            "layer": "GND",
            "outline": [[0, 0], [80, 0], [80, 50], [0, 50]],
            "holes": [[[20, 28], {"arc_to": [24, 28], "centre": [22, 28], "clockwise": True}]],
        }
    ],
    "pairs": [{"plus": "IN_P", "minus": "IN_N"}],
}
"""Every kind of thing a plain JSON board holds, once."""

REVISIONS = ("A", "B", "B1", "C")


def plain(board: dict[str, Any]) -> Board:
    return plain_json.READER.read(json.dumps(board).encode(), "board.json", "")


def tracks(board: Board) -> list[tuple[Any, ...]]:
    t = board.tracks
    centre = np.nan_to_num(t.centre, nan=-1.0)
    numbers = np.round(np.column_stack([t.start, t.end, centre, t.sweep, t.width]), 6) + 0.0
    nets = [board.nets[i] if i >= 0 else "" for i in t.net]
    return sorted(zip(nets, t.layer.tolist(), map(tuple, numbers.tolist()), strict=True))


def pads(board: Board) -> list[tuple[Any, ...]]:
    rows = []
    for i in range(len(board.pads)):
        p = board.pads
        shape = None if p.shape[i] < 0 else p.shapes[p.shape[i]]
        drawn = ()
        if shape is not None:
            points = tuple((round(x, 6) + 0.0, round(y, 6) + 0.0) for x, y in shape.points)
            drawn = (shape.kind, *(round(v, 6) for v in (*shape.size, shape.radius)), points)
        numbers = np.round([*p.at[i], p.rotation[i], np.nan_to_num(p.drill[i], nan=-1.0)], 6).tolist()
        net = board.nets[p.net[i]] if p.net[i] >= 0 else ""
        rows.append((board.parts[p.part[i]].ref, p.pin[i], net, int(p.layer[i]), bool(p.mirror[i]), numbers, drawn))
    return sorted(rows)


def vias(board: Board, *, antipads: bool) -> list[tuple[Any, ...]]:
    v = board.vias
    sizes = np.column_stack([v.at, v.drill, v.pad, v.antipad if antipads else np.zeros(len(v))])
    numbers = np.round(np.nan_to_num(sizes, nan=-1.0), 6).tolist()
    return sorted(zip([board.nets[i] for i in v.net], v.first.tolist(), v.last.tolist(), numbers, strict=True))


def same(read: Board, told: Board, *, antipads: bool = True) -> None:
    assert read.nets == told.nets
    assert read.copper == told.copper
    assert read.parts == told.parts
    assert tracks(read) == tracks(told)
    assert pads(read) == pads(told)
    assert vias(read, antipads=antipads) == vias(told, antipads=antipads)
    assert len(read.areas) == len(told.areas)
    for mine, other in zip(read.areas, told.areas, strict=True):
        assert (read.nets[mine.net], mine.layer) == (told.nets[other.net], other.layer)
        assert mine.outline == pytest.approx(other.outline, abs=1e-6)
        for hole, expected in zip(mine.holes, other.holes, strict=True):
            assert hole == pytest.approx(expected, abs=1e-6)
    assert read.outline == pytest.approx(told.outline, abs=1e-6)
    for layer, meant in zip(read.stackup.layers, told.stackup.layers, strict=True):
        assert (layer.name, layer.kind) == (meant.name, meant.kind)
        for name in ("thickness_mm", "permittivity", "loss_tangent"):
            assert getattr(layer, name) == pytest.approx(getattr(meant, name), abs=1e-9)


@pytest.mark.parametrize("units", ["MILLIMETER", "INCH", "MICRON"])
@pytest.mark.parametrize("revision", REVISIONS)
def test_every_revision_and_unit_reads_as_the_plain_board(revision: str, units: str) -> None:
    read = READER.read(to_ipc2581(BOARD, revision=revision, units=units), "board.xml", "")
    same(read, plain(BOARD), antipads=revision != "A")  # revision A has no place for an antipad
    assert (read.revision, read.units, read.complete) == (revision, units, True)
    assert read.name == "buoy"


def test_kinds_of_nets_come_through() -> None:
    read = READER.read(to_ipc2581(BOARD), "board.xml", "")
    kinds = dict(zip(read.nets, read.net_kinds, strict=True))
    assert kinds == {"GROUND": "ground", "IN_N": "", "IN_P": "signal"}


def test_pairs_are_declared_in_revision_c_alone() -> None:
    for revision in REVISIONS:
        pairs = READER.read(to_ipc2581(BOARD, revision=revision), "board.xml", "").pairs
        expected = [("IN_P", "IN_N")] if revision == "C" else []
        assert [(pair.plus, pair.minus) for pair in pairs] == expected


def test_the_polarity_of_pins_says_which_leg_is_plus() -> None:
    turned = {**BOARD, "pairs": [{"plus": "IN_N", "minus": "IN_P"}]}
    (pair,) = READER.read(to_ipc2581(turned), "board.xml", "").pairs
    assert (pair.plus, pair.minus) == ("IN_N", "IN_P")


@pytest.mark.parametrize(
    "dress",
    [
        {"prefix": "ipc"},
        {"namespace": False},
        {"newline": "\r\n", "byte_order_mark": True},
        {"prefix": "x", "newline": "\r\n"},
    ],
)
def test_the_dress_of_the_text_does_not_matter(dress: dict[str, Any]) -> None:
    data = to_ipc2581(BOARD, **dress)
    assert READER.recognises(data)
    same(read_board(data, "board.bin"), plain(BOARD))


@pytest.mark.parametrize("encoding", ["utf-16", "utf-16-le", "utf-16-be"])
def test_utf_16_is_read(encoding: str) -> None:
    text = to_ipc2581(BOARD).decode().replace('encoding="UTF-8"', 'encoding="UTF-16"')
    data = text.encode(encoding)
    assert READER.recognises(data)
    if encoding == "utf-16":  # without a mark the standard leaves the order of bytes open; only recognising is asked
        same(read_board(data, "board.xml"), plain(BOARD))


def test_a_board_in_mil_reads_as_the_same_board() -> None:
    board = {**BOARD, "units": "mil"}
    same(READER.read(to_ipc2581(board, units="INCH"), "board.xml", ""), plain(board))


def test_the_same_board_gives_the_same_bytes() -> None:
    assert to_ipc2581(BOARD) == to_ipc2581(json.loads(json.dumps(BOARD)))


def test_revision_a_is_valid_by_its_schema() -> None:
    schema = CONSORTIUM / "IPC-2581A.xsd"
    if not schema.exists():
        pytest.skip("the published schema is not beside the checkout")
    from lxml import etree

    whole = {**BOARD, "parts": [{**part, "pins": [p for p in part["pins"] if "pad" in p]} for part in BOARD["parts"]]}
    checked = etree.XMLSchema(etree.parse(str(schema)))
    tree = etree.fromstring(to_ipc2581(whole, revision="A"))
    assert checked.validate(tree), checked.error_log


def test_nothing_is_left_unsaid_and_nothing_said_in_vain() -> None:
    assert READER.read(to_ipc2581(BOARD), "board.xml", "").missing == ()
