"""How far one leg runs from the other, along the leg.

For every point of this leg's tracks: the nearest track of the other leg on the same layer, edge to edge, and how much
the two directions differ. The profile is cut where the nearest piece, or the part of it that is nearest (its start, its
inside, its end), changes, and where the legs cease to run beside each other. Cuts are bisected on the true distance,
arcs included, until they no longer move; no cut is missed that lies between two foot points of the other leg's ends.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import shapely

from pairrules.board.columns import Floats, Ints
from pairrules.geometry.curves import Curves, chords, directions, lengths, nearest, parts, points
from pairrules.geometry.pair_geometry import TRACK, Pieces, SpacingProfile

COUPLED_TURN = math.radians(30.0)
"""Legs turned less than this to each other run side by side."""

LEAST_REACH_MM = 0.3
REACH_GAPS = 4.0
"""Reach is this many times the pair's usual gap, and never less than `LEAST_REACH_MM`."""

_BIN_MM = 0.001
_STEP_MM = 0.1
_TIE_MM = 1e-7
_CUT = 1e-11
_SEARCH_MM = 0.001
_FLAT_MM = 1e-7


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class GapFigures:
    """Gaps [mm] over the coupled stretches, and their length [mm]; `None` where none is coupled."""

    least: float | None
    median: float | None
    greatest: float | None
    coupled_mm: float


def spacing_profiles(
    plus: Pieces, minus: Pieces, reach_mm: float | None
) -> tuple[SpacingProfile, SpacingProfile, float]:
    """The profile of each leg, and the reach [mm] both use: the given one, else four times plus's usual gap."""
    if reach_mm is None:
        usual = usual_gap(_profile(plus, minus, math.inf))
        reach_mm = max(LEAST_REACH_MM, REACH_GAPS * usual) if usual is not None else LEAST_REACH_MM
    return _profile(plus, minus, reach_mm), _profile(minus, plus, reach_mm), reach_mm


def usual_gap(profile: SpacingProfile) -> float | None:
    """The gap that holds for the greatest length (length-weighted mode) where the legs are turned less than 30 degrees.

    Gaps within a micrometre and a half of each other count together; of equal lengths the smaller gap is taken.
    """
    use = np.flatnonzero((profile.other >= 0) & (profile.angle < COUPLED_TURN))
    low, high, weight = _runs(profile, use)
    positive = (low > 0) & (weight > 0)
    low, high, weight = low[positive], high[positive], weight[positive]
    if not len(weight):
        return None
    # A run that spans many bins spreads over them, so that only steady ones make a mode.
    first, last = np.floor(low / _BIN_MM + 1e-6).astype(np.int64), np.floor(high / _BIN_MM + 1e-6).astype(np.int64)
    span = last - first + 1
    bins = np.repeat(first, span) + (np.arange(span.sum()) - np.repeat(np.cumsum(span) - span, span))
    share = np.repeat(weight / span, span)
    middle = np.repeat((low + high) / 2, span)
    centre = np.where(np.repeat(span, span) == 1, middle, (bins + 0.5) * _BIN_MM)
    distinct, place = np.unique(bins, return_inverse=True)
    mass = np.bincount(place, share)
    moment = np.bincount(place, share * centre)
    near = (
        np.abs(distinct[:, None] - distinct[None, :]) <= 1
        if len(distinct) <= 2000
        else np.eye(len(distinct), dtype=bool)
    )
    window = near @ mass
    best = int(np.argmax(window > window.max() * (1 - 1e-9)))
    return float((near[best] @ moment) / window[best])


def gap_figures(profile: SpacingProfile) -> GapFigures:
    """Least, length-weighted median and greatest gap over the coupled stretches of a profile."""
    use = np.flatnonzero(profile.coupled)
    size = math.fsum((profile.s_to - profile.s_from)[use])
    if not len(use) or size <= 0:
        return GapFigures(least=None, median=None, greatest=None, coupled_mm=0.0)
    low, high, weight = _runs(profile, use)
    return GapFigures(
        least=float(low.min()), median=_median(low, high, weight), greatest=float(high.max()), coupled_mm=size
    )


def _runs(profile: SpacingProfile, use: Ints) -> tuple[Floats, Floats, Floats]:
    """Halves of the stretches as runs over which the gap goes steadily from low to high, with their lengths."""
    ends = np.concatenate([profile.gap_from[use], profile.gap_to[use]])
    middle = np.tile(profile.gap_mid[use], 2)
    half = np.tile((profile.s_to - profile.s_from)[use] / 2, 2)
    return np.minimum(ends, middle), np.maximum(ends, middle), half


