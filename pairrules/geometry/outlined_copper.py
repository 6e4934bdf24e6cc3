"""Legs whose copper is drawn as outlines instead of lines: what of their course can be known, and what cannot.

Through an area a leg takes the straight way between the points where it comes in and goes out, which is its shortest
where the area covers it, and what a centre line would be of copper drawn as a straight strip. Where the area does not
cover that line (a strip with a bend, drawn as one outline) the course is not known. Width and spacing within areas are
never known. Common practice, no source.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Ints
from pairrules.geometry.area_polygons import AreaPolygons
from pairrules.geometry.pad_outlines import pad_outline
from pairrules.geometry.pair_geometry import JOIN, LegRoute
from pairrules.pairing.link import Hop

_LEAST_MM = 0.2
"""Joins shorter than this lie where a track ends in a pad or area, whatever their shape."""

_SLACK_MM = 0.001
_MOST_UNSEEN_MM = 1.0
_MOST_SHARE = 0.5


@dataclass(frozen=True, slots=True, kw_only=True)
class Through:
    """How much of a leg runs through areas [mm], and where its course through one is not known ("" where it is)."""

    length_mm: float
    unknown: str


def area_joins(board: Board, areas: AreaPolygons, leg: LegRoute, hops: tuple[Hop, ...]) -> Through:
    """What of a leg runs through areas.

    Joins within a pad are left out: there current spreads, and the straight way to the pad's centre is what is meant.
    """
    pieces, nets = leg.pieces, np.array(sorted({hop.net for hop in hops}), dtype=np.int64)
    rows = np.flatnonzero((pieces.kind == JOIN) & (pieces.length > _LEAST_MM))
    total, unknown = 0.0, ""
    for row in rows.tolist():
        layer = int(pieces.layer[row])
        line = shapely.linestrings([pieces.start[row], pieces.end[row]])
        pads = np.flatnonzero(np.isin(board.pads.net, nets) & np.isin(board.pads.layer, (layer, -1)))
        near = pads[np.hypot(*(board.pads.at[pads] - pieces.start[row]).T) < pieces.length[row] + _reach(board, pads)]
        rest = line
        for pad in near.tolist():
            rest = shapely.difference(rest, pad_outline(board.pads, pad))
        if shapely.length(rest) <= _LEAST_MM:
            continue
        total += float(shapely.length(rest))
        held: Ints = np.flatnonzero(np.isin(areas.net, nets) & (areas.layer == layer))
        copper = shapely.buffer(shapely.union_all(areas.take(held)), _SLACK_MM)
        if not unknown and not shapely.covers(copper, rest):
            x, y = (pieces.start[row] + pieces.end[row]) / 2
            unknown = f"on {board.copper[layer]} at ({x:.3f}, {y:.3f}) mm"
    return Through(length_mm=total, unknown=unknown)


def course(name: str, leg: LegRoute, through: Through) -> str:
    """Why a leg's course is not known; "" where it is."""
    if through.unknown:
        return f"{name} bends {through.unknown} within an outline of copper, where its centre line is not known"
    if through.length_mm > _MOST_SHARE * math.fsum(leg.pieces.length[~np.isnan(leg.pieces.length)]):
        return f"most of {name} is drawn as outlines of copper, of which neither width nor spacing is known"
    return ""


def unseen(plus_mm: float, minus_mm: float) -> str:
    """What cannot be known of a pair of which so much runs through areas; "" where the tracks show enough.

    One leg's areas are seen from the other leg's tracks, which are then apart; where both have areas nobody sees.
    """
    if min(plus_mm, minus_mm) <= _MOST_UNSEEN_MM:
        return ""
    return (
        f"both legs run through copper drawn as outlines, plus over {plus_mm:.2f} mm and minus over {minus_mm:.2f} mm, "
        "where neither width nor spacing is known"
    )


def _reach(board: Board, pads: Ints) -> float:
    shapes = {int(shape) for shape in board.pads.shape[pads] if shape >= 0}
    return max((math.hypot(*board.pads.shapes[shape].size) for shape in shapes), default=0.0)
