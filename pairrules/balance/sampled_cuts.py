"""Where along its stretches a pair is cut across."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np

from pairrules.balance.leg_stretches import Stretch, track_before
from pairrules.board.columns import Floats, Ints
from pairrules.geometry.curves import directions, nearest, points
from pairrules.geometry.nearest_track import curves_of
from pairrules.geometry.pair_geometry import TRACK, Pieces, SpacingProfile

STEP_MM = 1.0
"""Sections are looked for at least this often; between, the cross-section is taken as it is in the middle."""

PLUS, MINUS, BOTH = 0, 1, 2
LEGS = ("plus", "minus", "both")

_GAP_STEP = 0.05
"""Where the gap changes along the way, sections differ by this share of it."""

_LEAST_MM = 1e-6


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Cuts:
    """Cuts of a pair in order, each with the stretch it stands for, as columns of n rows.

    Parameters
    ----------
    leg: index into `LEGS`. plus, minus: (n, 2) track length (from, to) [mm] of each leg. hop: as of its stretch.
    layer: copper layer. start, end: (n, 2) ends [mm] of the stretch. origin, along: (n, 2) zero and direction of the
    cut. centre, width: (n, 2) of its legs along the cut [mm]; the second is NaN where one leg is alone.
    """

    leg: Ints
    plus: Floats
    minus: Floats
    hop: Ints
    layer: Ints
    start: Floats
    end: Floats
    origin: Floats
    along: Floats
    centre: Floats
    width: Floats

    def __len__(self) -> int:
        return len(self.leg)

    @property
    def spans(self) -> Floats:
        """(n, 2, 2) edges of its legs along the cut."""
        return np.stack([self.centre - self.width / 2, self.centre + self.width / 2], axis=2)

    @property
    def reach(self) -> tuple[Floats, Floats]:
        """(n,) where the copper of its legs begins and ends along the cut."""
        spans = self.spans
        return spans[:, 0, 0], np.where(self.leg == BOTH, spans[:, 1, 1], spans[:, 0, 1])


def cuts_of(
    plus: Pieces,
    minus: Pieces,
    profile: SpacingProfile,
    stretches: Sequence[Stretch],
    breaks: tuple[Floats, Floats],
) -> Cuts:
    """Cuts in order. `breaks`: further track lengths of each leg to cut at."""
    found = [
        _beside(plus, minus, profile, stretches, breaks[0]),
        _alone(PLUS, plus, stretches, breaks[0]),
        _alone(MINUS, minus, stretches, breaks[1]),
    ]
    # Where the legs are alone, all of plus's part of a stretch comes before minus's.
    order = np.argsort(np.concatenate([of for of, _ in found]), kind="stable")
    return Cuts(
        **{
            column.name: np.concatenate([getattr(cuts, column.name) for _, cuts in found])[order]
            for column in fields(Cuts)
        }
    )


def _beside(
    plus: Pieces, minus: Pieces, profile: SpacingProfile, stretches: Sequence[Stretch], breaks: Floats
) -> tuple[Ints, Cuts]:
    """Cuts through both legs, and the stretch of each."""
    of = np.array([k for k, stretch in enumerate(stretches) if stretch.beside], dtype=np.int64)
    spans = np.array([stretches[k].plus for k in of]).reshape(-1, 2)
    edges, own = _edges(spans, np.concatenate([profile.s_from, profile.s_to, breaks]))
    first = np.flatnonzero(own[1:] == own[:-1])
    middle = (edges[first + 1] + edges[first]) / 2
    row = np.clip(np.searchsorted(profile.s_to, middle), 0, len(profile) - 1)
    share = (middle - profile.s_from[row]) / (profile.s_to - profile.s_from)[row]
    piece, other = profile.piece[row], profile.other[row]
    centre = _at(plus, middle)
    facing_curves = curves_of(minus).take(other)
    t, _ = nearest(facing_curves, centre)
    away = points(facing_curves, t) - centre
    size = np.hypot(away[:, 0], away[:, 1])
    a, m, b = profile.gap_from[row], profile.gap_mid[row], profile.gap_to[row]
    gap = a + (4 * m - 3 * a - b) * share + (2 * a + 2 * b - 4 * m) * share * share
    swaying = ~(np.maximum(np.abs(a - m), np.abs(b - m)) < 1e-4)
    gap[swaying] = [_stepped(one) for one in gap[swaying].tolist()]
    use = np.flatnonzero(profile.coupled[row] & (size > 0) & (gap > 0))
    first, piece, other, gap = first[use], piece[use], other[use], gap[use]
    minus_spans = np.array([stretches[k].minus for k in of]).reshape(-1, 2)
    at, along_minus = _at(plus, edges), _facing_lengths(minus, profile, edges, own, minus_spans)
    width = np.column_stack([plus.width[piece], minus.width[other]])
    stretch = of[own[first]]
    return 2 * stretch, Cuts(
        leg=np.full(len(use), BOTH),
        plus=np.column_stack([edges[first], edges[first + 1]]),
        minus=np.column_stack([along_minus[first], along_minus[first + 1]]),
        hop=np.array([stretches[k].hop for k in stretch], dtype=np.int64),
        layer=plus.layer[piece],
        start=at[first],
        end=at[first + 1],
        origin=centre[use],
        along=away[use] / size[use, None],
        centre=np.column_stack([np.zeros(len(use)), gap + (width[:, 0] + width[:, 1]) / 2]),
        width=width,
    )


def _alone(leg: int, pieces: Pieces, stretches: Sequence[Stretch], breaks: Floats) -> tuple[Ints, Cuts]:
    """Cuts through one leg where it is alone, and the stretch of each."""
    both = [(stretch.plus, stretch.minus) for stretch in stretches]
    of = np.array(
        [
            k
            for k, stretch in enumerate(stretches)
            if not stretch.beside and both[k][leg][1] - both[k][leg][0] > _LEAST_MM
        ],
        dtype=np.int64,
    )
    spans = np.array([both[k][leg] for k in of]).reshape(-1, 2)
    edges, own = _edges(spans, np.concatenate([track_before(pieces), breaks]))
    first = np.flatnonzero(own[1:] == own[:-1])
    row, t = _place(pieces, (edges[first + 1] + edges[first]) / 2)
    curves, at = curves_of(pieces).take(row), _at(pieces, edges)
    stretch = of[own[first]]
    still = np.repeat(np.array([both[k][1 - leg][0] for k in stretch]), 2).reshape(-1, 2)
    along = np.column_stack([edges[first], edges[first + 1]])
    heading = directions(curves, t).tolist()
    absent = np.full(len(first), math.nan)
    return 2 * stretch + leg, Cuts(
        leg=np.full(len(first), leg),
        plus=along if leg == PLUS else still,
        minus=along if leg == MINUS else still,
        hop=np.array([stretches[k].hop for k in stretch], dtype=np.int64),
        layer=pieces.layer[row],
        start=at[first],
        end=at[first + 1],
        origin=points(curves, t),
        along=np.array([(-math.sin(angle), math.cos(angle)) for angle in heading]).reshape(-1, 2),
        centre=np.column_stack([np.zeros(len(first)), absent]),
        width=np.column_stack([pieces.width[row], absent]),
    )


def _edges(spans: Floats, breaks: Floats) -> tuple[Floats, Ints]:
    """Where cuts' stretches meet within each of the spans (m, 2), ends and all: track lengths, and whose each is."""
    breaks = np.unique(breaks)
    low = np.searchsorted(breaks, spans[:, 0] + _LEAST_MM, side="right")
    high = np.searchsorted(breaks, spans[:, 1] - _LEAST_MM, side="left")
    count = np.maximum(high - low, 0) + 2
    ends = np.cumsum(count)
    begins = ends - count
    own = np.repeat(np.arange(len(spans)), count)
    nth = np.arange(len(own)) - begins[own]
    at = np.append(breaks, 0.0).take(low[own] + nth - 1, mode="clip")
    at[begins], at[ends - 1] = spans[:, 0], spans[:, 1]
    keep = np.diff(at, prepend=-math.inf) > _LEAST_MM
    keep[begins] = True
    at, own = at[keep], own[keep]
    last = np.append(own[1:] != own[:-1], True)[: len(own)]
    at[last] = spans[own[last], 1]
    size = np.where(last, 0.0, np.diff(at, append=0.0))
    steps = np.maximum(np.ceil(size / STEP_MM), 1).astype(np.int64)
    nth = np.arange(int(steps.sum())) - np.repeat(np.cumsum(steps) - steps, steps)
    return np.repeat(at, steps) + nth * np.repeat(size / steps, steps), np.repeat(own, steps)


