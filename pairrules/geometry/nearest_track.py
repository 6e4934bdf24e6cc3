"""The nearest track of the other leg, for many points of this leg at once."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt
import shapely

from pairrules.board.columns import Floats, Ints
from pairrules.geometry.curves import Curves, chords, directions, lengths, nearest, points
from pairrules.geometry.pair_geometry import TRACK, Pieces

COUPLED_TURN = math.radians(30.0)
"""Legs turned less than this to each other run side by side."""

TIE_MM = 1e-7
"""Pieces whose distances differ by less are equally near."""

_GUESSES = 10
_EQUAL_MM = 1e-12
_SEARCH_MM = 0.001


@dataclass(frozen=True, slots=True)
class Nearest:
    """What is nearest to each of n points: candidate row, feature (0 start, 1 inside, 2 end), gap, angle, coupled."""

    other: Ints
    feature: Ints
    gap: Floats
    angle: Floats
    coupled: npt.NDArray[np.bool_]

    def label(self) -> Ints:
        """A number for each point, the same where the same part of the same piece is nearest and as coupled."""
        return self.other * 8 + self.feature * 2 + self.coupled


class NearestTrack:
    """Nearest track of the other leg, for points on pieces of this leg."""

    def __init__(self, own: Pieces, own_pair: Ints, other: Pieces, other_pair: Ints) -> None:
        """own, other: pieces of this leg and of the other, of many pairs at once. own_pair, other_pair: of which."""
        self._own = curves_of(own)
        self._other = curves_of(other)
        self._half = own.width / 2
        self._other_half = other.width / 2
        self._reach = np.full(len(own), np.inf)
        self.length = own.length
        tracks = np.flatnonzero(other.kind == TRACK)
        layers = 1 + max(int(one.layer.max(initial=0)) for one in (own, other))
        levels = (own_pair * layers + own.layer, other_pair * layers + other.layer)
        first, second = _candidates(self._own, levels[0], self._other, levels[1], self._other_half, tracks)
        order = np.lexsort((second, first))
        self._pairs = second[order]
        self._offset = np.searchsorted(first[order], np.arange(len(own) + 1))
        self._pair_own = first[order]

    def straight(self, rows: Ints, label: Ints) -> npt.NDArray[np.bool_]:
        """Whether the gap runs straight near points on pieces `rows` (n,): between the insides of straight pieces."""
        other, feature = label // 8, label % 8 // 2
        flat = (self._own.sweep[rows] == 0.0) & (self._other.sweep[other] == 0.0)
        inside: npt.NDArray[np.bool_] = (other >= 0) & (feature == 1) & flat
        return inside

    def reach_out(self, reach: Floats) -> None:
        """From now on each piece of this leg counts as beside the other within its `reach` (k,)."""
        self._reach = reach

    def within_reach(self, rows: Ints, found: Nearest) -> Nearest:
        """What was found for points on pieces `rows` (n,), judged by the reach that holds now."""
        return replace(found, coupled=(found.gap <= self._reach[rows]) & (found.angle < COUPLED_TURN))

    def pairs(self) -> tuple[Ints, Ints]:
        """All candidate pairs: row of this leg, row of the other."""
        return self._pair_own, self._pairs

    def at(self, rows: Ints, t: Floats) -> Nearest:
        """What is nearest to the points at parameter t (n,) of this leg's pieces `rows` (n,)."""
        count = self._offset[rows + 1] - self._offset[rows]
        none = count == 0
        owner = np.repeat(np.arange(len(rows)), count)
        within = np.arange(len(owner)) - np.repeat(np.cumsum(count) - count, count)
        candidate = self._pairs[self._offset[rows][owner] + within]
        if not len(candidate):
            unknown = np.full(len(rows), np.nan)
            nothing = np.zeros(len(rows), dtype=np.int64)
            return Nearest(nothing - 1, nothing, unknown, unknown, np.zeros(len(rows), dtype=np.bool_))
        own = self._own.take(rows)
        foot, away = nearest(self._other.take(candidate), points(own, t).take(owner, axis=0))
        gap = away - self._half[rows][owner] - self._other_half[candidate]
        least = np.full(len(rows), np.nan)
        least[~none] = np.minimum.reduceat(gap, (np.cumsum(count) - count)[~none])
        tied = np.flatnonzero(gap <= least[owner] + TIE_MM)
        heading = directions(own, t)[owner[tied]]
        turn = np.abs(
            (directions(self._other.take(candidate[tied]), foot[tied]) - heading + np.pi / 2) % np.pi - np.pi / 2
        )
        # Of pieces equally near (both at a bend) the one that runs more nearly alongside counts, then the first.
        begins = np.flatnonzero(np.r_[True, owner[tied][1:] != owner[tied][:-1]])
        rank = np.round(turn, 9)
        lowest = np.minimum.reduceat(rank, begins)
        best = np.flatnonzero(rank == np.repeat(lowest, np.diff(np.append(begins, len(tied)))))
        best = best[np.r_[True, owner[tied[best]][1:] != owner[tied[best]][:-1]]]
        pick = tied[best]
        other, feature = np.full(len(rows), -1), np.zeros(len(rows), dtype=np.int64)
        angle = np.full(len(rows), np.nan)
        other[~none], angle[~none] = candidate[pick], turn[best]
        feature[~none] = np.where(foot[pick] <= 0.0, 0, np.where(foot[pick] >= 1.0, 2, 1))
        # Where there is none both are NaN, which is within nothing.
        coupled = (least <= self._reach[rows]) & (angle < COUPLED_TURN)
        return Nearest(other, feature, least, angle, coupled)

    def gap_to(self, other: Ints, rows: Ints, t: Floats) -> Floats:
        """Gap (n,) from the points at parameter t of this leg's pieces `rows` to given pieces of the other leg.

        NaN where `other` is −1.
        """
        some = np.maximum(other, 0)
        _, away = nearest(self._other.take(some), points(self._own.take(rows), t))
        gap: Floats = np.where(other < 0, np.nan, away - self._half[rows] - self._other_half[some])
        return gap

    def equal(self, rows: Ints, left: Floats, right: Floats, one: Ints, two: Ints) -> tuple[Ints, Floats]:
        """Places between two parameters where pieces `one` and `two` of the other leg change places as the nearest.

        Or, where they are the same, where it passes the reach. Guesses: another piece may be nearer there.

        Source: false position with the Illinois change (Dowell and Jarratt, BIT 11, 1971), from memory.
        """
        same = one == two
        # Where there is no track of the other leg, nothing is guessed.
        known = np.flatnonzero((one >= 0) & (two >= 0) & (~same | np.isfinite(self._reach[rows])))
        # The one that runs more nearly alongside counts as long as both are as good as equally near.
        known, more = np.tile(known, 2), np.repeat([-TIE_MM, TIE_MM], len(known))
        rows, one, two, same = rows[known], one[known], two[known], same[known]
        a, b, own, more = left[known], right[known], self._own.take(rows), np.where(same, 0.0, more)

        both = self._other.take(np.concatenate([one, two]))
        half = (
            self._other_half[one] + more + np.where(same, self._reach[rows] + self._half[rows], -self._other_half[two])
        )

        def apart(t: Floats) -> Floats:
            far = nearest(both, np.tile(points(own, t), (2, 1)))[1].reshape(2, -1)
            more_by: Floats = far[0] - half - np.where(same, 0.0, far[1])
            return more_by

        at_a, at_b = apart(a), apart(b)
        crosses = at_a * at_b < 0
        for _ in range(_GUESSES):
            settled = ~crosses | (np.abs(at_b) < _EQUAL_MM)
            if settled.all():
                break
            steep = at_b - at_a
            t = np.where(steep == 0.0, (a + b) / 2, b - at_b * (b - a) / np.where(steep == 0.0, 1.0, steep))
            t = np.where(settled, b, t)
            at_t = apart(t)
            turned = at_t * at_b < 0
            a, at_a = np.where(turned, b, a), np.where(turned, at_b, at_a / 2)
            b, at_b = t, at_t
        return rows[crosses], b[crosses]


