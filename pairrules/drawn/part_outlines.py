"""Where the board's parts lie, as far as their pads tell: what people find their way by in a picture of the board."""

from __future__ import annotations

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.drawing import DrawnOutline
from pairrules.drawn.plain_shapes import ring
from pairrules.geometry.pad_outlines import pad_outline


def part_outlines(board: Board) -> tuple[DrawnOutline, ...]:
    """The convex hull of each part's pads, in the order of the parts; parts whose pads have no shape are left out."""
    rows = np.flatnonzero(board.pads.part >= 0)
    part = board.pads.part[rows]
    order = np.argsort(part, kind="stable")
    rows, part = rows[order], part[order]
    outlines = np.array([pad_outline(board.pads, row) for row in rows.tolist()], dtype=object)
    found = []
    for group in np.split(np.arange(len(rows)), np.flatnonzero(np.diff(part)) + 1):
        if not len(group):
            continue
        hull = shapely.GeometryCollection(list(outlines[group])).convex_hull
        if hull.geom_type == "Polygon" and not hull.is_empty:
            own = board.parts[int(part[group[0]])]
            found.append(DrawnOutline(ref=own.ref, side=own.side, outline=ring(shapely.get_coordinates(hull))))
    return tuple(found)
