"""A leg's tracks as one line: the point at a track length, and the track length nearest to a point."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.board.columns import Floats, Ints
from pairrules.geometry.curves import Curves, directions, nearest, points
from pairrules.geometry.pair_geometry import TRACK, Pieces


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LegLine:
    """The tracks of one leg.

    Parameters: curves: the pieces in order. s_from, length: (k,) [mm] track length up to each piece, and its own.
    layer: (k,) index into `Board.copper`.
    """

    curves: Curves
    s_from: Floats
    length: Floats
    layer: Ints

    def at(self, s: Floats) -> tuple[Floats, Floats, Ints]:
        """Points (n, 2) [mm], unit directions (n, 2) of travel and layers (n,) at track lengths s (n,) [mm]."""
        row = np.clip(np.searchsorted(self.s_from, s, side="right") - 1, 0, len(self.s_from) - 1)
        t = np.clip((s - self.s_from[row]) / self.length[row], 0.0, 1.0)
        curves = self.curves.take(row)
        angle = directions(curves, t)
        return points(curves, t), np.column_stack([np.cos(angle), np.sin(angle)]), self.layer[row]

    def facing(self, at: Floats, layer: Ints) -> Floats:
        """Track length (n,) [mm] of the place nearest to each point (n, 2) on the same layer; NaN where it has none."""
        n, k = len(at), len(self.s_from)
        piece, point = np.tile(np.arange(k), n), np.repeat(np.arange(n), k)
        t, away = nearest(self.curves.take(piece), at[point])
        away = np.where(self.layer[piece] == layer[point], away, np.inf).reshape(n, k)
        best = np.argmin(away, axis=1)
        every = np.arange(n)
        s = self.s_from[best] + t.reshape(n, k)[every, best] * self.length[best]
        found: Floats = np.where(np.isinf(away[every, best]), np.nan, s)
        return found


def leg_line(pieces: Pieces) -> LegLine | None:
    """The line of a leg; `None` where it has no track."""
    rows = np.flatnonzero((pieces.kind == TRACK) & (pieces.length > 0))
    if not len(rows):
        return None
    length = pieces.length[rows]
    curves = Curves(start=pieces.start, end=pieces.end, centre=pieces.centre, sweep=pieces.sweep).take(rows)
    return LegLine(curves=curves, s_from=np.cumsum(length) - length, length=length, layer=pieces.layer[rows])
