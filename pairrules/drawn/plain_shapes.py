"""Shapes and points as plain tuples: clipped, rounded, in one order, so that the same board gives the same numbers."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import shapely
from shapely.geometry.polygon import orient

from pairrules.board.columns import Floats
from pairrules.drawing import DrawnShape, Point, Ring

DIGITS = 4
"""Decimals of drawn coordinates [mm]: a tenth of a micrometre is far below what a picture shows."""

_SMOOTH_MM = 0.005
"""Corners of flattened round copper are thinned out to this; no picture shows less."""
_LEAST_MM2 = 1e-6


def point(xy: Sequence[float] | Floats) -> Point:
    """A point, rounded; −0 is 0."""
    return (round(float(xy[0]), DIGITS) + 0.0, round(float(xy[1]), DIGITS) + 0.0)


def ring(points: Floats) -> Ring:
    """A closed outline without the last point where that is the first again."""
    found = [point(xy) for xy in points]
    return tuple(found[:-1] if len(found) > 1 and found[0] == found[-1] else found)


def plain_shapes(geometry: shapely.Geometry) -> tuple[DrawnShape, ...]:
    """The polygons of a geometry, outlines counter-clockwise, sorted; lines, points and specks are left out."""
    thin = shapely.simplify(geometry, _SMOOTH_MM, preserve_topology=True)
    found = []
    for part in shapely.get_parts(shapely.get_parts(thin)):
        if part.geom_type != "Polygon" or part.area < _LEAST_MM2:
            continue
        turned = orient(part, 1.0)
        holes = tuple(sorted(ring(np.asarray(hole.coords)) for hole in turned.interiors))
        found.append(DrawnShape(outline=ring(np.asarray(turned.exterior.coords)), holes=holes))
    return tuple(sorted(found, key=lambda shape: (shape.outline, shape.holes)))
