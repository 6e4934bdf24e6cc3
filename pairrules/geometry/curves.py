"""Straight and round pieces of a centre line, many at once: points, directions, lengths, nearest points, parts.

A piece is given by `start`, `end`, `centre` (NaN where straight) and `sweep` (0 where straight), as in `Tracks`. Its
parameter t runs from 0 at the start to 1 at the end, in proportion to length. Arcs are never replaced by chords.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from pairrules.board.columns import Floats, Ints


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Curves:
    """k pieces. start, end, centre: (k, 2) [mm]; sweep: (k,) [rad]."""

    start: Floats
    end: Floats
    centre: Floats
    sweep: Floats

    def __len__(self) -> int:
        return len(self.sweep)

    def take(self, rows: Ints | npt.NDArray[np.bool_]) -> Curves:
        """The pieces of the given rows."""
        some = np.flatnonzero(rows) if rows.dtype == np.bool_ else rows
        # `take` along rows of two is an order of magnitude faster than indexing.
        return Curves(
            start=self.start.take(some, axis=0),
            end=self.end.take(some, axis=0),
            centre=self.centre.take(some, axis=0),
            sweep=self.sweep.take(some),
        )


def lengths(curves: Curves) -> Floats:
    """Length [mm] of each piece; of an arc |sweep| times the mean of its radii at both ends."""
    chord = np.hypot(*(curves.end - curves.start).T)
    return np.where(curves.sweep == 0.0, chord, np.abs(curves.sweep) * _radius(curves))


def points(curves: Curves, t: Floats) -> Floats:
    """The point (k, 2) at parameter t (k,) of each piece; t = 0 and 1 give the stored ends exactly."""
    found = curves.start + (curves.end - curves.start) * t[:, None]
    rows = np.flatnonzero(curves.sweep)
    if len(rows):
        arcs, share = curves.take(rows), t.take(rows)
        x, y = (arcs.start - arcs.centre).T
        angle = arcs.sweep * share
        cos, sin, full_cos, full_sin = np.cos(angle), np.sin(angle), np.cos(arcs.sweep), np.sin(arcs.sweep)
        # A written arc's radii at both ends may differ in the last digit; the difference is spread along it.
        off = arcs.end - arcs.centre
        off_x, off_y = off[:, 0] - (x * full_cos - y * full_sin), off[:, 1] - (x * full_sin + y * full_cos)
        found[:, 0][rows] = arcs.centre[:, 0] + (x * cos - y * sin) + off_x * share
        found[:, 1][rows] = arcs.centre[:, 1] + (x * sin + y * cos) + off_y * share
    ends = np.flatnonzero(t == 1.0)
    found[:, 0][ends], found[:, 1][ends] = curves.end[:, 0].take(ends), curves.end[:, 1].take(ends)
    return found


def directions(curves: Curves, t: Floats) -> Floats:
    """Direction [rad] of travel at parameter t of each piece."""
    chord = curves.end - curves.start
    angle = np.arctan2(chord[:, 1], chord[:, 0])
    arc = curves.sweep != 0.0
    if arc.any():
        radial = curves.start[arc] - curves.centre[arc]
        sweep = curves.sweep[arc]
        angle[arc] = np.arctan2(radial[:, 1], radial[:, 0]) + sweep * t[arc] + np.copysign(np.pi / 2, sweep)
    return angle


def nearest(curves: Curves, at: Floats) -> tuple[Floats, Floats]:
    """Where each piece comes nearest to its point `at` (k, 2): parameter t (k,) and distance (k,) [mm].

    Source: foot of the perpendicular; for an arc the foot lies on the ray from its centre (elementary geometry).
    """
    (x, y), (away_x, away_y) = (curves.end - curves.start).T, (at - curves.start).T
    square = x * x + y * y
    t = np.minimum(np.maximum((away_x * x + away_y * y) / np.where(square > 0.0, square, 1.0), 0.0), 1.0)
    distance = np.hypot(away_x - x * t, away_y - y * t)
    arc = np.flatnonzero(curves.sweep != 0.0)
    if len(arc):
        t[arc], distance[arc] = _nearest_on_arc(curves.take(arc), at.take(arc, axis=0))
    return t, distance


def parts(curves: Curves, rows: Ints, t_from: Floats, t_to: Floats) -> Curves:
    """The stretch from `t_from` to `t_to` of the piece in each of `rows`."""
    of = curves.take(rows)
    return Curves(
        start=points(of, t_from),
        end=points(of, t_to),
        centre=of.centre,
        sweep=np.where(of.sweep == 0.0, 0.0, of.sweep * (t_to - t_from)),
    )


def chords(curves: Curves, *, within: float) -> tuple[Floats, Ints]:
    """Each piece as a run of points, for searching: points (n, 2) and the piece (n,) each belongs to.

    `within`: greatest distance [mm] of a chord from its arc.
    """
    radius = np.where(curves.sweep == 0.0, 0.0, _radius(curves))
    half = np.arccos(np.clip(1.0 - within / np.maximum(radius, within), -1.0, 1.0))
    steps = np.where(curves.sweep == 0.0, 1, np.maximum(np.ceil(np.abs(curves.sweep) / (2 * half)), 2)).astype(np.int64)
    rows = np.repeat(np.arange(len(curves)), steps + 1)
    first = np.cumsum(steps + 1) - (steps + 1)
    t = (np.arange(len(rows)) - first[rows]) / steps[rows]
    return points(curves.take(rows), t), rows


def _radius(curves: Curves) -> Floats:
    first = np.hypot(*(curves.start - curves.centre).T)
    last = np.hypot(*(curves.end - curves.centre).T)
    return np.where(curves.sweep == 0.0, 0.0, (first + last) / 2)


def _nearest_on_arc(arcs: Curves, at: Floats) -> tuple[Floats, Floats]:
    radial, offset = arcs.start - arcs.centre, at - arcs.centre
    cross = radial[:, 0] * offset[:, 1] - radial[:, 1] * offset[:, 0]
    dot = radial[:, 0] * offset[:, 0] + radial[:, 1] * offset[:, 1]
    turn = np.arctan2(cross, dot) * np.sign(arcs.sweep)
    turn = np.where(turn < 0.0, turn + 2 * np.pi, turn)
    full = np.abs(arcs.sweep)
    inside = np.clip(turn / full, 0.0, 1.0)
    within = turn <= full
    to_start, to_end = np.hypot(*(at - arcs.start).T), np.hypot(*(at - arcs.end).T)
    # On the arc itself the distance to the circle is exact where the difference of points would lose digits.
    best, t = to_start, np.zeros(len(arcs))
    ahead = to_end < best
    best, t = np.where(ahead, to_end, best), np.where(ahead, 1.0, t)
    across = np.abs(np.hypot(offset[:, 0], offset[:, 1]) - _radius(arcs))
    ahead = within & (across <= best)
    return np.where(ahead, inside, t), np.where(ahead, across, best)
