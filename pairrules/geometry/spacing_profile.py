"""How far one leg runs from the other, along the leg.

For every point of this leg's tracks: the nearest track of the other leg on the same layer, edge to edge, and how much
the two directions differ. The profile is cut where the nearest piece, or the part of it that is nearest (its start, its
inside, its end), changes, and where the legs cease to run beside each other. Cuts are sought on the true distance,
arcs included, until they no longer move; no cut is missed that lies between two foot points of the other leg's ends.
"""

from __future__ import annotations

import math

import numpy as np

from pairrules.board.columns import Floats, Ints
from pairrules.geometry.curves import Curves, directions, nearest, parts, points
from pairrules.geometry.gap_figures import usual_gap
from pairrules.geometry.nearest_track import Nearest, NearestTrack, curves_of
from pairrules.geometry.pair_geometry import TRACK, Pieces, SpacingProfile

LEAST_REACH_MM = 0.3
REACH_GAPS = 4.0
"""Reach is this many times the pair's usual gap, and never less than `LEAST_REACH_MM`."""

_STEP_MM = 0.1
_CUT = 1e-10
_GUESSES = 3
_PARTS = np.arange(1, 16) / 16
_FLAT_MM = 1e-7
_NOTHING_MM = 1e-9


def spacing_profiles(
    plus: Pieces, minus: Pieces, reach_mm: float | None
) -> tuple[SpacingProfile, SpacingProfile, float]:
    """The profile of each leg, and the reach [mm] both use: the given one, else four times plus's usual gap."""
    own = _Searched(plus, minus)
    if reach_mm is None:
        usual = usual_gap(own.profile(math.inf, exact=False))
        reach_mm = max(LEAST_REACH_MM, REACH_GAPS * usual) if usual is not None else LEAST_REACH_MM
    return own.profile(reach_mm), _Searched(minus, plus).profile(reach_mm), reach_mm


class _Searched:
    """One leg, made ready to be asked for the other."""

    def __init__(self, own: Pieces, other: Pieces) -> None:
        self._own = own
        rows = np.flatnonzero(own.kind == TRACK)
        self._short, self._origin, self._t0, self._t1 = _short_pieces(own, rows)
        self._search = NearestTrack(self._short, other, np.arange(len(self._short)), math.inf)
        self._samples = _samples(self._short, other, *self._search.pairs())
        self._found = self._search.at(*self._samples)

    def profile(self, reach: float, *, exact: bool = True) -> SpacingProfile:
        """The profile; not exact, its cuts lie at the nearest samples, enough to see which gap lasts longest."""
        self._search.reach = reach
        piece, t = self._samples
        label = self._search.within_reach(self._found).label()
        if exact:
            piece, t = _with_cuts(self._search, piece, t, label)
        else:
            piece, t, _ = _thinned(self._search, piece, t, label)
        return _stretches(self._own, self._origin, self._t0, self._t1, self._search, piece, t)


def _short_pieces(own: Pieces, rows: Ints) -> tuple[Pieces, Ints, Floats, Floats]:
    """The tracks cut to a millimetre at most, for few candidates each; the row each is of, and its span of t."""
    steps = np.maximum(np.ceil(own.length[rows]), 1).astype(np.int64)
    origin = np.repeat(rows, steps)
    k = np.arange(len(origin)) - np.repeat(np.cumsum(steps) - steps, steps)
    share = np.repeat(steps, steps)
    t0, t1 = k / share, (k + 1) / share
    cut = parts(curves_of(own), origin, t0, t1)
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
    curves, theirs = curves_of(own), curves_of(other)
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
        for crossing in _abreast(mine, end, along):
            use = (crossing > -_CUT) & (crossing < 1 + _CUT)
            # What is nearest changes just there: a point on either side, so that it need not be sought.
            for nudge in (-_CUT / 3, 0.0, _CUT / 3):
                all_rows.append(pair_own[use])
                all_t.append(np.clip(crossing[use] + nudge, 0.0, 1.0))
    piece, t = np.concatenate(all_rows), np.concatenate(all_t)
    order = np.lexsort((t, piece))
    piece, t = piece[order], t[order]
    keep = np.ones(len(t), dtype=bool)
    keep[1:] = (piece[1:] != piece[:-1]) | (t[1:] - t[:-1] > 1e-12) | (t[1:] == 1.0) & (t[:-1] < 1.0)
    return piece[keep], t[keep]