def _place(pieces: Pieces, s: Floats) -> tuple[Ints, Floats]:
    """The piece and its parameter at each track length."""
    tracks = np.flatnonzero((pieces.kind == TRACK) & (pieces.length > 0))
    before = track_before(pieces)
    row = tracks[np.clip(np.searchsorted(before[tracks], s, side="right") - 1, 0, len(tracks) - 1)]
    t = (s - before[row]) / pieces.length[row]
    return row, np.clip(t, 0.0, 1.0)


def _at(pieces: Pieces, s: Floats) -> Floats:
    row, t = _place(pieces, s)
    return points(curves_of(pieces).take(row), t)


def _facing_lengths(minus: Pieces, profile: SpacingProfile, s: Floats, own: Ints, spans: Floats) -> Floats:
    """Track length of minus facing plus's track lengths s, each within its own span.

    From one end of a span to the other, never backwards; a span begins where the one before ends, or farther on.
    """
    row = np.clip(np.searchsorted(profile.s_to, s - _LEAST_MM), 0, len(profile) - 1)
    share = np.clip((s - profile.s_from[row]) / (profile.s_to - profile.s_from)[row], 0.0, 1.0)
    at = profile.start[row] + (profile.end - profile.start)[row] * share[:, None]
    other = np.maximum(profile.other[row], 0)
    t, _ = nearest(curves_of(minus).take(other), at)
    found = np.clip(track_before(minus)[other] + t * minus.length[other], spans[own, 0], spans[own, 1])
    first, last = np.searchsorted(own, np.arange(len(spans))), np.searchsorted(own, np.arange(len(spans)), side="right")
    found[first], found[last - 1] = spans[:, 0], spans[:, 1]
    return np.maximum.accumulate(found)


def _stepped(gap: float) -> float:
    return math.exp(round(math.log(gap) / _GAP_STEP) * _GAP_STEP) if gap > 0 else gap
