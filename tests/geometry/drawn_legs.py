"""Legs drawn by hand for the tests of geometry: chains of lines, arcs, barrels and parts in series."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from pairrules.board.columns import Floats
from pairrules.geometry.pair_geometry import SERIES, TRACK, Pieces

Point = tuple[float, float]


def leg(
    *points: Point,
    kinds: Sequence[int] | None = None,
    layers: Sequence[int] | None = None,
    arcs: dict[int, tuple[Point, float]] | None = None,
    width: float = 0.2,
) -> Pieces:
    """A leg through `points`; piece i is an arc where `arcs` gives its centre and sweep."""
    at = np.array(points, dtype=np.float64)
    k = len(at) - 1
    centre, sweep = np.full((k, 2), np.nan), np.zeros(k)
    length = np.hypot(*(at[1:] - at[:-1]).T)
    for row, (middle, turn) in (arcs or {}).items():
        centre[row], sweep[row] = middle, turn
        length[row] = math.dist(points[row], middle) * abs(turn)
    kind = np.array(kinds if kinds is not None else [TRACK] * k)
    return Pieces(
        start=at[:-1],
        end=at[1:],
        centre=centre,
        sweep=sweep,
        width=np.where(kind == TRACK, width, np.nan),
        layer=np.array(layers if layers is not None else [0] * k),
        kind=kind,
        length=np.where(kind == SERIES, 0.0, length),
    )


def turned(pieces: Pieces, angle: float, shift: Point = (0.0, 0.0), *, mirror: bool = False) -> Pieces:
    """The leg mirrored in x, then turned about the origin, then moved."""
    turn = np.array([[math.cos(angle), -math.sin(angle)], [math.sin(angle), math.cos(angle)]])
    flip = np.array([-1.0 if mirror else 1.0, 1.0])

    def moved(points: Floats) -> Floats:
        placed: Floats = (points * flip) @ turn.T + np.array(shift)
        return placed

    return Pieces(
        start=moved(pieces.start),
        end=moved(pieces.end),
        centre=moved(pieces.centre),
        sweep=-pieces.sweep if mirror else pieces.sweep,
        width=pieces.width,
        layer=pieces.layer,
        kind=pieces.kind,
        length=pieces.length,
    )


def cut(pieces: Pieces, parts: int) -> Pieces:
    """The same leg with every piece cut into `parts` equal ones."""
    k = len(pieces)
    share = np.arange(parts + 1) / parts
    straight = pieces.start[:, None] * (1 - share)[:, None] + pieces.end[:, None] * share[:, None]
    spoke = pieces.start - pieces.centre
    angle = pieces.sweep[:, None] * share
    cos, sin = np.cos(angle), np.sin(angle)
    turn = np.stack([spoke[:, :1] * cos - spoke[:, 1:] * sin, spoke[:, :1] * sin + spoke[:, 1:] * cos], axis=-1)
    at = np.where((pieces.sweep != 0)[:, None, None], pieces.centre[:, None] + turn, straight)
    at[:, 0], at[:, -1] = pieces.start, pieces.end
    rows = np.repeat(np.arange(k), parts)
    return Pieces(
        start=at[:, :-1].reshape(-1, 2),
        end=at[:, 1:].reshape(-1, 2),
        centre=pieces.centre[rows],
        sweep=pieces.sweep[rows] / parts,
        width=pieces.width[rows],
        layer=pieces.layer[rows],
        kind=pieces.kind[rows],
        length=pieces.length[rows] / parts,
    )


def chords(pieces: Pieces, parts: int) -> Floats:
    """Corners (n, 2) of the leg with its arcs drawn as `parts` chords each."""
    corners = [pieces.start[:1]]
    for row in range(len(pieces)):
        fine = cut(_row(pieces, row), parts if pieces.sweep[row] else 1)
        corners.append(fine.end)
    return np.concatenate(corners)


def _row(pieces: Pieces, row: int) -> Pieces:
    names = ("start", "end", "centre", "sweep", "width", "layer", "kind", "length")
    return Pieces(**{name: getattr(pieces, name)[row : row + 1] for name in names})
