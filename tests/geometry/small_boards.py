"""Boards of a few pieces of copper, for the tests of routes and spacing."""

from __future__ import annotations

import json
import math
from typing import Any

from pairrules.board import Board
from pairrules.geometry.copper_index import index_copper
from pairrules.geometry.leg_route import Break, leg_route
from pairrules.geometry.pair_geometry import LegRoute
from pairrules.pairing.link import Hop
from pairrules.readers.plain_json import READER

FOUR_LAYERS = [
    {"name": "TOP", "kind": "copper", "thickness": 0.035},
    {"name": "D1", "kind": "dielectric", "thickness": 0.2, "permittivity": 4.2},
    {"name": "IN1", "kind": "copper", "thickness": 0.018},
    {"name": "D2", "kind": "dielectric", "thickness": 1.0, "permittivity": 4.2},
    {"name": "IN2", "kind": "copper", "thickness": 0.018},
    {"name": "D3", "kind": "dielectric", "thickness": 0.2, "permittivity": 4.2},
    {"name": "BOT", "kind": "copper", "thickness": 0.035},
]


def track(net: str, *points: Any, width: float = 0.2, layer: str = "TOP") -> dict[str, Any]:
    return {"net": net, "layer": layer, "width": width, "points": list(points)}


def pin(ref: str, number: str, net: str, x: float, y: float, **more: Any) -> dict[str, Any]:
    own = {"pin": number, "net": net, "at": [x, y], "layer": "TOP", "pad": {"shape": "rect", "size": [0.8, 0.6]}} | more
    return {"ref": ref, "pins": [own]}


def board(
    *,
    tracks: list[dict[str, Any]] = [],  # noqa: B006 read only
    parts: list[dict[str, Any]] = [],  # noqa: B006 read only
    vias: list[dict[str, Any]] = [],  # noqa: B006 read only
    areas: list[dict[str, Any]] = [],  # noqa: B006 read only
    **more: Any,
) -> Board:
    merged: dict[str, dict[str, Any]] = {}
    for part in parts:
        merged.setdefault(part["ref"], {"ref": part["ref"], "pins": []})["pins"] += part["pins"]
    text = {
        "pairrules_board": 1,
        "name": "tide gauge",
        "units": "mm",
        "stackup": FOUR_LAYERS,
        "parts": list(merged.values()),
        "tracks": tracks,
        "vias": vias,
        "areas": areas,
    }
    return READER.read(json.dumps(text | more).encode(), "small.json", "")


def pads_of(on: Board, net: str) -> list[int]:
    index = on.nets.index(net)
    return [row for row in range(len(on.pads)) if on.pads.net[row] == index]


def route(on: Board, net: str = "A_P") -> LegRoute:
    """From the net's first pad to its last."""
    found = routed(on, net)
    assert isinstance(found, LegRoute), found
    return found


def routed(on: Board, net: str = "A_P") -> LegRoute | tuple[Break, ...]:
    pads = pads_of(on, net)
    hop = Hop(net=on.nets.index(net), start=(pads[0],), end=(pads[-1],))
    return leg_route(on, index_copper(on), (hop,))


QUARTER_TURN = math.pi / 2
