"""The edges of the copper near given lines, with the net each belongs to; only what lies near is drawn out."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Bools, Floats, Ints
from pairrules.geometry.area_polygons import AreaPolygons
from pairrules.geometry.copper_outlines import solid_parts
from pairrules.geometry.layer_index import LayerIndexes
from pairrules.geometry.ring_runs import RingRuns, Shapes, ring_runs


class ForeignCopper:
    """The copper of a board among which a leg looks for neighbours; each layer is made ready when first asked for."""

    def __init__(self, board: Board, areas: AreaPolygons | None = None, layers: LayerIndexes | None = None) -> None:
        self._areas = AreaPolygons(board) if areas is None else areas
        self._layers = LayerIndexes(board, self._areas) if layers is None else layers
        self._rings: dict[int, tuple[RingRuns, Ints]] = {}

    def near(
        self, layer: int, lines: Shapes, reach: Floats, leg: Ints, own: Sequence[tuple[int, ...]]
    ) -> tuple[Ints, Floats, Ints]:
        """Edges of copper within reach of lines, of every net and of none.

        Parameters: lines: (k,). reach: (k,) [mm]. leg: (k,) which each line is part of. own: of each leg the nets left
        out beside it.
        Returns: the line (n,), the edge (n, 2, 2) [mm] with copper to its left, and its net (n,), for every pair of a
        line and an edge within reach of it, and of a few further ones. Outlines of one net may overlap: an edge may lie
        within other copper.
        """
        if layer not in self._rings:
            self._rings[layer] = _area_edges(self._areas, layer)
        (filled, filled_net), of = self._rings[layer], self._layers.layer(layer)
        which, edge = filled.near(lines, reach)
        near, shape = of.tree.query(lines, predicate="dwithin", distance=reach + of.widest)
        foreign = ~_owned(leg[near], of.drawn.net[shape], own)
        near, shape = near[foreign], shape[foreign]
        shapes, place = np.unique(shape, return_inverse=True)
        parts, row = solid_parts(of.drawn.outlines(shapes))
        runs, run_shape = _edges(parts, row)
        # Every edge of a shape with every line that the shape is near to.
        order = np.argsort(run_shape, kind="stable")
        first = np.searchsorted(run_shape[order], np.arange(len(shapes) + 1))
        size = first[place + 1] - first[place]
        nth = np.arange(size.sum()) - np.repeat(np.cumsum(size) - size, size)
        drawn = order[np.repeat(first[place], size) + nth]
        line = np.concatenate([which, np.repeat(near, size)])
        edges = np.concatenate([filled.edges[edge], runs[drawn]])
        net = np.concatenate([filled_net[filled.ring[edge]], of.drawn.net[shapes[run_shape[drawn]]]])
        box = shapely.bounds(lines) + np.column_stack([-reach, -reach, reach, reach])
        # Column by column, since reducing over two values a row costs more than all the rest.
        (x0, y0), (x1, y1), (left, low, right, high) = edges[:, 0].T, edges[:, 1].T, box[line].T
        within = (np.maximum(x0, x1) >= left) & (np.minimum(x0, x1) <= right)
        within &= (np.maximum(y0, y1) >= low) & (np.minimum(y0, y1) <= high) & ~_owned(leg[line], net, own)
        return line[within], edges[within], net[within]


def _owned(leg: Ints, net: Ints, own: Sequence[tuple[int, ...]]) -> Bools:
    """Whether each net is one of its leg's own."""
    pairs = np.array([(one, held) for one, nets in enumerate(own) for held in nets], dtype=np.int64).reshape(-1, 2)
    # Leg and net as one number; copper of no net has −1.
    many = 2 + int(max(net.max(initial=-1), pairs[:, 1].max(initial=-1)))
    owned: Bools = np.isin(leg * many + net + 1, pairs[:, 0] * many + pairs[:, 1] + 1)
    return owned


def _area_edges(areas: AreaPolygons, layer: int) -> tuple[RingRuns, Ints]:
    """The edges of a layer's areas, and the net of each ring."""
    rows = np.flatnonzero(areas.layer == layer)
    parts, row = solid_parts(areas.take(rows))
    rings, polygon = _rings(parts)
    return ring_runs(rings), areas.net[rows][row[polygon]]


def _edges(polygons: Shapes, row: Ints) -> tuple[Floats, Ints]:
    rings, polygon = _rings(polygons)
    found = ring_runs(rings)
    return found.edges, row[polygon[found.ring]]


def _rings(polygons: Shapes) -> tuple[Shapes, Ints]:
    """The rings of polygons with copper to the left of each: round the outside counter-clockwise, round a hole not."""
    rings, polygon = shapely.get_rings(polygons, return_index=True)
    outside = np.diff(polygon, prepend=-1) > 0
    return np.where(shapely.is_ccw(rings) == outside, rings, shapely.reverse(rings)), polygon