def _abreast(curves: Curves, end: Floats, along: Floats) -> tuple[Floats, ...]:
    """Parameters at which each piece passes the line through `end` (k, 2) square to `along` (k, 2); NaN where not."""
    offset = np.einsum("ij,ij->i", end - curves.start, along)
    slope = np.einsum("ij,ij->i", curves.end - curves.start, along)
    arc = curves.sweep != 0.0
    line = np.where(arc | (np.abs(slope) <= 1e-12), np.nan, offset / np.where(slope == 0.0, np.nan, slope))
    if not arc.any():
        return (line,)
    radial = curves.start - curves.centre
    share = np.einsum("ij,ij->i", end - curves.centre, along) / np.where(arc, np.hypot(*radial.T), np.nan)
    half = np.arccos(np.where(np.abs(share) <= 1, share, np.nan))
    first = np.arctan2(along[:, 1], along[:, 0]) - np.arctan2(radial[:, 1], radial[:, 0])
    full = np.where(arc, curves.sweep, np.nan)
    turned = [((first + side * half) * np.sign(full)) % (2 * np.pi) / np.abs(full) for side in (1.0, -1.0)]
    return line, turned[0], turned[1]


def _thinned(search: NearestTrack, piece: Ints, t: Floats, label: Ints) -> tuple[Ints, Floats, Ints]:
    """The points without those in the midst of a straight course of the gap: nothing changes there."""
    kept = np.ones(len(t), dtype=np.bool_)
    same = (piece[1:] == piece[:-1]) & (label[1:] == label[:-1])
    kept[1:-1] = ~(same[1:] & same[:-1] & search.straight(piece[1:-1], label[1:-1]))
    return piece[kept], t[kept], label[kept]


def _with_cuts(search: NearestTrack, piece: Ints, t: Floats, label: Ints) -> tuple[Ints, Floats]:
    """Further points at every change of what is nearest, found by repeated division to 1e-10 of the piece.

    A change is bracketed by two points, one on each side, so that a stretch between brackets has one nearest feature.
    """
    piece, t, label = _thinned(search, *_with_guesses(search, piece, t, label))
    extra_piece, extra_t = [piece], [t]
    change = np.flatnonzero((piece[1:] == piece[:-1]) & (label[1:] != label[:-1]) & (t[1:] - t[:-1] > _CUT))
    row, left, right = piece[change], t[change], t[change + 1]
    left_label, right_label = label[change], label[change + 1]
    for _ in range(24):
        if not len(row):
            break
        low, high = left.copy(), right.copy()
        after = right_label.copy()
        every = np.arange(len(row))
        while ((high - low) > _CUT).any():
            # In many parts at once, since a question costs hardly more for many points than for one.
            inner = low[:, None] + (high - low)[:, None] * _PARTS
            seen = search.at(np.repeat(row, len(_PARTS)), inner.ravel()).label().reshape(inner.shape)
            other = np.column_stack([seen != left_label[:, None], np.ones(len(row), dtype=np.bool_)])
            first = np.argmax(other, axis=1)
            ends = np.column_stack([low, inner, high])
            after = np.column_stack([seen, after])[every, first]
            low, high = ends[every, first], ends[every, first + 1]
        extra_piece += [row, row]
        extra_t += [low, high]
        more = (after != right_label) & (right - high > _CUT)
        row, left, right, left_label, right_label = row[more], high[more], right[more], after[more], right_label[more]
    all_piece, all_t = np.concatenate(extra_piece), np.concatenate(extra_t)
    order = np.lexsort((all_t, all_piece))
    return _bent_cut_finer(search, all_piece[order], all_t[order])