def _median(low: Floats, high: Floats, weight: Floats) -> float:
    """The gap that half of the length lies at or below; the middle of a step where exactly half does."""
    total = weight.sum()

    span = high - low
    flat = span <= _FLAT_MM / 100

    def below(gap: float) -> float:
        inside = np.clip((gap - low) / np.where(flat, 1.0, span), 0.0, 1.0)
        return float(np.where(flat, gap >= low, inside) @ weight)

    def least(reached: float) -> float:
        left, right = float(low.min()), float(high.max())
        for _ in range(70):
            middle = (left + right) / 2
            left, right = (left, middle) if below(middle) >= reached else (middle, right)
        return right

    return (least(total / 2 * (1 - 1e-12)) + least(total / 2 * (1 + 1e-12))) / 2


# The profile itself


@dataclass(frozen=True, slots=True)
class _Found:
    """What is nearest to each of n points: candidate row, feature (0 start, 1 inside, 2 end), gap, angle, coupled."""

    other: Ints
    feature: Ints
    gap: Floats
    angle: Floats
    coupled: npt.NDArray[np.bool_]

    def label(self) -> Ints:
        return self.other * 8 + self.feature * 2 + self.coupled


class _Search:
    """Nearest track of the other leg, for points on pieces of this leg."""

    def __init__(self, own: Pieces, other: Pieces, rows: Ints, reach: float) -> None:
        self._own = _curves(own)
        self._other = _curves(other)
        self._half = own.width / 2
        self._other_half = other.width / 2
        self._reach = reach
        tracks = np.flatnonzero(other.kind == TRACK)
        first, second = _candidates(self._own, own.layer, self._other, other.layer, self._other_half, rows, tracks)
        order = np.lexsort((second, first))
        self._pairs = second[order]
        self._offset = np.searchsorted(first[order], np.arange(len(own) + 1))
        self._pair_own = first[order]

    def pairs(self) -> tuple[Ints, Ints]:
        """All candidate pairs: row of this leg, row of the other."""
        return self._pair_own, self._pairs

    def at(self, rows: Ints, t: Floats) -> _Found:
        count = self._offset[rows + 1] - self._offset[rows]
        owner = np.repeat(np.arange(len(rows)), count)
        within = np.arange(len(owner)) - np.repeat(np.cumsum(count) - count, count)
        candidate = self._pairs[self._offset[rows][owner] + within]
        own = self._own.take(rows)
        at, heading = points(own, t), directions(own, t)
        other = self._other.take(candidate)
        foot, away = nearest(other, at[owner])
        gap = away - self._half[rows][owner] - self._other_half[candidate]
        turn = np.abs((directions(other, foot) - heading[owner] + np.pi / 2) % np.pi - np.pi / 2)
        least = np.full(len(rows), np.inf)
        np.minimum.at(least, owner, gap)
        tied = gap <= least[owner] + _TIE_MM
        # Of pieces equally near (both at a bend) the one that runs more nearly alongside counts.
        rank = np.where(tied, np.round(turn, 9), np.inf)
        best = np.lexsort((candidate, rank, owner))
        start = np.cumsum(count) - count
        chosen = np.where(count > 0, best[np.minimum(start, max(len(best) - 1, 0))] if len(best) else 0, -1)
        none = count == 0
        pick = np.where(none, 0, chosen)
        if not len(candidate):
            empty = np.full(len(rows), np.nan)
            return _Found(
                np.full(len(rows), -1),
                np.zeros(len(rows), dtype=np.int64),
                empty,
                empty,
                np.zeros(len(rows), dtype=bool),
            )
        feature = np.where(foot[pick] <= 0.0, 0, np.where(foot[pick] >= 1.0, 2, 1))
        found_gap = np.where(none, np.nan, least)
        angle = np.where(none, np.nan, turn[pick])
        coupled = ~none & (found_gap <= self._reach) & (np.where(none, np.inf, turn[pick]) < COUPLED_TURN)
        return _Found(np.where(none, -1, candidate[pick]), np.where(none, 0, feature), found_gap, angle, coupled)


def _curves(pieces: Pieces) -> Curves:
    return Curves(start=pieces.start, end=pieces.end, centre=pieces.centre, sweep=pieces.sweep)


