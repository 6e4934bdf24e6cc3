"""The copper drawn on one layer as polygons: areas with their holes, tracks, pads, vias."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import shapely

from pairrules.board.arcs import FLATTENING_MM
from pairrules.board.board import Board
from pairrules.board.columns import Bools, Floats, Ints
from pairrules.geometry.curves import Curves, chords
from pairrules.geometry.pad_outlines import pad_outline

_QUARTER_SEGMENTS = 16
"""Chords a quarter of a round end: 0.12 % of its radius from the true circle at most. Straight sides are exact."""

Shapes = npt.NDArray[np.object_]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Outlines:
    """Polygons (k,) [mm] of one layer's copper and the net (k,) of each, −1 for none; they may overlap."""

    polygons: Shapes
    net: Ints

    def __len__(self) -> int:
        return len(self.net)


def copper_outlines(board: Board, layer: int, *, nets: tuple[int, ...] | None = None, tracks: bool = True) -> Outlines:
    """Copper of `layer`, of the given nets or of all and none, with tracks or without; unknown sizes are left out.

    Order: areas, tracks, pads, vias, each as the board lists them, so that the same board gives the same rows.
    """

    def chosen(net: Ints) -> Bools:
        return np.ones(len(net), dtype=np.bool_) if nets is None else np.isin(net, nets)

    area_net = np.array([area.net for area in board.areas], dtype=np.int64)
    area_layer = np.array([area.layer for area in board.areas], dtype=np.int64)
    found = [
        _areas(board, np.flatnonzero((area_layer == layer) & chosen(area_net)), area_net),
        _tracks(board, np.flatnonzero((board.tracks.layer == layer) & chosen(board.tracks.net) & tracks)),
        _pads(board, np.flatnonzero(np.isin(board.pads.layer, (layer, -1)) & chosen(board.pads.net))),
        _vias(
            board,
            np.flatnonzero((board.vias.first <= layer) & (layer <= board.vias.last) & chosen(board.vias.net)),
        ),
    ]
    polygons = np.concatenate([shapes for shapes, _ in found])
    net = np.concatenate([of for _, of in found])
    # Mending a self-touching outline may give several parts; what is no polygon (a pad of unknown size) has no extent.
    parts, rows = shapely.get_parts(polygons, return_index=True)
    solid = (shapely.get_type_id(parts) == shapely.GeometryType.POLYGON) & ~shapely.is_empty(parts)
    return Outlines(polygons=parts[solid], net=net[rows[solid]])


def centre_lines(curves: Curves) -> Shapes:
    """Centre lines (k,) with arcs drawn as chords, `FLATTENING_MM` from them at most: for drawing and for searching."""
    corners, piece = chords(curves, within=FLATTENING_MM)
    if not len(corners):
        return np.empty(0, dtype=np.object_)
    return np.asarray(shapely.linestrings(corners, indices=piece), dtype=np.object_)


def _areas(board: Board, rows: Ints, net: Ints) -> tuple[Shapes, Ints]:
    shapes = _shapes([shapely.Polygon(board.areas[row].outline, board.areas[row].holes) for row in rows])
    wrong = ~shapely.is_valid(shapes)
    shapes[wrong] = shapely.make_valid(shapes[wrong])
    return shapes, net[rows]


def _tracks(board: Board, rows: Ints) -> tuple[Shapes, Ints]:
    tracks = board.tracks
    curves = Curves(start=tracks.start, end=tracks.end, centre=tracks.centre, sweep=tracks.sweep).take(rows)
    # A dot of copper, a track without length, is a point with a round pen.
    dot = (curves.start == curves.end).all(axis=1) & (curves.sweep == 0.0)
    shapes = np.empty(len(rows), dtype=np.object_)
    shapes[dot] = shapely.points(curves.start[dot])
    shapes[~dot] = centre_lines(curves.take(~dot))
    return _round_lines(shapes, tracks.width[rows] / 2), tracks.net[rows]


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
    size = np.where(np.isnan(board.vias.pad[rows]), board.vias.drill[rows], board.vias.pad[rows])
    rows, size = rows[~np.isnan(size)], size[~np.isnan(size)]
    centres = np.asarray(shapely.points(board.vias.at[rows]), dtype=np.object_)
    return _round_lines(centres, size / 2), board.vias.net[rows]


def _round_lines(lines: Shapes, half_width: Floats) -> Shapes:
    drawn: Shapes = shapely.buffer(lines, half_width, quad_segs=_QUARTER_SEGMENTS)
    return drawn


def _shapes(items: list[shapely.Geometry]) -> Shapes:
    shapes = np.empty(len(items), dtype=np.object_)
    shapes[:] = items
    return shapes
