"""Areas with voids that overlap, reach over the edge or enclose copper, against shapely's plain difference."""

from __future__ import annotations

import numpy as np
import pytest
import shapely

from pairrules.board.areas import Area
from pairrules.board.columns import Floats
from pairrules.geometry.area_polygons import area_polygon

EDGE = [(0, 0), (40, 0), (40, 30), (0, 30)]


def ring(x: float, y: float, radius: float, corners: int = 16) -> Floats:
    turns = 2 * np.pi * np.arange(corners) / corners
    return np.column_stack([x + radius * np.cos(turns), y + radius * np.sin(turns)])


def square(x0: float, y0: float, x1: float, y1: float) -> Floats:
    return np.array([(x0, y0), (x1, y0), (x1, y1), (x0, y1)])


def area(holes: list[Floats], outline: object = EDGE) -> Area:
    return Area(net=0, layer=0, outline=np.array(outline, dtype=np.float64), holes=tuple(holes))


def plain(one: Area) -> shapely.Geometry:
    """The outline less the union of all voids."""
    return shapely.make_valid(shapely.Polygon(one.outline)).difference(
        shapely.union_all([shapely.make_valid(shapely.Polygon(hole)) for hole in one.holes])
    )


FRAME = [square(5, 5, 15, 6), square(5, 14, 15, 15), square(5, 5, 6, 15), square(14, 5, 15, 15)]
VOIDS = {
    "apart": [ring(5, 5, 1), ring(20, 20, 1)],
    "overlapping": [ring(5, 5, 1), ring(6, 5, 1), ring(20, 20, 1)],
    "over the edge": [ring(0.5, 5, 1), ring(1.5, 5, 1), ring(20, 20, 1), ring(20.5, 20, 1)],
    "over a corner": [ring(40, 30, 2), ring(20, 20, 1), ring(20.5, 20, 1)],
    "touching the edge": [square(0, 10, 2, 12), ring(20, 20, 1), ring(20.5, 20, 1)],
    "round an island": [*FRAME, ring(30, 20, 1), ring(39.5, 20, 1)],
    "that cut the area in two": [square(19, -1, 21, 31), ring(5, 5, 1), ring(6, 5, 1)],
    "all of it": [square(-1, -1, 41, 31)],
    "outside": [ring(60, 5, 1), ring(5, 5, 1)],
}


@pytest.mark.parametrize("name", VOIDS)
def test_voids(name: str) -> None:
    one = area(VOIDS[name])
    found, wanted = area_polygon(one), plain(one)
    assert shapely.is_valid(found)
    assert found.symmetric_difference(wanted).area < 1e-9
    assert found.area == pytest.approx(wanted.area, abs=1e-9)


def test_many_voids_at_random() -> None:
    drawn = np.random.default_rng(7)
    for _ in range(30):
        at, size = drawn.uniform(-1, 41, (60, 2)), drawn.uniform(0.3, 2.0, 60)
        one = area([ring(x, y, radius) for (x, y), radius in zip(at.tolist(), size.tolist(), strict=True)])
        assert area_polygon(one).symmetric_difference(plain(one)).area < 1e-9