def _candidates(
    own: Curves,
    own_layer: Ints,
    other: Curves,
    other_layer: Ints,
    other_half: Floats,
    rows: Ints,
    tracks: Ints,
) -> tuple[Ints, Ints]:
    """Pairs (this leg's row, other leg's row) among which the nearest of any point must be.

    A point of a piece is never farther from the piece's nearest neighbour than their distance plus the piece's length.
    """
    none = np.zeros(0, dtype=np.int64)
    found: list[tuple[Ints, Ints]] = []
    for layer in np.unique(own_layer[rows]):
        mine, theirs = rows[own_layer[rows] == layer], tracks[other_layer[tracks] == layer]
        if not len(theirs):
            continue
        lines = _lines(other.take(theirs))
        searched = _lines(own.take(mine))
        tree = shapely.STRtree(lines)
        (asked, _), away = tree.query_nearest(searched, return_distance=True, all_matches=False)
        slack = 2 * (float(other_half[theirs].max()) - float(other_half[theirs].min())) + 2 * _SEARCH_MM
        bound = np.zeros(len(mine))
        bound[asked] = away
        first, second = tree.query(searched, predicate="dwithin", distance=bound + lengths(own.take(mine)) + slack)
        found.append((mine[first], theirs[second]))
    if not found:
        return none, none
    return np.concatenate([first for first, _ in found]), np.concatenate([second for _, second in found])


def _lines(curves: Curves) -> npt.NDArray[np.object_]:
    at, rows = chords(curves, within=_SEARCH_MM / 2)
    made = np.empty(len(curves), dtype=object)
    made[:] = shapely.linestrings(at, indices=rows)
    return made


def _profile(own: Pieces, other: Pieces, reach: float) -> SpacingProfile:
    rows = np.flatnonzero(own.kind == TRACK)
    short, origin, t0, t1 = _short_pieces(own, rows)
    search = _Search(short, other, np.arange(len(short)), reach)
    piece, t = _samples(short, other, *search.pairs())
    found = search.at(piece, t)
    piece, t, found = _with_cuts(search, piece, t, found)
    return _stretches(own, short, origin, t0, t1, search, piece, t)


def _short_pieces(own: Pieces, rows: Ints) -> tuple[Pieces, Ints, Floats, Floats]:
    """The tracks cut to a millimetre at most, for few candidates each; the row each is of, and its span of t."""
    steps = np.maximum(np.ceil(own.length[rows]), 1).astype(np.int64)
    origin = np.repeat(rows, steps)
    k = np.arange(len(origin)) - np.repeat(np.cumsum(steps) - steps, steps)
    share = np.repeat(steps, steps)
    t0, t1 = k / share, (k + 1) / share
    cut = parts(_curves(own), origin, t0, t1)
    short = Pieces(
        start=cut.start,
        end=cut.end,
        centre=cut.centre,
        sweep=cut.sweep,
        width=own.width[origin],
        layer=own.layer[origin],
        kind=own.kind[origin],
        length=own.length[origin] / share,
    )
    return short, origin, t0, t1


def _samples(own: Pieces, other: Pieces, pair_own: Ints, pair_other: Ints) -> tuple[Ints, Floats]:
    """Points to look at first: even steps, feet of the other leg's ends, and where perpendiculars there cross."""
    curves, theirs = _curves(own), _curves(other)
    steps = np.maximum(np.ceil(own.length / _STEP_MM), 2).astype(np.int64)
    rows = np.repeat(np.arange(len(own)), steps + 1)
    even = (np.arange(len(rows)) - np.repeat(np.cumsum(steps + 1) - (steps + 1), steps + 1)) / np.repeat(
        steps, steps + 1
    )
    all_rows, all_t = [rows], [even]
    mine = curves.take(pair_own)
    facing = theirs.take(pair_other)
    for t_end, end in ((0.0, facing.start), (1.0, facing.end)):
        foot, _ = nearest(mine, end)
        all_rows.append(pair_own)
        all_t.append(foot)
        heading = directions(facing, np.full(len(pair_own), t_end))
        along = np.column_stack([np.cos(heading), np.sin(heading)])
        chord = mine.end - mine.start
        slope = np.einsum("ij,ij->i", chord, along)
        crossing = np.einsum("ij,ij->i", end - mine.start, along) / np.where(np.abs(slope) > 1e-12, slope, np.inf)
        use = (crossing > 0) & (crossing < 1) & (mine.sweep == 0.0)
        all_rows.append(pair_own[use])
        all_t.append(crossing[use])
    piece, t = np.concatenate(all_rows), np.concatenate(all_t)
    order = np.lexsort((t, piece))
    piece, t = piece[order], t[order]
    keep = np.ones(len(t), dtype=bool)
    keep[1:] = (piece[1:] != piece[:-1]) | (t[1:] - t[:-1] > 1e-12) | (t[1:] == 1.0) & (t[:-1] < 1.0)
    return piece[keep], t[keep]


