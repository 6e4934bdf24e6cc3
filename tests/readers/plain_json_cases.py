"""Plain JSON boards good and bad, for the reader and for the schema alike."""

from __future__ import annotations

import copy
import json
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

Tree = dict[str, Any]


def whole() -> Tree:
    """A board in which every member of the format stands once."""
    return copy.deepcopy({
        "pairrules_board": 1,
        "name": "tide gauge logger",
        "units": "mm",
        "outline": [[0, 0], [80, 0], [80, 50], [0, 50]],
        "stackup": [
            {"name": "TOP", "kind": "copper", "thickness": 0.035},
            {"name": "D1", "kind": "dielectric", "thickness": 0.2, "permittivity": 4.2, "loss_tangent": 0.02},
            {"name": "GND", "kind": "copper", "thickness": 0.035},
        ],
        "parts": [
            {
                "ref": "U1",
                "value": "100k",
                "package": "R0603",
                "side": "top",
                "pins": [
                    {"pin": "1", "net": "IN_P", "at": [10, 10], "layer": "TOP",
                     "pad": {"shape": "rect", "size": [0.8, 0.9], "rotation": 90, "mirror": True}},
                    {"pin": "2", "net": "IN_N", "at": [12, 10], "layer": "all", "drill": 0.9,
                     "pad": {"shape": "circle", "size": [1.6, 1.6]}},
                    {"pin": "3", "net": None, "at": [14, 10], "layer": "TOP",
                     "pad": {"shape": "round_rect", "size": [0.8, 0.9], "radius": 0.2}},
                    {"pin": "4", "at": [16, 10], "layer": "TOP",
                     "pad": {"shape": "polygon", "points": [[-0.5, -0.5], [0.5, -0.5], [0, 0.5]]}},
                    {"pin": "5", "net": "GND", "at": [18, 10], "layer": "TOP"},
                ],
            },
            {"ref": "MP1"},
        ],
        "tracks": [
            {"net": "IN_P", "layer": "TOP", "width": 0.2,
             "points": [[10, 10], [20, 10], {"arc_to": [22, 12], "centre": [20, 12], "clockwise": False}, [22, 30]]},
        ],
        "vias": [{"net": "IN_P", "at": [22, 30], "from": "GND", "to": "TOP", "drill": 0.3, "pad": 0.6, "antipad": 0.9}],
        "areas": [{"net": "GND", "layer": "GND", "outline": [[0, 0], [80, 0], [80, 50], [0, 50]],
                   "holes": [[[5, 5], {"arc_to": [5, 5], "centre": [6, 5], "clockwise": True}]]}],
        "pairs": [{"name": "IN", "plus": "IN_P", "minus": "IN_N", "class": "sensor", "source": "U1", "load": "MP1"}],
        "nets": [{"name": "GND", "kind": "ground"}],
    })  # fmt: skip


@dataclass(frozen=True)
class Bad:
    """A board with one fault: the steps to the value, what stands there instead, and the whole message."""

    name: str
    path: tuple[str | int, ...]
    value: object
    message: str
    schema: bool = True
    """Whether the schema can say it too; sums, sameness of names and units are beyond it."""

    def tree(self) -> Tree:
        tree = whole()
        holder: Any = tree
        for step in self.path[:-1]:
            holder = holder[step]
        if self.value is DROP:
            del holder[self.path[-1]]
        else:
            holder[self.path[-1]] = self.value
        return tree


DROP = object()
PAD = ("parts", 0, "pins", 0, "pad")
ARC = ("tracks", 0, "points", 2)

