"""What copper a straight cut across a pair meets, layer by layer: the cross-section as the board has it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Floats, Ints
from pairrules.geometry.area_polygons import AreaPolygons
from pairrules.geometry.area_tiles import tiles
from pairrules.geometry.copper_outlines import Drawn, drawn_copper, solid_parts


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

    def __init__(self, board: Board, areas: AreaPolygons | None = None) -> None:
        self._board = board
        self._areas = AreaPolygons(board) if areas is None else areas
        self._layers: dict[int, _Layer] = {}

    def across(self, layer: int, origin: Floats, along: Floats, low: Floats, high: Floats) -> Met:
        """Copper of `layer` that the cuts meet.

        Parameters
        ----------
        origin: (n, 2) [mm]; along: (n, 2) unit vectors; low, high: (n,) [mm] where each cut begins and ends.
        """
        if layer not in self._layers:
            self._layers[layer] = _layer(self._board, layer, self._areas)
        of = self._layers[layer]
        ends = np.stack([origin + along * low[:, None], origin + along * high[:, None]], axis=1)
        lines = np.empty(len(origin), dtype=np.object_)
        lines[:] = shapely.linestrings(ends)
        cut, shape = of.areas.query(lines, predicate="intersects")
        near, drawn = of.tree.query(lines, predicate="dwithin", distance=of.widest)
        rows, place = np.unique(drawn, return_inverse=True)
        shapes = np.concatenate([of.areas.geometries[shape], of.drawn.outlines(rows)[place]])
        cut, net = np.concatenate([cut, near]), np.concatenate([of.area_net[shape], of.drawn.net[drawn]])
        pieces, row = shapely.get_parts(shapely.intersection(lines[cut], shapes), return_index=True)
        use = (shapely.get_dimensions(pieces) == 1) & ~shapely.is_empty(pieces)
        pieces, row = pieces[use], row[use]
        bounds = shapely.get_point(pieces, 0), shapely.get_point(pieces, -1)
        own = cut[row]
        places = [
            np.einsum("ij,ij->i", shapely.get_coordinates(end).reshape(-1, 2) - origin[own], along[own])
            for end in bounds
        ]
        return _merged(own, net[row], np.minimum(*places), np.maximum(*places))


@dataclass(frozen=True, slots=True, eq=False)
class _Layer:
    """Areas in tiles with the net of each, and what else is drawn."""

    areas: shapely.STRtree
    area_net: Ints
    drawn: Drawn
    tree: shapely.STRtree
    widest: float


def _layer(board: Board, layer: int, areas: AreaPolygons) -> _Layer:
    rows = np.flatnonzero(areas.layer == layer)
    parts, row = solid_parts(areas.take(rows))
    cut = [tiles(part) for part in parts]
    drawn = drawn_copper(board, layer)
    return _Layer(
        areas=shapely.STRtree(np.concatenate(cut) if cut else parts),
        area_net=np.repeat(areas.net[rows][row], [len(pieces) for pieces in cut]),
        drawn=drawn,
        tree=shapely.STRtree(drawn.shapes),
        widest=float(drawn.half.max(initial=0.0)),
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