def _with_cuts(search: _Search, piece: Ints, t: Floats, found: _Found) -> tuple[Ints, Floats, _Found]:
    """Further points at every change of what is nearest, found by bisection to 1e-11 of the piece.

    A change is bracketed by two points, one on each side, so that a stretch between brackets has one nearest feature.
    """
    extra_piece, extra_t = [piece], [t]
    label = found.label()
    change = np.flatnonzero((piece[1:] == piece[:-1]) & (label[1:] != label[:-1]))
    row, left, right = piece[change], t[change], t[change + 1]
    left_label, right_label = label[change], label[change + 1]
    for _ in range(24):
        if not len(row):
            break
        low, high = left.copy(), right.copy()
        after = right_label.copy()
        for _ in range(60):
            if not ((high - low) > _CUT).any():
                break
            middle = (low + high) / 2
            seen = search.at(row, middle).label()
            same = seen == left_label
            low, high = np.where(same, middle, low), np.where(same, high, middle)
            after = np.where(same, after, seen)
        extra_piece += [row, row]
        extra_t += [low, high]
        more = (after != right_label) & (right - high > _CUT)
        row, left, right, left_label, right_label = row[more], high[more], right[more], after[more], right_label[more]
    all_piece, all_t = np.concatenate(extra_piece), np.concatenate(extra_t)
    order = np.lexsort((all_t, all_piece))
    all_piece, all_t = all_piece[order], all_t[order]
    return all_piece, all_t, search.at(all_piece, all_t)


def _stretches(
    own: Pieces, short: Pieces, origin: Ints, t0: Floats, t1: Floats, search: _Search, piece: Ints, t: Floats
) -> SpacingProfile:
    same = piece[1:] == piece[:-1]
    wide = (t[1:] - t[:-1]) * short.length[piece[1:]] > 1e-9
    use = np.flatnonzero(same & wide)
    row, a, b = piece[use], t[use], t[use + 1]
    inward = np.minimum(1e-10, (b - a) / 4)
    start, middle, end = search.at(row, a + inward), search.at(row, (a + b) / 2), search.at(row, b - inward)
    before = np.cumsum(np.where(own.kind == TRACK, own.length, 0.0)) - np.where(own.kind == TRACK, own.length, 0.0)
    t_from, t_to = t0[row] + (t1 - t0)[row] * a, t0[row] + (t1 - t0)[row] * b
    of = origin[row]
    s_from, s_to = before[of] + own.length[of] * t_from, before[of] + own.length[of] * t_to
    group = _steady_groups(of, middle, start, end, s_from, s_to)
    first = np.flatnonzero(np.r_[True, group[1:] != group[:-1]]) if len(group) else np.zeros(0, dtype=np.int64)
    last = np.r_[first[1:] - 1, len(group) - 1].astype(np.int64) if len(group) else first
    curves = _curves(own)
    # Over a group the gap is linear, so its middle is the mean; a group of one keeps its measured middle.
    single = first == last
    mid = np.where(single, middle.gap[first], (start.gap[first] + end.gap[last]) / 2)
    return SpacingProfile(
        s_from=s_from[first],
        s_to=s_to[last],
        piece=of[first],
        other=middle.other[first],
        gap_from=start.gap[first],
        gap_mid=mid,
        gap_to=end.gap[last],
        angle=middle.angle[first],
        coupled=middle.coupled[first],
        start=points(curves.take(of[first]), t_from[first]),
        end=points(curves.take(of[last]), t_to[last]),
        layer=own.layer[of[first]],
    )


def _steady_groups(of: Ints, middle: _Found, start: _Found, end: _Found, s_from: Floats, s_to: Floats) -> Ints:
    """A number for each stretch, the same for neighbours on one piece that continue one straight course of the gap."""
    if not len(of):
        return np.zeros(0, dtype=np.int64)
    size = s_to - s_from
    slope = (end.gap - start.gap) / size
    bent = np.abs(middle.gap - (start.gap + end.gap) / 2) > _FLAT_MM
    label = middle.other * 2 + middle.coupled
    joined = (
        (of[1:] == of[:-1])
        & (label[1:] == label[:-1])
        & ~bent[1:]
        & ~bent[:-1]
        & (np.abs(start.gap[1:] - end.gap[:-1]) < _FLAT_MM)
        & (np.abs(slope[1:] - slope[:-1]) * np.maximum(size[1:], size[:-1]) < _FLAT_MM)
    )
    unknown = np.isnan(middle.gap)
    joined |= (of[1:] == of[:-1]) & unknown[1:] & unknown[:-1]
    return np.cumsum(np.r_[0, ~joined])
