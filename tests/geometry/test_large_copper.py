"""Planes with many voids: made valid, cut into tiles and searched in runs without becoming another shape."""

from __future__ import annotations

import math

import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from pairrules.board import Area
from pairrules.geometry.area_polygons import area_polygon
from pairrules.geometry.area_tiles import CORNERS, tiles
from pairrules.geometry.ring_runs import RUN, ring_runs

SQUARE = np.array([[0.0, 0.0], [40.0, 0.0], [40.0, 30.0], [0.0, 30.0]])


def void(x: float, y: float, radius: float = 0.4, corners: int = 24) -> np.ndarray:
    turns = 2 * math.pi * np.arange(corners) / corners
    return np.column_stack([x + radius * np.cos(turns), y + radius * np.sin(turns)])


def plane(*voids: np.ndarray, outline: np.ndarray = SQUARE) -> shapely.Geometry:
    return area_polygon(Area(net=0, layer=0, outline=outline, holes=voids))


def less(*voids: np.ndarray, outline: np.ndarray = SQUARE) -> shapely.Geometry:
    """What the drawing means, by other means: the outline less every void."""
    left: shapely.Geometry = shapely.Polygon(outline)
    for one in voids:
        left = left.difference(shapely.Polygon(one))
    return left


@pytest.mark.parametrize(
    "voids",
    [
        (),
        (void(5, 5), void(10, 10)),
        (void(5, 5), void(5.5, 5)),  # overlapping: what lies in both is no copper either
        (void(5, 5), void(5.1, 5), void(5.2, 5.1), void(9, 9)),
        (void(0.2, 5), void(10, 10)),  # over the outline
        (void(20, 15, 1), void(20, 15, 0.5)),  # one in another
        tuple(void(20 + 2 * math.cos(t), 15 + 2 * math.sin(t), 0.5) for t in np.arange(16) * math.pi / 8),  # a ring
    ],
)
def test_voids_are_taken_away_however_they_lie(voids: tuple[np.ndarray, ...]) -> None:
    made = plane(*voids)
    assert made.is_valid
    assert made.symmetric_difference(less(*voids)).area == pytest.approx(0.0, abs=1e-9)


def test_what_a_ring_of_voids_encloses_is_left_standing() -> None:
    ring = [void(20 + 2 * math.cos(t), 15 + 2 * math.sin(t), 0.5) for t in np.arange(16) * math.pi / 8]
    parts = shapely.get_parts(plane(*ring))
    assert len(parts) == 2
    assert math.pi * 1.5**2 < min(part.area for part in parts) < math.pi * 2**2


@given(st.lists(st.tuples(st.floats(-1, 41), st.floats(-1, 31), st.floats(0.2, 3)), min_size=20, max_size=60))
def test_tiles_cover_what_the_polygon_covers(places: list[tuple[float, float, float]]) -> None:
    made = plane(*(void(*place) for place in places))
    for part in shapely.get_parts(made):
        pieces = tiles(part)
        assert shapely.is_valid(pieces).all()
        assert sum(piece.area for piece in pieces) == pytest.approx(part.area, rel=1e-9)
        assert shapely.union_all(pieces).symmetric_difference(part).area == pytest.approx(0.0, abs=1e-7)


def test_tiles_are_small_where_the_polygon_is_not() -> None:
    grid = [void(x, y) for x in range(1, 40) for y in range(1, 30)]
    whole = plane(*grid)
    assert shapely.get_num_coordinates(whole) > 50 * CORNERS
    assert shapely.get_num_coordinates(tiles(whole)).max() < 4 * CORNERS
    assert len(tiles(shapely.box(0, 0, 1, 1))) == 1


@given(
    st.lists(st.tuples(st.floats(0, 10), st.floats(0, 10), st.floats(0.1, 2), st.integers(3, 40)), max_size=8),
    st.lists(st.tuples(st.floats(-2, 12), st.floats(-2, 12), st.floats(-2, 12), st.floats(-2, 12)), min_size=1),
    st.floats(0, 3),
)
def test_runs_find_every_edge_that_is_near(
    places: list[tuple[float, float, float, int]], ends: list[tuple[float, float, float, float]], reach: float
) -> None:
    rings = np.array([shapely.LinearRing(void(*place)) for place in places], dtype=object)
    lines = np.array([shapely.LineString([end[:2], end[2:]]) for end in ends], dtype=object)
    runs = ring_runs(rings)
    edges = [
        shapely.LineString(pair)
        for ring in rings
        for pair in zip(ring.coords[:-1], ring.coords[1:], strict=True)
        if pair[0] != pair[1]
    ]
    assert len(runs.edges) == len(edges)
    assert np.diff(runs.first).max(initial=0) <= RUN
    found = set(zip(*(column.tolist() for column in runs.near(lines, reach)), strict=True))
    true = {(i, k) for i, line in enumerate(lines) for k, edge in enumerate(edges) if line.distance(edge) <= reach}
    assert true <= found
    least = [min((line.distance(edge) for edge in edges), default=math.nan) for line in lines]
    assert runs.nearest(lines) == pytest.approx(least, abs=1e-9, nan_ok=True)