def _with_guesses(search: NearestTrack, piece: Ints, t: Floats, label: Ints) -> tuple[Ints, Floats, Ints]:
    """Further points to both sides of where the nearest piece is likely to change, so that few have to be sought."""
    for _ in range(_GUESSES):
        change = np.flatnonzero((piece[1:] == piece[:-1]) & (label[1:] != label[:-1]) & (t[1:] - t[:-1] > _CUT))
        row, left, right = piece[change], t[change], t[change + 1]
        rows, guesses = search.equal(row, left, right, label[change] // 8, label[change + 1] // 8)
        if not len(rows):
            break
        rows, guesses = np.tile(rows, 2), np.clip(np.concatenate([guesses - _CUT / 3, guesses + _CUT / 3]), 0.0, 1.0)
        found = search.at(rows, guesses).label()
        piece, t, label = np.concatenate([piece, rows]), np.concatenate([t, guesses]), np.concatenate([label, found])
        order = np.lexsort((t, piece))
        piece, t, label = piece[order], t[order], label[order]
    return piece, t, label


def _bent_cut_finer(search: NearestTrack, piece: Ints, t: Floats) -> tuple[Ints, Floats]:
    """Stretches halved until a parabola through three points gives the gap within `_FLAT_MM`."""
    row, a, b = _spans(search, piece, t)
    extra: list[tuple[Ints, Floats]] = [(piece, t)]
    bent = ~search.straight(row, search.at(row, (a + b) / 2).label())
    row, a, b = row[bent], a[bent], b[bent]
    for _ in range(8):
        if not len(row):
            break
        places = a + (b - a) * np.array([[1e-9], [0.25], [0.5], [1 - 1e-9]])
        start, quarter, middle, end = search.at(np.tile(row, 4), places.ravel()).gap.reshape(4, -1)
        off = np.abs(quarter - (3 * start + 6 * middle - end) / 8) > _FLAT_MM
        row, a, b = row[off], a[off], b[off]
        half = (a + b) / 2
        extra.append((row, half))
        row, a, b = np.tile(row, 2), np.concatenate([a, half]), np.concatenate([half, b])
    piece, t = np.concatenate([p for p, _ in extra]), np.concatenate([at for _, at in extra])
    order = np.lexsort((t, piece))
    return piece[order], t[order]


def _spans(search: NearestTrack, piece: Ints, t: Floats) -> tuple[Ints, Floats, Floats]:
    """The spans between neighbouring points of one piece, those of no length left out."""
    use = np.flatnonzero((piece[1:] == piece[:-1]) & ((t[1:] - t[:-1]) * search.length[piece[1:]] > _NOTHING_MM))
    return piece[use], t[use], t[use + 1]


def _stretches(
    own: Pieces, origin: Ints, t0: Floats, t1: Floats, search: NearestTrack, piece: Ints, t: Floats
) -> SpacingProfile:
    row, a, b = _spans(search, piece, t)
    inward = np.minimum(1e-10, (b - a) / 4)
    start, middle, end = search.at_each(row, a + inward, (a + b) / 2, b - inward)
    before = np.cumsum(np.where(own.kind == TRACK, own.length, 0.0)) - np.where(own.kind == TRACK, own.length, 0.0)
    t_from, t_to = t0[row] + (t1 - t0)[row] * a, t0[row] + (t1 - t0)[row] * b
    of = origin[row]
    s_from, s_to = before[of] + own.length[of] * t_from, before[of] + own.length[of] * t_to
    group = _steady_groups(of, middle, start, end, s_from, s_to)
    first = np.flatnonzero(np.r_[True, group[1:] != group[:-1]]) if len(group) else np.zeros(0, dtype=np.int64)
    last = np.r_[first[1:] - 1, len(group) - 1].astype(np.int64) if len(group) else first
    curves = curves_of(own)
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


def _steady_groups(of: Ints, middle: Nearest, start: Nearest, end: Nearest, s_from: Floats, s_to: Floats) -> Ints:
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
