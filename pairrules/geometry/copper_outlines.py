"""The copper drawn on one layer as polygons: areas with their holes, tracks, pads, vias."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely

from pairrules.board.arcs import FLATTENING_MM
from pairrules.board.board import Board
from pairrules.board.columns import Bools, Floats, Ints
from pairrules.geometry.area_polygons import AreaPolygons
from pairrules.geometry.curves import Curves, chords
from pairrules.geometry.pad_outlines import pad_outline
from pairrules.geometry.ring_runs import Shapes

_QUARTER_SEGMENTS = 16
"""Chords a quarter of a round end: 0.12 % of its radius from the true circle at most. Straight sides are exact."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Outlines:
    """Polygons (k,) [mm] of one layer's copper and the net (k,) of each, −1 for none; they may overlap."""

    polygons: Shapes
    net: Ints

    def __len__(self) -> int:
        return len(self.net)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Drawn:
    """Copper of one layer as it is drawn, areas left out: shapes (k,) and the half width (k,) [mm] of the round pen.

    Tracks are centre lines and vias points; pads are polygons, whose pen is 0. net: (k,), −1 for none.
    """

    shapes: Shapes
    half: Floats
    net: Ints

    def outlines(self, rows: Ints) -> Shapes:
        """The copper (n,) of the given rows as polygons; empty where the size is unknown."""
        shapes, half = self.shapes[rows], self.half[rows]
        pen = half > 0
        shapes[pen] = _round_lines(shapes[pen], half[pen])
        return shapes


def drawn_copper(board: Board, layer: int) -> Drawn:
    """What is drawn on `layer` but for areas, in the order tracks, pads, vias; to be drawn out only where asked for."""
    tracks = np.flatnonzero(board.tracks.layer == layer)
    pads = np.flatnonzero(np.isin(board.pads.layer, (layer, -1)))
    vias, size = _sized_vias(board, np.flatnonzero((board.vias.first <= layer) & (layer <= board.vias.last)))
    outlines, pad_net = _pads(board, pads)
    return Drawn(
        shapes=np.concatenate([_pen_lines(board, tracks), outlines, _via_points(board, vias)]),
        half=np.concatenate([board.tracks.width[tracks] / 2, np.zeros(len(pads)), size / 2]),
        net=np.concatenate([board.tracks.net[tracks], pad_net, board.vias.net[vias]]),
    )


def copper_outlines(
    board: Board,
    layer: int,
    *,
    nets: tuple[int, ...] | None = None,
    areas: AreaPolygons | None = None,
) -> Outlines:
    """Copper of `layer`, of the given nets or of all and none; unknown sizes are left out. areas: where at hand.

    Order: areas, tracks, pads, vias, each as the board lists them, so that the same board gives the same rows.
    """
    areas = AreaPolygons(board) if areas is None else areas

    def chosen(net: Ints) -> Bools:
        return np.ones(len(net), dtype=np.bool_) if nets is None else np.isin(net, nets)

    filled = np.flatnonzero((areas.layer == layer) & chosen(areas.net))
    found = [
        (areas.take(filled), areas.net[filled]),
        _tracks(board, np.flatnonzero((board.tracks.layer == layer) & chosen(board.tracks.net))),
        _pads(board, np.flatnonzero(np.isin(board.pads.layer, (layer, -1)) & chosen(board.pads.net))),
        _vias(
            board,
            np.flatnonzero((board.vias.first <= layer) & (layer <= board.vias.last) & chosen(board.vias.net)),
        ),
    ]
    polygons = np.concatenate([shapes for shapes, _ in found])
    net = np.concatenate([of for _, of in found])
    # Mending a self-touching outline may give several parts; what is no polygon (a pad of unknown size) has no extent.
    parts, rows = solid_parts(polygons)
    return Outlines(polygons=parts, net=net[rows])


def solid_parts(shapes: Shapes) -> tuple[Shapes, Ints]:
    """The polygons among the parts of `shapes` (k,), and the row each is a part of."""
    parts, rows = shapely.get_parts(shapes, return_index=True)
    solid = (shapely.get_type_id(parts) == shapely.GeometryType.POLYGON) & ~shapely.is_empty(parts)
    return parts[solid], rows[solid]


def centre_lines(curves: Curves) -> Shapes:
    """Centre lines (k,) with arcs drawn as chords, `FLATTENING_MM` from them at most: for drawing and for searching."""
    corners, piece = chords(curves, within=FLATTENING_MM)
    if not len(corners):
        return np.empty(0, dtype=np.object_)
    return np.asarray(shapely.linestrings(corners, indices=piece), dtype=np.object_)


def _tracks(board: Board, rows: Ints) -> tuple[Shapes, Ints]:
    return _round_lines(_pen_lines(board, rows), board.tracks.width[rows] / 2), board.tracks.net[rows]


def _pen_lines(board: Board, rows: Ints) -> Shapes:
    tracks = board.tracks
    curves = Curves(start=tracks.start, end=tracks.end, centre=tracks.centre, sweep=tracks.sweep).take(rows)
    # A dot of copper, a track without length, is a point with a round pen.
    dot = (curves.start == curves.end).all(axis=1) & (curves.sweep == 0.0)
    shapes = np.empty(len(rows), dtype=np.object_)
    shapes[dot] = shapely.points(curves.start[dot])
    shapes[~dot] = centre_lines(curves.take(~dot))
    return shapes


def _pads(board: Board, rows: Ints) -> tuple[Shapes, Ints]:
    pads = board.pads
    shapes = np.empty(len(rows), dtype=np.object_)
    alike: dict[tuple[int, float, bool, float], list[int]] = {}
    for place, row in enumerate(rows.tolist()):
        size = float(pads.drill[row]) if pads.shape[row] < 0 else 0.0
        key = (int(pads.shape[row]), float(pads.rotation[row]), bool(pads.mirror[row]), size)
        alike.setdefault(key, []).append(place)
    for places in alike.values():
        first = rows[places[0]]
        outline = pad_outline(pads, first)
        corners = shapely.get_num_coordinates(outline)
        shift = np.repeat(pads.at[rows[places]] - pads.at[first], corners, axis=0)
        copies = _shapes([outline] * len(places))
        moved = shapely.get_coordinates(copies) + shift
        shapes[places] = shapely.set_coordinates(copies, moved)
    return shapes, pads.net[rows]


def _vias(board: Board, rows: Ints) -> tuple[Shapes, Ints]:
    rows, size = _sized_vias(board, rows)
    return _round_lines(_via_points(board, rows), size / 2), board.vias.net[rows]


def _sized_vias(board: Board, rows: Ints) -> tuple[Ints, Floats]:
    size = np.where(np.isnan(board.vias.pad[rows]), board.vias.drill[rows], board.vias.pad[rows])
    return rows[~np.isnan(size)], size[~np.isnan(size)]


def _via_points(board: Board, rows: Ints) -> Shapes:
    points = np.empty(len(rows), dtype=np.object_)
    points[:] = shapely.points(board.vias.at[rows])
    return points


def _round_lines(lines: Shapes, half_width: Floats) -> Shapes:
    drawn: Shapes = shapely.buffer(lines, half_width, quad_segs=_QUARTER_SEGMENTS)
    return drawn


def _shapes(items: list[shapely.Geometry]) -> Shapes:
    shapes = np.empty(len(items), dtype=np.object_)
    shapes[:] = items
    return shapes
