"""Outlines of all parts for the picture of a board."""

from __future__ import annotations

import json

from pairrules.drawn.part_outlines import part_outlines
from pairrules.readers.plain_json import READER
from tests.cli.boards import board as plain_board


def test_a_part_is_the_hull_of_its_pads() -> None:
    parts = part_outlines(READER.read(json.dumps(plain_board()).encode(), "buoy.json"))
    assert [part.ref for part in parts] == ["J1", "U1"]
    xs, ys = zip(*parts[0].outline, strict=True)
    # Pads of 0.8 by 0.4 mm at (0, 0) to (0, 5.5).
    assert (min(xs), max(xs), min(ys), max(ys)) == (-0.4, 0.4, -0.2, 5.7)


def test_parts_without_pads_are_left_out() -> None:
    plain = plain_board()
    plain["parts"].append({"ref": "FID1", "pins": []})
    parts = part_outlines(READER.read(json.dumps(plain).encode(), "buoy.json"))
    assert [part.ref for part in parts] == ["J1", "U1"]


def test_a_board_without_parts() -> None:
    assert part_outlines(READER.read(json.dumps(plain_board() | {"parts": []}).encode(), "buoy.json")) == ()
