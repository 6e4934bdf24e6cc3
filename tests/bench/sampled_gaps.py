"""The yardstick for gaps: a plain script of lxml and shapely that walks along plus in steps and asks for minus.

It knows nothing of routes, vias or parts: it takes the polylines of two nets by their names, lays points a step apart
along one, and asks a search tree for the nearest piece of the other on the same layer.
"""

from __future__ import annotations

import math
from collections import defaultdict
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import shapely
from lxml import etree

STEP_MM = 0.001
REACH_GAPS = 4.0
LEAST_REACH_MM = 0.3
TURN = math.radians(30)
ARC_MM = 0.00005
"""Greatest distance of a chord from its arc: far below the micrometre that is to be met."""

Segments = dict[str, list[tuple[float, float, float, float, float]]]
"""By layer: x0, y0, x1, y1 and width of every straight piece [mm]."""


@dataclass(frozen=True)
class Gaps:
    """Least, median and greatest gap over the coupled points, and their length [mm]."""

    least: float
    median: float
    greatest: float
    coupled: float


def read_segments(path: Path) -> dict[str, Segments]:
    """Every net's polylines by layer, arcs as chords."""
    widths: dict[str, float] = {}
    nets: dict[str, Segments] = defaultdict(lambda: defaultdict(list))
    layer = ""
    for event, element in etree.iterparse(str(path), events=("start", "end")):
        tag = etree.QName(element).localname
        if event == "start":
            if tag == "LayerFeature":
                layer = element.get("layerRef", "")
            continue
        if tag == "EntryLineDesc":
            widths[element.get("id", "")] = float(element[0].get("lineWidth"))
        elif tag == "Set":
            for line in element.iter("{*}Polyline"):
                width = widths[line[-1].get("id", "")]
                nets[element.get("net", "")][layer] += _segments(line, width)
            element.clear()
            while element.getprevious() is not None:
                del element.getparent()[0]
    return nets


def _segments(line: etree._Element, width: float) -> list[tuple[float, float, float, float, float]]:
    found, at = [], (0.0, 0.0)
    for step in line:
        tag = etree.QName(step).localname
        if tag == "LineDescRef":
            continue
        to = float(step.get("x")), float(step.get("y"))
        if tag == "PolyStepCurve":
            centre = float(step.get("centerX")), float(step.get("centerY"))
            chords = _chords(at, to, centre, clockwise=step.get("clockwise") == "true")
        else:
            chords = [to]
        for point in chords if tag != "PolyBegin" else ():
            found.append((*at, *point, width))
            at = point
        at = to
    return found


def _chords(
    start: tuple[float, float], end: tuple[float, float], centre: tuple[float, float], *, clockwise: bool
) -> list[tuple[float, float]]:
    first = math.atan2(start[1] - centre[1], start[0] - centre[0])
    turn = (math.atan2(end[1] - centre[1], end[0] - centre[0]) - first) % (2 * math.pi)
    turn = turn - 2 * math.pi if clockwise else turn
    radius = math.dist(start, centre)
    steps = max(1, math.ceil(abs(turn) / (2 * math.acos(1 - ARC_MM / radius))))
    turns = [first + turn * i / steps for i in range(1, steps)]
    return [(centre[0] + radius * math.cos(t), centre[1] + radius * math.sin(t)) for t in turns] + [end]


def sampled_gaps(plus: Segments, minus: Segments) -> Gaps:
    """The gaps of a pair, edge to edge, where minus runs beside plus."""
    gaps, turns = [], []
    for layer in sorted(plus.keys() & minus.keys()):
        own, other = np.array(plus[layer]), np.array(minus[layer])
        size = np.hypot(own[:, 2] - own[:, 0], own[:, 3] - own[:, 1])
        count = np.maximum(np.round(size / STEP_MM), 1).astype(int)
        row = np.repeat(np.arange(len(own)), count)
        share = (np.arange(len(row)) - np.repeat(np.cumsum(count) - count, count) + 0.5) / count[row]
        at = own[row, :2] + (own[row, 2:4] - own[row, :2]) * share[:, None]
        tree = shapely.STRtree(shapely.linestrings(other[:, :4].reshape(-1, 2, 2)))
        # All that are equally near, as both pieces at a bend are: the one that is turned least counts.
        (point, near), away = tree.query_nearest(shapely.points(at), return_distance=True, all_matches=True)
        heading = [np.arctan2(s[:, 3] - s[:, 1], s[:, 2] - s[:, 0]) for s in (own, other)]
        turn = np.abs((heading[0][row][point] - heading[1][near] + np.pi / 2) % np.pi - np.pi / 2)
        order = np.lexsort((turn, point))
        first = order[np.r_[True, np.diff(point[order]) > 0]]
        gaps.append(away[first] - own[row[point[first]], 4] / 2 - other[near[first], 4] / 2)
        turns.append(turn[first])
    gap, turn = np.concatenate(gaps), np.concatenate(turns)
    beside = turn < TURN
    steps, counts = np.unique(np.round(gap[beside], 3), return_counts=True)
    reach = max(LEAST_REACH_MM, REACH_GAPS * float(steps[np.argmax(counts)]))
    held = gap[beside & (gap <= reach)]
    return Gaps(float(held.min()), float(np.median(held)), float(held.max()), len(held) * STEP_MM)
