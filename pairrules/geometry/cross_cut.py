"""What copper a straight cut across a pair meets, layer by layer: the cross-section as the board has it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely

from pairrules.board.arcs import FLATTENING_MM
from pairrules.board.board import Board
from pairrules.board.columns import Floats, Ints
from pairrules.geometry.copper_outlines import Shapes, copper_outlines
from pairrules.geometry.curves import Curves, chords


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Met:
    """Stretches of copper along cuts, as columns of k rows, sorted by cut and place.

    cut: (k,) which cut. net: (k,) index into `Board.nets`, −1 for none. low, high: (k,) [mm] along the cut from its
    origin. Copper of one net that touches is one stretch.
    """

    cut: Ints
    net: Ints
    low: Floats
    high: Floats


class CrossCuts:
    """Cuts through a board's copper; each layer is made ready when it is first cut."""

    def __init__(self, board: Board) -> None:
        self._board = board
        self._layers: dict[int, _Layer] = {}

    def across(self, layer: int, origin: Floats, along: Floats, low: Floats, high: Floats) -> Met:
        """Copper of `layer` that the cuts meet.

        Parameters
        ----------
        origin: (n, 2) [mm]; along: (n, 2) unit vectors; low, high: (n,) [mm] where each cut begins and ends.
        """
        if layer not in self._layers:
            self._layers[layer] = _layer(self._board, layer)
        of = self._layers[layer]
        ends = np.stack([origin + along * low[:, None], origin + along * high[:, None]], axis=1)
        lines = np.empty(len(origin), dtype=np.object_)
        lines[:] = shapely.linestrings(ends)
        cut, shape = of.tree.query(lines, predicate="dwithin", distance=of.widest)
        shapes = of.shapes[shape]
        drawn = of.half[shape] > 0
        shapes[drawn] = shapely.buffer(shapes[drawn], of.half[shape][drawn])
        pieces, row = shapely.get_parts(shapely.intersection(lines[cut], shapes), return_index=True)
        use = (shapely.get_dimensions(pieces) == 1) & ~shapely.is_empty(pieces)
        pieces, row = pieces[use], row[use]
        bounds = shapely.get_point(pieces, 0), shapely.get_point(pieces, -1)
        own = cut[row]
        places = [
            np.einsum("ij,ij->i", shapely.get_coordinates(end).reshape(-1, 2) - origin[own], along[own])
            for end in bounds
        ]
        return _merged(own, of.net[shape[row]], np.minimum(*places), np.maximum(*places))


@dataclass(frozen=True, slots=True, eq=False)
class _Layer:
    """Copper as polygons (half 0) and as centre lines with a pen of half width `half`."""

    shapes: Shapes
    half: Floats
    net: Ints
    tree: shapely.STRtree
    widest: float


def _layer(board: Board, layer: int) -> _Layer:
    filled = copper_outlines(board, layer, tracks=False)
    tracks = board.tracks
    rows = np.flatnonzero(tracks.layer == layer)
    curves = Curves(start=tracks.start, end=tracks.end, centre=tracks.centre, sweep=tracks.sweep).take(rows)
    solid = ((curves.start != curves.end).any(axis=1)) | (curves.sweep != 0.0)
    rows, curves = rows[solid], curves.take(solid)
    lines = np.empty(len(rows), dtype=np.object_)
    if len(rows):
        at, piece = chords(curves, within=FLATTENING_MM)
        lines[:] = shapely.linestrings(at, indices=piece)
    shapes = np.concatenate([filled.polygons, lines])
    half = np.concatenate([np.zeros(len(filled)), tracks.width[rows] / 2])
    return _Layer(
        shapes=shapes,
        half=half,
        net=np.concatenate([filled.net, tracks.net[rows]]),
        tree=shapely.STRtree(shapes),
        widest=float(half.max(initial=0.0)),
    )


def _merged(cut: Ints, net: Ints, low: Floats, high: Floats) -> Met:
    order = np.lexsort((high, low, net, cut))
    rows: list[list[float]] = []
    keys: list[tuple[int, int]] = []
    for i in order.tolist():
        key = (int(cut[i]), int(net[i]))
        if keys and keys[-1] == key and low[i] <= rows[-1][1] + 1e-9:
            rows[-1][1] = max(rows[-1][1], float(high[i]))
        else:
            keys.append(key)
            rows.append([float(low[i]), float(high[i])])
    spans = np.array(rows, dtype=np.float64).reshape(-1, 2)
    of = np.array(keys, dtype=np.int64).reshape(-1, 2)
    place = np.lexsort((of[:, 1], spans[:, 0], of[:, 0]))
    return Met(cut=of[place, 0], net=of[place, 1], low=spans[place, 0], high=spans[place, 1])
