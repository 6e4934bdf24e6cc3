"""The copper of the reference nets, layer by layer, in the form that cover is read from."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Floats, Ints
from pairrules.geometry.copper_outlines import copper_outlines

NO_NET, UNKNOWN = -1, -2
"""In place of a net: no reference copper there; the layer there is not in the file."""


class ReferenceCopper:
    """The copper of the reference nets, layer by layer; made once a board, each layer when it is first asked for.

    Areas with their holes, tracks, pads and vias of the nets all count. `reference`: indices into `Board.nets`.
    """

    def __init__(self, board: Board, reference: tuple[int, ...]) -> None:
        self.board = board
        self.reference = tuple(sorted(set(reference)))
        self._layers: dict[int, LayerCopper] = {}
        held = np.zeros(len(board.copper), dtype=np.bool_)
        held[board.tracks.layer] = True
        held[board.pads.layer[board.pads.layer >= 0]] = True
        held[[area.layer for area in board.areas]] = True
        self._known = held | board.complete
        # Copper is missing, yet every layer the stack names has some: what is missing may lie between any two of them.
        self._gaps = not board.complete and bool(held.all())

    def layer(self, layer: int) -> LayerCopper:
        """The reference copper of one layer."""
        if layer not in self._layers:
            self._layers[layer] = _layer_copper(self.board, layer, self.reference)
        return self._layers[layer]

    def known(self, layer: int) -> bool:
        """Whether the file tells what lies on `layer` and that it is the next one."""
        return bool(self._known[layer]) and not self._gaps


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LayerCopper:
    """Reference copper of a layer: each net's union, and the straight edges (n, 2, 2) of the union of all."""

    by_net: tuple[tuple[int, shapely.Geometry], ...]
    edges: Floats
    tree: shapely.STRtree

    def net_at(self, at: Floats) -> Ints:
        """The lowest reference net with copper at each point, its edge included; `NO_NET` where there is none."""
        net = np.full(len(at), NO_NET, dtype=np.int64)
        for index, union in reversed(self.by_net):
            net[shapely.intersects_xy(union, at[:, 0], at[:, 1])] = index
        return net


def _layer_copper(board: Board, layer: int, reference: tuple[int, ...]) -> LayerCopper:
    outlines = copper_outlines(board, layer, nets=reference)
    by_net = []
    for net in np.unique(outlines.net).tolist():
        union = shapely.union_all(outlines.polygons[outlines.net == net])
        shapely.prepare(union)
        by_net.append((net, union))
    rings = shapely.get_rings(shapely.get_parts(shapely.union_all([union for _, union in by_net])))
    corners, ring = shapely.get_coordinates(rings, return_index=True)
    same = ring[1:] == ring[:-1]
    edges = np.stack([corners[:-1][same], corners[1:][same]], axis=1)
    edges = edges[(edges[:, 0] != edges[:, 1]).any(axis=1)]
    return LayerCopper(by_net=tuple(by_net), edges=edges, tree=shapely.STRtree(shapely.linestrings(edges)))