def curves_of(pieces: Pieces) -> Curves:
    """The centre lines of a route's pieces."""
    return Curves(start=pieces.start, end=pieces.end, centre=pieces.centre, sweep=pieces.sweep)


def _candidates(
    own: Curves, own_level: Ints, other: Curves, other_level: Ints, other_half: Floats, tracks: Ints
) -> tuple[Ints, Ints]:
    """Pairs (this leg's row, other leg's row) among which the nearest of any point must be.

    No point of a piece is farther from what is nearest to its middle than the middle is, and half the piece's length.
    own_level, other_level: pair and layer as one number; only what is on one level is held against each other.
    """
    levels, theirs = np.unique(other_level[tracks], return_inverse=True)
    mine = np.flatnonzero(np.isin(own_level, levels))
    if not len(mine):
        return np.zeros(0, dtype=np.int64), np.zeros(0, dtype=np.int64)
    own_place = np.searchsorted(levels, own_level[mine])
    own, other = own.take(mine), other.take(tracks)
    # Levels are searched side by side, too far apart for any to meet another: one search serves all.
    ends = np.concatenate([own.start, own.end, other.start, other.end])
    apart = 10.0 * (float(np.abs(ends).max()) + max(lengths(own).max(), lengths(other).max()) + 1.0)
    searched = _lines(_moved(own, own_place * apart))
    tree = shapely.STRtree(_lines(_moved(other, theirs * apart)))
    middles = shapely.points(points(_moved(own, own_place * apart), np.full(len(own), 0.5)))
    (asked, _), away = tree.query_nearest(middles, return_distance=True, all_matches=False)
    widest, narrowest = np.full(len(levels), -np.inf), np.full(len(levels), np.inf)
    np.maximum.at(widest, theirs, other_half[tracks])
    np.minimum.at(narrowest, theirs, other_half[tracks])
    slack = 2 * (widest - narrowest)[own_place] + 2 * _SEARCH_MM
    bound = np.zeros(len(mine))
    bound[asked] = away
    first, second = tree.query(searched, predicate="dwithin", distance=bound + lengths(own) / 2 + slack)
    return mine[first], tracks[second]


def _moved(curves: Curves, by: Floats) -> Curves:
    """The curves moved along x, each by its own length."""
    shift = np.column_stack([by, np.zeros(len(by))])
    return Curves(start=curves.start + shift, end=curves.end + shift, centre=curves.centre + shift, sweep=curves.sweep)


def _lines(curves: Curves) -> npt.NDArray[np.object_]:
    at, rows = chords(curves, within=_SEARCH_MM / 2)
    made = np.empty(len(curves), dtype=object)
    made[:] = shapely.linestrings(at, indices=rows)
    return made
