"""What copper a straight cut across a pair meets, layer by layer: the cross-section as the board has it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Bools, Floats, Ints
from pairrules.geometry.layer_index import LayerIndexes


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
    """Cuts through a board's copper. layers: of the board, where they are at hand."""

    def __init__(self, board: Board, layers: LayerIndexes | None = None) -> None:
        self._layers = LayerIndexes(board) if layers is None else layers

    def across(
        self,
        layer: int,
        origin: Floats,
        along: Floats,
        low: Floats,
        high: Floats,
        *,
        unwanted: Callable[[Ints, Ints], Bools] | None = None,
    ) -> Met:
        """Copper of `layer` that the cuts meet.

        Parameters
        ----------
        origin: (n, 2) [mm]; along: (n, 2) unit vectors; low, high: (n,) [mm] where each cut begins and ends.
        unwanted: which copper is left out, by cut (k,) and net (k,).
        """
        of = self._layers.layer(layer)
        ends = np.stack([origin + along * low[:, None], origin + along * high[:, None]], axis=1)
        lines = np.empty(len(origin), dtype=np.object_)
        lines[:] = shapely.linestrings(ends)
        cut, tile = of.areas.query(lines, predicate="intersects")
        near, drawn = of.tree.query(lines, predicate="dwithin", distance=of.widest)
        if unwanted is not None:
            kept, also = ~unwanted(cut, of.area_net[tile]), ~unwanted(near, of.drawn.net[drawn])
            cut, tile, near, drawn = cut[kept], tile[kept], near[also], drawn[also]
        # Most cuts over a plane lie in it from end to end, and what they have in common with it is themselves.
        areas = of.areas.geometries[tile]
        within = shapely.covers(areas, lines[cut])
        rows, place = np.unique(drawn, return_inverse=True)
        shapes = np.concatenate([areas[~within], of.drawn.outlines(rows)[place]])
        crossing = np.concatenate([cut[~within], near])
        common = np.concatenate([lines[cut[within]], shapely.intersection(lines[crossing], shapes)])
        net = np.concatenate([of.area_net[tile[within]], of.area_net[tile[~within]], of.drawn.net[drawn]])
        cut = np.concatenate([cut[within], crossing])
        pieces, row = shapely.get_parts(common, return_index=True)
        use = (shapely.get_dimensions(pieces) == 1) & ~shapely.is_empty(pieces)
        pieces, row = pieces[use], row[use]
        bounds = shapely.get_point(pieces, 0), shapely.get_point(pieces, -1)
        own = cut[row]
        places = [
            np.einsum("ij,ij->i", shapely.get_coordinates(end).reshape(-1, 2) - origin[own], along[own])
            for end in bounds
        ]
        return _merged(own, net[row], np.minimum(*places), np.maximum(*places))


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
