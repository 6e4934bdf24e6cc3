"""Outlines that cross themselves too often are told from those that only cross themselves, or have many corners."""

from __future__ import annotations

import math

import numpy as np
import pytest
import shapely

from pairrules.board.columns import Floats
from pairrules.board.knots import MOST_CROSSINGS, crowded, knotted


def star(corners: int) -> Floats:
    """An odd number of corners, each joined to the two farthest: corners · (corners - 3) / 2 crossings."""
    turns = 2 * math.pi * (corners // 2) * np.arange(corners) / corners
    return np.column_stack([np.cos(turns), np.sin(turns)])


def circle(corners: int) -> Floats:
    turns = 2 * math.pi * np.arange(corners) / corners
    return np.column_stack([np.cos(turns), np.sin(turns)])


def test_a_few_crossings_are_borne() -> None:
    corners = 33
    assert corners * (corners - 3) // 2 <= MOST_CROSSINGS
    assert knotted([circle(40), star(corners)]) == -1


def test_too_many_crossings_of_one_outline() -> None:
    corners = 35
    assert corners * (corners - 3) // 2 > MOST_CROSSINGS
    assert knotted([circle(40), star(corners), star(corners)]) == 1


def test_too_many_crossings_of_all_together() -> None:
    each = 11 * (11 - 3) // 2
    borne = MOST_CROSSINGS // each
    assert knotted([star(11)] * borne) == -1
    assert knotted([star(11)] * (borne + 1)) == borne


@pytest.mark.parametrize("corners", [5, 7])
def test_outlines_that_cross_themselves_a_little_are_borne_in_any_number(corners: int) -> None:
    assert knotted([star(corners)] * 5000) == -1


def test_corners_alone_are_no_crossings() -> None:
    assert knotted([circle(100_000)]) == -1
    slip = circle(20_000)
    slip[[100, 110]] = slip[[110, 100]]
    assert not shapely.is_valid(shapely.Polygon(slip))
    assert knotted([slip]) == -1


def test_shapes_upon_one_another() -> None:
    apart = [shapely.box(x, 0, x + 1.5, 1) for x in range(20_000)]
    assert not crowded(apart)
    assert crowded([shapely.box(0, 0, 1, 1)] * 500)
    assert not crowded([shapely.box(0, 0, 1, 1)] * 400)
