"""How far the nearest foreign copper lies from points along a leg, on the leg's own layer."""

from __future__ import annotations

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Bools, Floats, Ints
from pairrules.geometry.copper_outlines import centre_lines
from pairrules.geometry.curves import Curves
from pairrules.geometry.pad_outlines import pad_outline
from pairrules.geometry.ring_runs import Shapes


def nearest_copper(
    board: Board, layer: int, at: Floats, within: float, groups: tuple[Bools, ...]
) -> tuple[Floats, ...]:
    """Distance [mm] from each point to the nearest copper of each group of nets, `within` where there is none nearer.

    Parameters
    ----------
    at: (n, 2) [mm]. within: greatest distance looked at [mm].
    groups: for each group whether a net belongs to it, (nets + 1,), the last for copper without a net.

    Returns
    -------
    One (n,) for each group; 0 inside copper. A track's distance is exact but for the flattening of arcs.
    """
    low, high = at.min(axis=0) - within, at.max(axis=0) + within
    shapes, half, net = _copper(board, layer, low, high)
    found = tuple(np.full(len(at), within) for _ in groups)
    if not len(shapes):
        return found
    points = np.asarray(shapely.points(at), dtype=np.object_)
    point, shape = shapely.STRtree(shapes).query(
        points, predicate="dwithin", distance=within + float(half.max(initial=0.0))
    )
    away = np.maximum(shapely.distance(points[point], shapes[shape]) - half[shape], 0.0)
    for distance, group in zip(found, groups, strict=True):
        mine = group[net[shape]]
        np.minimum.at(distance, point[mine], away[mine])
    return found


def _copper(board: Board, layer: int, low: Floats, high: Floats) -> tuple[Shapes, Floats, Ints]:
    """Copper that may reach into a box: shapes, the half width of the pen that draws each, the net of each."""
    tracks, pads, vias = board.tracks, board.pads, board.vias
    curves = Curves(start=tracks.start, end=tracks.end, centre=tracks.centre, sweep=tracks.sweep)
    # An arc lies within its circle.
    wide = tracks.width / 2 + np.where(tracks.sweep == 0.0, 0.0, 2 * np.hypot(*(tracks.start - tracks.centre).T))
    row = np.flatnonzero((tracks.layer == layer) & _reaches(tracks.start, tracks.end, wide, low, high))
    lines = centre_lines(curves.take(row))
    shapes, half, net = [lines], [tracks.width[row] / 2], [tracks.net[row]]

    size = np.array([max(shape.size) for shape in pads.shapes] + [0.0])[pads.shape]
    row = np.flatnonzero(np.isin(pads.layer, (layer, -1)) & _reaches(pads.at, pads.at, size + 1.0, low, high))
    outlines = np.empty(len(row), dtype=np.object_)
    outlines[:] = [pad_outline(pads, int(one)) for one in row]
    shapes, half, net = [*shapes, outlines], [*half, np.zeros(len(row))], [*net, pads.net[row]]

    size = np.nan_to_num(np.where(np.isnan(vias.pad), vias.drill, vias.pad))
    through = (vias.first <= layer) & (layer <= vias.last)
    row = np.flatnonzero(through & _reaches(vias.at, vias.at, size, low, high))
    places = np.asarray(shapely.points(vias.at[row]), dtype=np.object_)
    shapes, half, net = [*shapes, places], [*half, size[row] / 2], [*net, vias.net[row]]

    chosen = [
        area
        for area in board.areas
        if area.layer == layer and (area.outline.max(axis=0) >= low).all() and (area.outline.min(axis=0) <= high).all()
    ]
    filled = np.empty(len(chosen), dtype=np.object_)
    filled[:] = [shapely.make_valid(shapely.Polygon(area.outline, area.holes)) for area in chosen]
    shapely.prepare(filled)
    shapes, half = [*shapes, filled], [*half, np.zeros(len(chosen))]
    net = [*net, np.array([area.net for area in chosen], dtype=np.int64)]
    return np.concatenate(shapes), np.concatenate(half), np.concatenate(net)


def _reaches(start: Floats, end: Floats, wide: Floats, low: Floats, high: Floats) -> Bools:
    first, last = np.minimum(start, end) - wide[:, None], np.maximum(start, end) + wide[:, None]
    inside: Bools = np.asarray(((last >= low) & (first <= high)).all(axis=1))
    return inside
