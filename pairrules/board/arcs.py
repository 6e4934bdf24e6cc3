"""Arcs of a circle: their sweep, their points, their flattening."""

from __future__ import annotations

import math
from functools import lru_cache

import numpy as np

from pairrules.board.columns import Floats

FLATTENING_MM = 0.0005
"""Greatest distance of a flattened outline from its true arc; below any fabrication tolerance by two orders."""


def sweep(
    start: tuple[float, float], end: tuple[float, float], centre: tuple[float, float], *, clockwise: bool
) -> float:
    """Signed angle [rad] from start to end about the centre, positive counter-clockwise.

    Start and end at the same place mean a full turn, as both IPC-2581 and plain JSON use it.
    """
    first = math.atan2(start[1] - centre[1], start[0] - centre[0])
    last = math.atan2(end[1] - centre[1], end[0] - centre[0])
    turn = (first - last if clockwise else last - first) % (2 * math.pi)
    if turn == 0.0 or (start[0] == end[0] and start[1] == end[1]):
        turn = 2 * math.pi
    return -turn if clockwise else turn


def chords_of(radius: float, angle: float, *, within: float = FLATTENING_MM) -> int:
    """Into how many chords an arc is flattened."""
    steps = 4 if radius <= within else math.ceil(abs(angle) / (2 * math.acos(1 - within / radius)))
    return max(steps, 1)


def flatten(
    start: tuple[float, float], centre: tuple[float, float], angle: float, *, within: float = FLATTENING_MM
) -> Floats:
    """Points (n, 2) along an arc, start excluded and end included, chords at most `within` [mm] from the arc.

    Source: sagitta r(1 − cos(θ/2)) of a chord of angle θ (elementary geometry).
    """
    dx, dy = start[0] - centre[0], start[1] - centre[1]
    steps = chords_of(math.hypot(dx, dy), angle, within=within)
    cos, sin = _turned(angle, steps)
    points = np.empty((steps, 2))
    points[:, 0] = centre[0] + dx * cos - dy * sin
    points[:, 1] = centre[1] + dx * sin + dy * cos
    return points


@lru_cache(maxsize=256)
def _turned(angle: float, steps: int) -> tuple[Floats, Floats]:
    """Cosines and sines of the steps to an angle; few angles come up thousands of times, half a turn above all."""
    turns = angle * np.arange(1, steps + 1) / steps
    return np.cos(turns), np.sin(turns)
