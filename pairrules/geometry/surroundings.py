"""How far the nearest foreign copper lies from points along a leg, on the leg's own layer."""

from __future__ import annotations

import numpy as np
import shapely

from pairrules.board.columns import Bools, Floats
from pairrules.geometry.layer_index import LayerIndex


def nearest_copper(layer: LayerIndex, at: Floats, within: float, groups: tuple[Bools, ...]) -> tuple[Floats, ...]:
    """Distance [mm] from each point to the nearest copper of each group of nets, `within` where there is none nearer.

    Parameters
    ----------
    at: (n, 2) [mm]. within: greatest distance looked at [mm].
    groups: for each group whether a net belongs to it, (nets + 1,), the last for copper without a net.

    Returns
    -------
    One (n,) for each group; 0 inside copper. A track's distance is exact but for the flattening of arcs.
    """
    found = tuple(np.full(len(at), within) for _ in groups)
    point, net, away = layer.distances(np.asarray(shapely.points(at), dtype=np.object_), within)
    for distance, group in zip(found, groups, strict=True):
        mine = group[net]
        np.minimum.at(distance, point[mine], away[mine])
    return found
