"""The copper of each layer made ready for asking what lies near a place: areas in tiles, the rest as it is drawn."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Floats, Ints
from pairrules.geometry.area_polygons import AreaPolygons
from pairrules.geometry.area_tiles import tiles
from pairrules.geometry.copper_outlines import Drawn, drawn_copper, solid_parts
from pairrules.geometry.ring_runs import Shapes


@dataclass(frozen=True, slots=True, eq=False)
class LayerIndex:
    """Copper of one layer.

    Parameters
    ----------
    areas: tree of the areas' tiles. area_net: (k,) the net of each tile, −1 for none.
    drawn, tree: tracks, pads and vias, and the tree of their thin shapes. widest: their greatest half width [mm].
    """

    areas: shapely.STRtree
    area_net: Ints
    drawn: Drawn
    tree: shapely.STRtree
    widest: float

    def distances(self, points: Shapes, within: float) -> tuple[Ints, Ints, Floats]:
        """Point (n,), net (n,) and distance (n,) [mm] for every pair of a point and a piece of copper that near."""
        point, tile = self.areas.query(points, predicate="dwithin", distance=within)
        near, shape = self.tree.query(points, predicate="dwithin", distance=within + self.widest)
        away = shapely.distance(points[near], self.drawn.shapes[shape]) - self.drawn.half[shape]
        return (
            np.concatenate([point, near]),
            np.concatenate([self.area_net[tile], self.drawn.net[shape]]),
            np.concatenate([shapely.distance(points[point], self.areas.geometries[tile]), np.maximum(away, 0.0)]),
        )


class LayerIndexes:
    """The index of each layer of a board, made when first asked for."""

    def __init__(self, board: Board, areas: AreaPolygons | None = None) -> None:
        self._board = board
        self._areas = AreaPolygons(board) if areas is None else areas
        self._layers: dict[int, LayerIndex] = {}

    def layer(self, layer: int) -> LayerIndex:
        """The index of one layer."""
        if layer not in self._layers:
            self._layers[layer] = _index(self._board, layer, self._areas)
        return self._layers[layer]


def _index(board: Board, layer: int, areas: AreaPolygons) -> LayerIndex:
    rows = np.flatnonzero(areas.layer == layer)
    parts, row = solid_parts(areas.take(rows))
    cut = [tiles(part) for part in parts]
    drawn = drawn_copper(board, layer)
    return LayerIndex(
        areas=shapely.STRtree(np.concatenate(cut) if cut else parts),
        area_net=np.repeat(areas.net[rows][row], [len(pieces) for pieces in cut]),
        drawn=drawn,
        tree=shapely.STRtree(drawn.shapes),
        widest=float(drawn.half.max(initial=0.0)),
    )
