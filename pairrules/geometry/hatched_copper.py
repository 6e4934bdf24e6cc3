"""Whether copper next to a pair is drawn as a mesh."""

from __future__ import annotations

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.geometry.area_polygons import AreaPolygons
from pairrules.geometry.copper_outlines import centre_lines
from pairrules.geometry.curves import Curves
from pairrules.geometry.pair_geometry import TRACK, PairGeometry


def hatched_beside(board: Board, areas: AreaPolygons, geometry: PairGeometry) -> str:
    """The layer of hatched copper that a leg runs through, over or under; "" where there is none."""
    hatched = np.flatnonzero([area.hatched for area in board.areas])
    if not len(hatched):
        return ""
    for leg in (geometry.plus, geometry.minus):
        if leg is None:
            continue
        pieces = leg.pieces
        rows = np.flatnonzero(pieces.kind == TRACK)
        curves = Curves(start=pieces.start, end=pieces.end, centre=pieces.centre, sweep=pieces.sweep).take(rows)
        lines = centre_lines(curves)
        for row in hatched.tolist():
            layer = board.areas[row].layer
            near = np.abs(pieces.layer[rows] - layer) <= 1
            if near.any() and shapely.intersects(areas.take(np.array([row]))[0], lines[near]).any():
                return board.copper[layer]
    return ""
