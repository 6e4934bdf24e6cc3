"""Areas cut into tiles of few corners each, so that what asks for a small place never walks round a whole plane."""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np
import shapely

from pairrules.geometry.copper_outlines import solid_parts
from pairrules.geometry.ring_runs import Shapes

CORNERS = 200
"""About so many corners go to a tile; polygons of fewer stay whole."""


def tiles(polygon: shapely.Polygon) -> Shapes:
    """Polygons (k,) that meet at straight cuts and together cover what `polygon` (valid) covers."""
    whole = np.array([polygon], dtype=np.object_)
    count = int(shapely.get_num_coordinates(polygon)) // CORNERS
    if count < 2:
        return whole
    pieces = _split(shapely.Polygon(polygon.exterior), count)
    rings = np.asarray(polygon.interiors, dtype=np.object_)
    if not len(rings):
        return pieces
    voids = np.asarray(shapely.polygons(rings), dtype=np.object_)
    piece, void = shapely.STRtree(voids).query(pieces, predicate="intersects")
    inside = shapely.contains_properly(pieces[piece], voids[void])
    cut = np.unique(piece[~inside])
    found = pieces.copy()
    first = np.searchsorted(piece, np.arange(len(pieces) + 1))
    for one in np.setdiff1d(piece, cut).tolist():
        found[one] = shapely.polygons(shapely.get_exterior_ring(pieces[one]), rings[void[first[one] : first[one + 1]]])
    for one in cut.tolist():
        # The voids of a valid polygon meet at points at most, so that they may be taken away as one shape.
        here = voids[void[first[one] : first[one + 1]]]
        found[one] = shapely.difference(pieces[one], shapely.multipolygons(here))
    return solid_parts(found)[0]


def _split(shell: shapely.Polygon, count: int) -> Shapes:
    """A polygon without holes cut by a grid of about `count` cells."""
    left, low, right, high = shell.bounds
    columns = max(1, round(math.sqrt(count * (right - left) / (high - low))))
    rows = max(1, round(count / columns))
    x, y = np.linspace(left, right, columns + 1).tolist(), np.linspace(low, high, rows + 1).tolist()
    bands = _boxed(np.array([shell], dtype=np.object_), [(left, a, right, b) for a, b in pairwise(y)])
    return _boxed(bands, [(a, low, b, high) for a, b in pairwise(x)])


def _boxed(shapes: Shapes, boxes: list[tuple[float, float, float, float]]) -> Shapes:
    """What of each shape lies in each box."""
    cut = [shapely.intersection(shapes, shapely.box(*box)) for box in boxes]
    return solid_parts(np.concatenate(cut, dtype=np.object_))[0]