BAD = [
    Bad("no version", ("pairrules_board",), DROP,
        "pairrules_board is missing; give 1, the version of the plain JSON board"),
    Bad("later version", ("pairrules_board",), 2, "pairrules_board is 2; give 1, the only version there is"),
    Bad("version in quotes", ("pairrules_board",), "1", 'pairrules_board is "1"; give 1, the only version there is'),
    Bad("version true", ("pairrules_board",), True, "pairrules_board is true; give 1, the only version there is"),
    Bad("no units", ("units",), DROP, 'units is missing; give "mm", "um", "mil" or "in"'),
    Bad("unknown unit", ("units",), "cm", 'units is "cm"; give "mm", "um", "mil" or "in"'),
    Bad("units of a list", ("units",), ["mm"], 'units is a list of 1; give "mm", "um", "mil" or "in"'),
    Bad("name of a number", ("name",), 7, "name is 7; give a text in quotes, or leave it out"),
    Bad("no stackup", ("stackup",), DROP, "stackup is missing; give the layers from top to bottom"),
    Bad("stackup empty", ("stackup",), [], 'stackup is an empty list; give at least one layer of kind "copper"'),
    Bad("stackup null", ("stackup",), None, 'stackup is null; give at least one layer of kind "copper"'),
    Bad("layer without name", ("stackup", 1, "name"), DROP, "stackup[1].name is missing; give a text in quotes"),
    Bad("layer without text", ("stackup", 1, "name"), "", 'stackup[1].name is ""; give a text in quotes'),
    Bad("layer all", ("stackup", 1, "name"), "all",
        'stackup[1].name is "all"; choose another; no layer may be called so'),
    Bad("layer twice", ("stackup", 2, "name"), "TOP",
        'stackup[2].name is "TOP"; choose another; another layer has this name', schema=False),
    Bad("layer kind", ("stackup", 1, "kind"), "glue", 'stackup[1].kind is "glue"; give "copper" or "dielectric"'),
    Bad("thickness zero", ("stackup", 1, "thickness"), 0, "stackup[1].thickness is 0; give a number above zero"),
    Bad("permittivity", ("stackup", 1, "permittivity"), 0.5,
        "stackup[1].permittivity is 0.5; give a number of 1 or more"),
    Bad("loss tangent", ("stackup", 1, "loss_tangent"), -0.1,
        "stackup[1].loss_tangent is -0.1; give a number from 0 to 0.9"),
    Bad("part no object", ("parts", 1), "MP1", 'parts[1] is "MP1"; give {...} with ref and pins'),
    Bad("part twice", ("parts", 1, "ref"), "U1", 'parts[1].ref is "U1"; choose another; another part has this ref',
        schema=False),
    Bad("part side", ("parts", 0, "side"), "left", 'parts[0].side is "left"; give "top" or "bottom"'),
    Bad("pin without place", ("parts", 0, "pins", 0, "at"), DROP,
        "parts[0].pins[0].at is missing; give the pin's place as [x, y]"),
    Bad("pin number bare", ("parts", 0, "pins", 0, "pin"), 1,
        "parts[0].pins[0].pin is 1; give the pin's name in quotes"),
    Bad("pin net empty", ("parts", 0, "pins", 0, "net"), "",
        "parts[0].pins[0].net is \"\"; give the net's name in quotes, or null where it has none"),
    Bad("pin layer unknown", ("parts", 0, "pins", 0, "layer"), "MID",
        'parts[0].pins[0].layer is "MID"; give a copper layer of the stackup: "TOP", "GND" or "all"', schema=False),
    Bad("pin through without drill", ("parts", 0, "pins", 1, "drill"), DROP,
        'parts[0].pins[1].drill is missing; a pin on layer "all" is a plated hole; give its diameter'),
    Bad("pad shape", (*PAD, "shape"), "star",
        'parts[0].pins[0].pad.shape is "star"; give "rect", "circle", "oval", "round_rect" or "polygon"'),
    Bad("pad without size", (*PAD, "size"), DROP,
        "parts[0].pins[0].pad.size is missing; give width and height as [w, h]"),
    Bad("pad of one number", (*PAD, "size"), 0.8, "parts[0].pins[0].pad.size is 0.8; give width and height as [w, h]"),
    Bad("pad size negative", (*PAD, "size"), [0.8, -1],
        "parts[0].pins[0].pad.size[1] is -1; give a number above zero"),
    Bad("pad turned far", (*PAD, "rotation"), 400,
        "parts[0].pins[0].pad.rotation is 400; give degrees from -360 to 360"),
    Bad("pad mirror", (*PAD, "mirror"), "yes", 'parts[0].pins[0].pad.mirror is "yes"; give true or false'),
    Bad("pad oval circle", ("parts", 0, "pins", 1, "pad", "size"), [1.6, 1.8],
        'parts[0].pins[1].pad.size[1] is 1.8; give 1.6 as well, or the shape "oval"', schema=False),
    Bad("pad without radius", ("parts", 0, "pins", 2, "pad", "radius"), DROP,
        "parts[0].pins[2].pad.radius is missing; give the corners' radius"),
    Bad("pad radius negative", ("parts", 0, "pins", 2, "pad", "radius"), -0.1,
        "parts[0].pins[2].pad.radius is -0.1; give a number not below zero"),
    Bad("pad radius great", ("parts", 0, "pins", 2, "pad", "radius"), 0.5,
        "parts[0].pins[2].pad.radius is 0.5; give at most half the smaller side", schema=False),
    Bad("pad polygon of two", ("parts", 0, "pins", 3, "pad", "points"), [[0, 0], [1, 0]],
        "parts[0].pins[3].pad.points is a list of 2; give an outline of three different points or more"),
    Bad("track width wide", ("tracks", 0, "width"), "wide",
        'tracks[0].width is "wide"; give a number in the file\'s units'),
    Bad("track width negative", ("tracks", 0, "width"), -0.2, "tracks[0].width is -0.2; give a number above zero"),
    Bad("track width zero", ("tracks", 0, "width"), 0, "tracks[0].width is 0; give a number above zero"),
    Bad("track without width", ("tracks", 0, "width"), DROP, "tracks[0].width is missing; give the track's width"),
    Bad("track on dielectric", ("tracks", 0, "layer"), "D1",
        'tracks[0].layer is "D1"; give a copper layer of the stackup: "TOP" or "GND"', schema=False),
    Bad("track without layer", ("tracks", 0, "layer"), DROP,
        'tracks[0].layer is missing; give a copper layer of the stackup: "TOP" or "GND"'),
    Bad("track of one point", ("tracks", 0, "points"), [[1, 1]],
        "tracks[0].points is a list of 1; give a list of two points or more"),
    Bad("track of text", ("tracks", 0, "points", 1), "20,10", 'tracks[0].points[1] is "20,10"; give a point as [x, y]'),
    Bad("track point true", ("tracks", 0, "points", 1), [True, 1],
        "tracks[0].points[1][0] is true; give a number in the file's units"),
    Bad("track point of three", ("tracks", 0, "points", 1), [1, 2, 3],
        "tracks[0].points[1] is a list of 3; give a point as [x, y]"),
    Bad("track starts with arc", ("tracks", 0, "points", 0), {"arc_to": [1, 1], "centre": [0, 0], "clockwise": True},
        "tracks[0].points[0] is an object; give a point as [x, y]"),
    Bad("far away", ("tracks", 0, "points", 1), [20, 10001],
        "tracks[0].points[1][1] is 10001; give a coordinate within 10 m; the file's unit is mm", schema=False),
    Bad("huge integer", ("tracks", 0, "points", 1), [10**400, 10],
        "tracks[0].points[1][0] is inf; give a coordinate within 10 m; the file's unit is mm", schema=False),
    Bad("not a number", ("tracks", 0, "points", 1), [20, float("nan")],
        "tracks[0].points[1][1] is nan; give a coordinate within 10 m; the file's unit is mm", schema=False),
    Bad("arc askew", (*ARC, "centre"), [20, 12.01],
        "tracks[0].points[2] has a radius of 2.01 mm at its start and 2.00002 mm at its end;"
        " give a centre as far from both",
        schema=False),
    Bad("arc without turn", (*ARC, "clockwise"), DROP, "tracks[0].points[2].clockwise is missing; give true or false"),
    Bad("arc turn of text", (*ARC, "clockwise"), "yes", 'tracks[0].points[2].clockwise is "yes"; give true or false'),
    Bad("via without drill", ("vias", 0, "drill"), DROP, "vias[0].drill is missing; give the hole's diameter"),
    Bad("via end unknown", ("vias", 0, "to"), "BOTTOM",
        'vias[0].to is "BOTTOM"; give a copper layer of the stackup: "TOP" or "GND"', schema=False),
    Bad("via pad huge", ("vias", 0, "pad"), 2e4, "vias[0].pad is 20000; give at most 10 m; the file's unit is mm",
        schema=False),
    Bad("area of two points", ("areas", 0, "outline"), [[0, 0], [1, 1]],
        "areas[0].outline is a list of 2; give an outline of three different points or more"),
    Bad("area of one place", ("areas", 0, "outline"), [[1, 1], [1, 1], [1, 1]],
        "areas[0].outline is a list of 3; give an outline of three different points or more", schema=False),
    Bad("area of nothing", ("areas", 0, "outline"), None,
        "areas[0].outline is null; give a list of three points or more"),
    Bad("pair without minus", ("pairs", 0, "minus"), DROP, "pairs[0].minus is missing; give the net's name in quotes"),
    Bad("pair with itself", ("pairs", 0, "minus"), "IN_P", 'pairs[0].minus is "IN_P"; give another net than plus',
        schema=False),
    Bad("pair source unknown", ("pairs", 0, "source"), "U9",
        'pairs[0].source is "U9"; give the ref of a part in the file', schema=False),
    Bad("net kind", ("nets", 0, "kind"), "earth", 'nets[0].kind is "earth"; give "ground", "power" or "signal"'),
]  # fmt: skip


def _without(key: str) -> Callable[[], Tree]:
    def build() -> Tree:
        tree = whole()
        del tree[key]
        return tree

    return build


def _with(path: tuple[str | int, ...], value: object) -> Callable[[], Tree]:
    return Bad("", path, value, "").tree


GOOD: dict[str, Callable[[], Tree]] = {
    "whole": whole,
    "no tracks": _without("tracks"),
    "no outline": _without("outline"),
    "no pairs": _without("pairs"),
    "no name": _without("name"),
    "pad null": _with(PAD, None),
    "value null": _with(("parts", 0, "value"), None),
    "unknown member": _with(("tracks", 0, "colour"), "red"),
    "thickness null": _with(("stackup", 1, "thickness"), None),
    "permittivity absent": _with(("stackup", 1, "permittivity"), DROP),
    "circle of one number": _with(("parts", 0, "pins", 1, "pad", "size"), 1.6),
    "via pad absent": _with(("vias", 0, "pad"), DROP),
    "round outline": _with(("areas", 0, "outline"), [[0, 0], {"arc_to": [0, 0], "centre": [9, 0], "clockwise": False}]),
}


def text(tree: Tree) -> bytes:
    return json.dumps(tree).encode()
