"""How far one leg runs from the other, along the leg.

For every point of this leg's tracks: the nearest track of the other leg on the same layer, edge to edge, and how much
the two directions differ. The profile is cut where the nearest piece, or the part of it that is nearest (its start, its
inside, its end), changes, and where the legs cease to run beside each other. Cuts are sought on the true distance,
arcs included, until they no longer move; no cut is missed that lies between two foot points of the other leg's ends.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np

from pairrules.board.columns import Floats, Ints
from pairrules.geometry.curves import Curves, directions, nearest, parts, points
from pairrules.geometry.gap_figures import usual_gap
from pairrules.geometry.legs import Legs, laid_out
from pairrules.geometry.nearest_track import TIE_MM, Nearest, NearestTrack, curves_of
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


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Spacing:
    """The profile of each leg of a pair, and the reach [mm] both use."""

    plus: SpacingProfile
    minus: SpacingProfile
    reach_mm: float


def spacing_profiles(pairs: Sequence[tuple[Pieces, Pieces]], reaches_mm: Sequence[float | None]) -> list[Spacing]:
    """The spacing of each of m pairs (plus, minus), all in one pass.

    reaches_mm: of each; `None` for four times plus's usual gap.
    """
    plus, minus = [one for one, _ in pairs], [other for _, other in pairs]
    searched = _Searched([*plus, *minus], [*minus, *plus])
    reaches = []
    first = searched.profiles(np.full(2 * len(pairs), np.inf), len(pairs)) if None in reaches_mm else []
    for place, reach in enumerate(reaches_mm):
        usual = usual_gap(first[place]) if reach is None else None
        wide = LEAST_REACH_MM if usual is None else max(LEAST_REACH_MM, REACH_GAPS * usual)
        reaches.append(wide if reach is None else reach)
    found = searched.profiles(np.tile(reaches, 2))
    both = zip(found[: len(pairs)], found[len(pairs) :], reaches, strict=True)
    return [Spacing(plus=one, minus=other, reach_mm=float(reach)) for one, other, reach in both]


class _Searched:
    """Legs, made ready to be asked for the leg each runs beside."""

    def __init__(self, own: Sequence[Pieces], other: Sequence[Pieces]) -> None:
        self._own, self._other = laid_out(own), laid_out(other)
        pieces = self._own.pieces
        rows = np.flatnonzero(pieces.kind == TRACK)
        self._short, self._origin, self._t0, self._t1 = _short_pieces(pieces, rows)
        self._leg = self._own.leg[self._origin]
        self._search = NearestTrack(self._short, self._leg, self._other.pieces, self._other.leg)
        self._samples = _samples(self._short, self._other.pieces, *self._search.pairs())
        self._found = self._search.at(*self._samples)

    def profiles(self, reach: Floats, rough: int = 0) -> list[SpacingProfile]:
        """The profile of each leg with its `reach` (legs,).

        rough: only the first so many legs, their cuts at the nearest samples: enough to see which gap lasts longest.
        """
        self._search.reach_out(reach[self._leg])
        piece, t = self._samples
        label = self._search.within_reach(piece, self._found).label()
        if rough:
            count = int(np.searchsorted(self._leg[piece], rough))
            piece, t, _ = _thinned(self._search, piece[:count], t[:count], label[:count])
        else:
            piece, t = _with_cuts(self._search, piece, t, label)
        return self._split(_stretches(self._own, self._origin, self._t0, self._t1, self._search, piece, t))

    def _split(self, whole: SpacingProfile) -> list[SpacingProfile]:
        found = []
        for leg, (begin, end) in enumerate(self._own.spans(whole.piece)):
            columns = {one.name: getattr(whole, one.name)[begin:end] for one in fields(SpacingProfile)}
            columns["piece"] = columns["piece"] - self._own.first[leg]
            other = columns["other"]
            columns["other"] = np.where(other >= 0, other - self._other.first[leg], other)
            found.append(SpacingProfile(**columns))
        return found


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
        wide = np.arange(len(row))
        while len(wide := wide[high[wide] - low[wide] > _CUT]):
            # In many parts at once, since a question costs hardly more for many points than for one.
            inner = low[wide, None] + (high - low)[wide, None] * _PARTS
            seen = search.at(np.repeat(row[wide], len(_PARTS)), inner.ravel()).label().reshape(inner.shape)
            other = np.column_stack([seen != left_label[wide, None], np.ones(len(wide), dtype=np.bool_)])
            first, every = np.argmax(other, axis=1), np.arange(len(wide))
            ends = np.column_stack([low[wide], inner, high[wide]])
            after[wide] = np.column_stack([seen, after[wide]])[every, first]
            low[wide], high[wide] = ends[every, first], ends[every, first + 1]
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
    middle = search.at(row, (a + b) / 2)
    # Over a stretch one piece is nearest, so that no other need be asked for.
    bent = np.flatnonzero(~search.straight(row, middle.label()) & (middle.other >= 0))
    row, a, b, other, at_half = row[bent], a[bent], b[bent], middle.other[bent], middle.gap[bent]
    at_a, at_b = search.gap_to(np.tile(other, 2), np.tile(row, 2), np.concatenate([a, b])).reshape(2, -1)
    for _ in range(8):
        if not len(row):
            break
        places = a + (b - a) * np.array([[0.25], [0.75]])
        quarter, late = search.gap_to(np.tile(other, 2), np.tile(row, 2), places.ravel()).reshape(2, -1)
        off = np.abs(quarter - (3 * at_a + 6 * at_half - at_b) / 8) > _FLAT_MM
        off |= np.abs(late - (3 * at_b + 6 * at_half - at_a) / 8) > _FLAT_MM
        row, a, b, other = row[off], a[off], b[off], other[off]
        at_a, quarter, at_half, late, at_b = (one[off] for one in (at_a, quarter, at_half, late, at_b))
        half = (a + b) / 2
        extra.append((row, half))
        row, other = np.tile(row, 2), np.tile(other, 2)
        a, b = np.concatenate([a, half]), np.concatenate([half, b])
        at_a, at_b = np.concatenate([at_a, at_half]), np.concatenate([at_half, at_b])
        at_half = np.concatenate([quarter, late])
    piece, t = np.concatenate([p for p, _ in extra]), np.concatenate([at for _, at in extra])
    order = np.lexsort((t, piece))
    return piece[order], t[order]


def _spans(search: NearestTrack, piece: Ints, t: Floats) -> tuple[Ints, Floats, Floats]:
    """The spans between neighbouring points of one piece, those of no length left out."""
    use = np.flatnonzero((piece[1:] == piece[:-1]) & ((t[1:] - t[:-1]) * search.length[piece[1:]] > _NOTHING_MM))
    return piece[use], t[use], t[use + 1]


def _stretches(
    legs: Legs, origin: Ints, t0: Floats, t1: Floats, search: NearestTrack, piece: Ints, t: Floats
) -> SpacingProfile:
    own = legs.pieces
    row, a, b = _spans(search, piece, t)
    middle = search.at(row, (a + b) / 2)
    ends = search.gap_to(np.tile(middle.other, 2), np.tile(row, 2), np.concatenate([a, b]))
    start, end = ends.reshape(2, -1)
    # Where one stretch ends and the next begins, the piece that runs alongside may be a tie's width from the nearest.
    meet = np.flatnonzero((row[1:] == row[:-1]) & (np.abs(start[1:] - end[:-1]) <= 2 * TIE_MM))
    end[meet] = start[meet + 1] = np.minimum(end[meet], start[meet + 1])
    before = legs.before(np.where(own.kind == TRACK, own.length, 0.0))
    t_from, t_to = t0[row] + (t1 - t0)[row] * a, t0[row] + (t1 - t0)[row] * b
    of = origin[row]
    s_from, s_to = before[of] + own.length[of] * t_from, before[of] + own.length[of] * t_to
    group = _steady_groups(of, middle, start, end, s_from, s_to)
    first = np.flatnonzero(np.r_[True, group[1:] != group[:-1]]) if len(group) else np.zeros(0, dtype=np.int64)
    last = np.r_[first[1:] - 1, len(group) - 1].astype(np.int64) if len(group) else first
    curves = curves_of(own)
    # Over a group the gap is linear, so its middle is the mean; a group of one keeps its measured middle.
    single = first == last
    mid = np.where(single, middle.gap[first], (start[first] + end[last]) / 2)
    return SpacingProfile(
        s_from=s_from[first],
        s_to=s_to[last],
        piece=of[first],
        other=middle.other[first],
        gap_from=start[first],
        gap_mid=mid,
        gap_to=end[last],
        angle=middle.angle[first],
        coupled=middle.coupled[first],
        start=points(curves.take(of[first]), t_from[first]),
        end=points(curves.take(of[last]), t_to[last]),
        layer=own.layer[of[first]],
    )


def _steady_groups(of: Ints, middle: Nearest, start: Floats, end: Floats, s_from: Floats, s_to: Floats) -> Ints:
    """A number for each stretch, the same for neighbours on one piece that continue one straight course of the gap."""
    if not len(of):
        return np.zeros(0, dtype=np.int64)
    size = s_to - s_from
    slope = (end - start) / size
    bent = np.abs(middle.gap - (start + end) / 2) > _FLAT_MM
    label = middle.other * 2 + middle.coupled
    joined = (
        (of[1:] == of[:-1])
        & (label[1:] == label[:-1])
        & ~bent[1:]
        & ~bent[:-1]
        & (np.abs(start[1:] - end[:-1]) < _FLAT_MM)
        & (np.abs(slope[1:] - slope[:-1]) * np.maximum(size[1:], size[:-1]) < _FLAT_MM)
    )
    unknown = np.isnan(middle.gap)
    joined |= (of[1:] == of[:-1]) & unknown[1:] & unknown[:-1]
    return np.cumsum(np.r_[0, ~joined])
