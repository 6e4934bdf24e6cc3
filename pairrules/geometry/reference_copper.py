"""The copper of the reference nets, layer by layer, in the form that cover is read from."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Floats, Ints
from pairrules.geometry.area_polygons import AreaPolygons
from pairrules.geometry.copper_outlines import copper_outlines
from pairrules.geometry.ring_runs import RingRuns, Shapes, ring_runs

NO_NET, UNKNOWN = -1, -2
"""In place of a net: no reference copper there; the layer there is not in the file."""


class ReferenceCopper:
    """The copper of the reference nets, layer by layer; made once a board, each layer when it is first asked for.

    Areas with their holes, tracks, pads and vias of the nets all count. `reference`: indices into `Board.nets`.
    """

    def __init__(self, board: Board, reference: tuple[int, ...], areas: AreaPolygons | None = None) -> None:
        self.board = board
        self._areas = AreaPolygons(board) if areas is None else areas
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
            self._layers[layer] = _layer_copper(self.board, layer, self.reference, self._areas)
        return self._layers[layer]

    def known(self, layer: int) -> bool:
        """Whether the file tells what lies on `layer` and that it is the next one."""
        return bool(self._known[layer]) and not self._gaps


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LayerCopper:
    """Reference copper of a layer: each net's copper, prepared to be asked for points, and the edges of all of it."""

    by_net: tuple[tuple[int, Shapes, shapely.STRtree], ...]
    outline: RingRuns

    @property
    def edges(self) -> Floats:
        """The edges (n, 2, 2) [mm] of the union."""
        return self.outline.edges

    @property
    def tree(self) -> shapely.STRtree:
        """The same edges to be searched, in runs."""
        return self.outline.tree

    def net_at(self, at: Floats) -> Ints:
        """The lowest reference net with copper at each point, its edge included; `NO_NET` where there is none."""
        net = np.full(len(at), NO_NET, dtype=np.int64)
        for index, parts, tree in reversed(self.by_net):
            point, part = tree.query(shapely.points(at))
            net[point[shapely.intersects_xy(parts[part], at[point, 0], at[point, 1])]] = index
        return net


def _layer_copper(board: Board, layer: int, reference: tuple[int, ...], areas: AreaPolygons) -> LayerCopper:
    outlines = copper_outlines(board, layer, nets=reference, areas=areas)
    by_net, unions = [], [np.empty(0, dtype=np.object_)]
    for net in np.unique(outlines.net).tolist():
        unions.append(_union(outlines.polygons[outlines.net == net]))
        shapely.prepare(unions[-1])
        by_net.append((net, unions[-1], shapely.STRtree(unions[-1])))
    every = _union(np.concatenate(unions)) if len(unions) > 2 else unions[-1]
    return LayerCopper(by_net=tuple(by_net), outline=ring_runs(shapely.get_rings(every)))


def _union(polygons: Shapes) -> Shapes:
    """The parts of the union. What lies inside other copper is left out first: vias in a plane, for the most part."""
    _, inner = shapely.STRtree(polygons).query(polygons, predicate="contains_properly")
    kept = np.ones(len(polygons), dtype=np.bool_)
    kept[inner] = False
    rest = polygons[kept]
    return shapely.get_parts(shapely.disjoint_subset_union_all(rest)) if len(rest) > 1 else rest
