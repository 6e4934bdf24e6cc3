"""Outlines and routes as SVG path data: whole micrometres, y downward, relative steps, which keeps pages small."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from itertools import pairwise

from pairrules.drawing import DrawnPiece, DrawnShape, Point

Micrometres = tuple[int, int]

_CORNERS = 8
"""A regular outline of fewer corners than this may well be meant with them."""
_UNEVEN = 2.0
"""Thinned out corners leave chords up to so many times those of a regular outline."""
_SAME_MM = 0.001


def micrometres(at: Point) -> Micrometres:
    """A place of the board [mm] in the page's drawing units, whose y runs downward as SVG's does."""
    return round(at[0] * 1000), -round(at[1] * 1000)


def shapes_path(shapes: Iterable[DrawnShape]) -> str:
    """All outlines and holes as one path; to be filled by the even-odd rule."""
    return "".join(ring_path(ring) for shape in shapes for ring in (shape.outline, *shape.holes))


def ring_path(ring: Sequence[Point]) -> str:
    """A closed outline; a circle where it was flattened from one; "" where rounding leaves less than a triangle."""
    round_one = _circle(ring)
    if round_one:
        return round_one
    points = [micrometres(at) for at in ring]
    kept = [at for i, at in enumerate(points) if at != points[i - 1]]
    if len(set(kept)) < 3:
        return ""
    steps = [(b[0] - a[0], b[1] - a[1]) for a, b in pairwise(kept)]
    return f"M{_pair(kept[0])}l{_joined(steps)}z"


def route_paths(pieces: Iterable[DrawnPiece]) -> list[tuple[int, float, str]]:
    """Tracks and joins of a route as (layer, width [mm], path), one for each run of one layer and width.

    Joins inside pads and areas have no width of their own and are given as 0.
    """
    found: list[tuple[int, float, str]] = []
    last: Micrometres | None = None
    for piece in pieces:
        if piece.kind not in {"track", "join"}:
            last = None
            continue
        start, end = micrometres(piece.start), micrometres(piece.end)
        style = (piece.layer, piece.width_mm or 0.0)
        step = _arc(piece, start, end) if piece.centre is not None and piece.sweep_rad else _line(start, end)
        if found and last == start and found[-1][:2] == style:
            found[-1] = (*style, found[-1][2] + step)
        else:
            found.append((*style, f"M{_pair(start)}{step}"))
        last = end
    return found


def _circle(ring: Sequence[Point]) -> str:
    """A circle where all corners lie on one and leave no gap on it greater than a flattened circle has; else ""."""
    if len(ring) < _CORNERS:
        return ""
    xs, ys = [x for x, _ in ring], [y for _, y in ring]
    centre = ((min(xs) + max(xs)) / 2, (min(ys) + max(ys)) / 2)
    radii = [math.dist(corner, centre) for corner in ring]
    radius = max(radii)
    if radius - min(radii) > _SAME_MM:
        return ""
    longest = 2 * radius * math.sin(math.pi / _CORNERS * _UNEVEN)
    if any(math.dist(ring[i - 1], corner) > longest for i, corner in enumerate(ring)):
        return ""
    size = round(radius * 1000)
    x, y = micrometres(centre)
    return f"M{x - size} {y}a{size} {size} 0 1 0 {2 * size} 0a{size} {size} 0 1 0 {-2 * size} 0z"


def _line(start: Micrometres, end: Micrometres) -> str:
    return f"l{_pair((end[0] - start[0], end[1] - start[1]))}"


def _arc(piece: DrawnPiece, start: Micrometres, end: Micrometres) -> str:
    """An elliptical arc command. Its sweep flag is 1 where the arc turns clockwise on the screen.

    Source: W3C, Scalable Vector Graphics 1.1 (second edition), 8.3.8. An arc of more than half a turn is drawn as two,
    as a whole turn has no ends to be told by.
    """
    assert piece.centre is not None
    centre, sweep = micrometres(piece.centre), piece.sweep_rad
    radius = max(round(math.dist(piece.start, piece.centre) * 1000), 1)
    flag = 0 if sweep > 0 else 1
    stops = [end]
    if abs(sweep) > math.pi:
        half = math.atan2(piece.start[1] - piece.centre[1], piece.start[0] - piece.centre[0]) + sweep / 2
        middle = (centre[0] + round(radius * math.cos(half)), centre[1] - round(radius * math.sin(half)))
        stops = [middle, end]
    text, at = "", start
    for stop in stops:
        text += f"a{radius} {radius} 0 0 {flag} {_pair((stop[0] - at[0], stop[1] - at[1]))}"
        at = stop
    return text


def _pair(at: Micrometres) -> str:
    return f"{at[0]} {at[1]}"


def _joined(steps: Iterable[Micrometres]) -> str:
    return " ".join(_pair(step) for step in steps)
