"""Areas as valid polygons, each made once a board."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import shapely

from pairrules.board.areas import Area
from pairrules.board.board import Board
from pairrules.board.columns import Floats, Ints
from pairrules.geometry.ring_runs import Shapes


class AreaPolygons:
    """The areas of a board; each polygon is made when first asked for."""

    def __init__(self, board: Board) -> None:
        self._areas = board.areas
        self.net: Ints = np.array([area.net for area in board.areas], dtype=np.int64)
        self.layer: Ints = np.array([area.layer for area in board.areas], dtype=np.int64)
        self._made: dict[int, shapely.Geometry] = {}

    def take(self, rows: Ints) -> Shapes:
        """The polygons of the given rows of `Board.areas`."""
        found = np.empty(len(rows), dtype=np.object_)
        for place, row in enumerate(rows.tolist()):
            if row not in self._made:
                self._made[row] = area_polygon(self._areas[row])
            found[place] = self._made[row]
        return found


def area_polygon(area: Area) -> shapely.Geometry:
    """The copper of an area: its outline less its holes, which may overlap one another and the outline.

    Exporters write each clearance by itself, so that those of neighbouring vias often overlap; what lies in any of them
    is no copper. An outline that touches or crosses itself is mended by its lines (`shapely.make_valid`).
    """
    shell: shapely.Geometry = shapely.Polygon(area.outline)
    holes = _rings(area.holes)
    drawn: shapely.Geometry = shapely.polygons(shapely.get_exterior_ring(shell), holes) if len(holes) else shell
    if shapely.is_valid(drawn):
        return drawn
    if not shapely.is_valid(shell):
        shell = shapely.make_valid(shell)
    if not len(holes):
        return shell
    voids = np.asarray(shapely.polygons(holes), dtype=np.object_)
    wrong = ~shapely.is_valid(voids)
    voids[wrong] = shapely.make_valid(voids[wrong])
    merged = shapely.get_parts(shapely.disjoint_subset_union_all(voids))
    merged = merged[shapely.get_dimensions(merged) == 2]
    if shapely.get_type_id(shell) != shapely.GeometryType.POLYGON:
        return shapely.difference(shell, shapely.disjoint_subset_union_all(merged))
    shapely.prepare(shell)
    apart = shapely.contains_properly(shell, merged)
    if not apart.all():
        # Only what reaches the edge is cut out: to cut out thousands of voids takes long, and memory.
        shell = shapely.difference(shell, shapely.disjoint_subset_union_all(merged[~apart]))
        if shapely.get_type_id(shell) != shapely.GeometryType.POLYGON:
            return shapely.difference(shell, shapely.disjoint_subset_union_all(merged[apart]))
    # All other voids lie inside and apart: their outlines are the holes, and what a ring of voids encloses is left
    # standing.
    rings, void = shapely.get_rings(merged[apart], return_index=True)
    outside = np.diff(void, prepend=-1) > 0
    holes = np.concatenate([shapely.get_rings(shell)[1:], rings[outside]])
    whole, inner = shapely.polygons(shapely.get_exterior_ring(shell), holes), rings[~outside]
    if not len(inner):
        return whole
    islands: Shapes = np.asarray(shapely.polygons(inner), dtype=np.object_)
    return shapely.MultiPolygon([whole, *islands.tolist()])


def _rings(rings: Sequence[Floats]) -> Shapes:
    if not rings:
        return np.empty(0, dtype=np.object_)
    of = np.repeat(np.arange(len(rings)), [len(ring) for ring in rings])
    return np.asarray(shapely.linearrings(np.concatenate(rings), indices=of), dtype=np.object_)
