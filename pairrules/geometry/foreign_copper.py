"""The edges of all copper of a board, layer by layer, with the net each belongs to."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Floats, Ints
from pairrules.geometry.copper_outlines import copper_outlines


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LayerEdges:
    """Straight edges (n, 2, 2) [mm] of a layer's copper, copper to the left of each, and the net (n,) of each.

    Outlines of one net may overlap: an edge may lie within other copper of its net.
    """

    edges: Floats
    net: Ints
    tree: shapely.STRtree


class ForeignCopper:
    """The copper of a board among which a leg looks for neighbours; each layer is made when first asked for."""

    def __init__(self, board: Board) -> None:
        self.board = board
        self._layers: dict[int, LayerEdges] = {}

    def layer(self, layer: int) -> LayerEdges:
        """The edges on one layer, of every net and of none."""
        if layer not in self._layers:
            self._layers[layer] = _layer_edges(self.board, layer)
        return self._layers[layer]


def _layer_edges(board: Board, layer: int) -> LayerEdges:
    outlines = copper_outlines(board, layer)
    rings, polygon = shapely.get_rings(outlines.polygons, return_index=True)
    # Copper to the left: round the outside counter-clockwise, round a hole clockwise.
    outside = np.diff(polygon, prepend=-1) > 0
    rings = np.where(shapely.is_ccw(rings) == outside, rings, shapely.reverse(rings))
    corners, ring = shapely.get_coordinates(rings, return_index=True)
    whole = (ring[1:] == ring[:-1]) & (corners[1:] != corners[:-1]).any(axis=1)
    edges = np.stack([corners[:-1][whole], corners[1:][whole]], axis=1)
    net = outlines.net[polygon[ring[:-1][whole]]]
    lines = np.asarray(shapely.linestrings(edges), dtype=np.object_)
    return LayerEdges(edges=edges, net=net, tree=shapely.STRtree(lines))
