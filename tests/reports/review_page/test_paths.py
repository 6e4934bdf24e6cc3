"""Outlines and routes as SVG path data, read back and held against the places they were made from."""

from __future__ import annotations

import math
import re

import pytest

from pairrules.drawing import DrawnPiece, DrawnShape, Point
from pairrules.reports.review_page.paths import micrometres, ring_path, route_paths, shapes_path

SQUARE = ((0.0, 0.0), (1.0, 0.0), (1.0, 2.0), (0.0, 2.0))


def piece(
    start: Point, end: Point, centre: Point | None = None, sweep: float = 0.0, *, kind: str = "track", layer: int = 0
) -> DrawnPiece:
    return DrawnPiece(
        kind=kind,
        start=start,
        end=end,
        centre=centre,
        sweep_rad=sweep,
        width_mm=0.2 if kind == "track" else None,
        layer=layer,
        length_mm=1.0,
        along_mm=0.0,
    )


def stops(path: str) -> list[tuple[int, int]]:
    """The ends of a path's steps, absolute."""
    found: list[tuple[int, int]] = []
    for command, text in re.findall(r"([Mlaz])([^Mlaz]*)", path):
        numbers = [int(number) for number in text.split()]
        size = {"M": 2, "l": 2, "a": 7, "z": 1}[command]
        for i in range(0, len(numbers), size):
            dx, dy = numbers[i + size - 2 : i + size]
            found.append((dx, dy) if command == "M" else (found[-1][0] + dx, found[-1][1] + dy))
    return found


def test_y_runs_downward_in_micrometres() -> None:
    assert micrometres((1.5, 2.0)) == (1500, -2000)


def test_an_outline_passes_its_corners_and_closes() -> None:
    path = ring_path(SQUARE)
    assert stops(path) == [(0, 0), (1000, 0), (1000, -2000), (0, -2000)] and path.endswith("z")


def test_holes_follow_their_outline() -> None:
    hole = ((0.2, 0.2), (0.2, 0.4), (0.4, 0.4))
    path = shapes_path((DrawnShape(outline=SQUARE, holes=(hole,)),))
    assert path == ring_path(SQUARE) + ring_path(hole)


@pytest.mark.parametrize("ring", [(), ((0.0, 0.0),) * 3, ((0.0, 0.0), (1.0, 0.0), (0.0, 0.0))])
def test_what_encloses_nothing_is_no_path(ring: tuple[Point, ...]) -> None:
    assert ring_path(ring) == ""


def test_pieces_that_follow_one_another_are_one_path() -> None:
    route = [
        piece((0, 0), (1, 0)),
        piece((1, 0), (1, 1)),
        piece((1, 1), (1, 2), layer=1),
        piece((5, 5), (6, 5), layer=1),
    ]
    found = route_paths(route)
    assert [(layer, width, stops(path)) for layer, width, path in found] == [
        (0, 0.2, [(0, 0), (1000, 0), (1000, -1000)]),
        (1, 0.2, [(1000, -1000), (1000, -2000)]),
        (1, 0.2, [(5000, -5000), (6000, -5000)]),
    ]


def test_barrels_and_parts_in_series_draw_nothing_and_break_the_line() -> None:
    route = [piece((0, 0), (1, 0)), piece((1, 0), (1, 0), kind="barrel"), piece((1, 0), (2, 0))]
    assert [stops(path) for _, _, path in route_paths(route)] == [[(0, 0), (1000, 0)], [(1000, 0), (2000, 0)]]


def test_an_arc_counter_clockwise_from_above_is_counter_clockwise_on_the_screen() -> None:
    # SVG's sweep flag is 1 for the direction of positive angles, which is clockwise where y runs downward.
    (left,) = route_paths([piece((1, 0), (0, 1), (0, 0), math.pi / 2)])
    (right,) = route_paths([piece((0, 1), (1, 0), (0, 0), -math.pi / 2)])
    assert left[2] == "M1000 0a1000 1000 0 0 0 -1000 -1000"
    assert right[2] == "M0 -1000a1000 1000 0 0 1 1000 1000"


@pytest.mark.parametrize("sweep", [1.5 * math.pi, -1.5 * math.pi, 2 * math.pi])
def test_more_than_half_a_turn_is_drawn_in_two_about_its_middle(sweep: float) -> None:
    end = (math.cos(sweep), math.sin(sweep))
    (arc,) = route_paths([piece((1, 0), end, (0, 0), sweep)])
    middle = (round(1000 * math.cos(sweep / 2)), -round(1000 * math.sin(sweep / 2)))
    assert stops(arc[2]) == [(1000, 0), middle, (round(1000 * end[0]), -round(1000 * end[1]))]


def round_ring(radius: float, corners: int, stretched: float = 1.0) -> tuple[Point, ...]:
    turns = [2 * math.pi * k / corners for k in range(corners)]
    return tuple((3 + radius * math.cos(turn), 4 + stretched * radius * math.sin(turn)) for turn in turns)


def test_a_flattened_circle_is_a_circle() -> None:
    assert ring_path(round_ring(0.3, 64)) == "M2700 -4000a300 300 0 1 0 600 0a300 300 0 1 0 -600 0z"
    assert ring_path(round_ring(0.3, 16)).count("a") == 2


@pytest.mark.parametrize(
    "ring",
    [round_ring(0.3, 6), round_ring(0.3, 64, stretched=1.02), round_ring(0.3, 64)[:40], SQUARE],
    ids=["hexagon", "ellipse", "segment", "square"],
)
def test_what_is_no_circle_keeps_its_corners(ring: tuple[Point, ...]) -> None:
    path = ring_path(ring)
    assert "a" not in path and len(stops(path)) == len(ring)
