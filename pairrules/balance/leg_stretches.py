"""A link cut along its length: where both legs run side by side, and where one is alone, from source to load.

Both legs' track lengths are cut at the same events: the ends of every coupled run of plus, each facing point on minus,
and the parts in series. Between two cuts either both legs advance side by side, or each advances alone.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.board.columns import Floats, Ints
from pairrules.geometry.curves import nearest
from pairrules.geometry.nearest_track import curves_of
from pairrules.geometry.pair_geometry import SERIES, TRACK, Pieces, SpacingProfile

_NOTHING_MM = 1e-6
_SLIVER_MM = 0.05
"""Runs apart by no more than this are one: at a bend the legs face each other's corners for a few micrometres."""

_LEAST_ADVANCE = 0.2


@dataclass(frozen=True, slots=True, kw_only=True)
class Stretch:
    """Track length from source (from, to) [mm] of each leg. `beside`: the legs run side by side; else each alone.

    `hop`: how many parts in series lie between the source and it.
    """

    plus: tuple[float, float]
    minus: tuple[float, float]
    beside: bool
    hop: int


def track_before(pieces: Pieces) -> Floats:
    """Track length [mm] from the source end up to the start of each piece."""
    track = np.where(pieces.kind == TRACK, pieces.length, 0.0)
    before: Floats = np.cumsum(track) - track
    return before


def hop_ends(pieces: Pieces) -> tuple[float, ...]:
    """Track length [mm] up to each part in series, and in all."""
    before = track_before(pieces)
    total = float(np.where(pieces.kind == TRACK, pieces.length, 0.0).sum())
    return (*(float(s) for s in before[pieces.kind == SERIES]), total)


def stretches(plus: Pieces, minus: Pieces, profile: SpacingProfile) -> tuple[Stretch, ...]:
    """The link's stretches in order; `profile` is plus's."""
    ends_plus, ends_minus = hop_ends(plus), hop_ends(minus)
    found: list[Stretch] = []
    beside = _advancing(minus, profile)
    at = [0.0, 0.0]
    for hop in range(max(len(ends_plus), len(ends_minus))):
        end_plus = ends_plus[min(hop, len(ends_plus) - 1)]
        end_minus = ends_minus[min(hop, len(ends_minus) - 1)]
        for run_plus, run_minus in _runs(minus, profile, beside, at[0], end_plus):
            start, stop = max(run_minus[0], at[1]), min(run_minus[1], end_minus)
            if stop - start <= _NOTHING_MM or run_plus[1] - run_plus[0] <= _NOTHING_MM:
                continue
            _alone(found, at, (run_plus[0], start), hop)
            found.append(Stretch(plus=run_plus, minus=(start, stop), beside=True, hop=hop))
            at = [run_plus[1], stop]
        _alone(found, at, (end_plus, end_minus), hop)
        at = [max(at[0], end_plus), max(at[1], end_minus)]
    return tuple(found)


def _alone(found: list[Stretch], at: list[float], until: tuple[float, float], hop: int) -> None:
    plus, minus = (at[0], max(at[0], until[0])), (at[1], max(at[1], until[1]))
    if plus[1] - plus[0] > _NOTHING_MM or minus[1] - minus[0] > _NOTHING_MM:
        found.append(Stretch(plus=plus, minus=minus, beside=False, hop=hop))


def _runs(
    minus: Pieces, profile: SpacingProfile, beside: Ints, low: float, high: float
) -> list[tuple[tuple[float, float], tuple[float, float]]]:
    """Coupled runs of plus between two lengths, with the length of minus that each faces. `beside`: the rows of both.

    Runs that follow one another with no more than a sliver between are one. A run that minus faces backwards is left
    out: there the legs carry the signal in opposite directions.
    """
    starts, stops = np.maximum(profile.s_from[beside], low), np.minimum(profile.s_to[beside], high)
    runs: list[list[float]] = []
    rows: list[list[int]] = []
    for row, start, stop in zip(beside.tolist(), starts.tolist(), stops.tolist(), strict=True):
        if stop - start <= _NOTHING_MM:
            continue
        if runs and start - runs[-1][1] <= _SLIVER_MM:
            runs[-1][1] = stop
            rows[-1].append(row)
        else:
            runs.append([start, stop])
            rows.append([row])
    ends = np.array([row for of in rows for row in (of[0], of[-1])], dtype=np.int64)
    facing = _facing(minus, profile, ends, np.array(runs).reshape(-1)).reshape(-1, 2).tolist()
    return [
        ((start, stop), (first, last))
        for (start, stop), (first, last) in zip(runs, facing, strict=True)
        if last > first
    ]


def _advancing(minus: Pieces, profile: SpacingProfile) -> Ints:
    """Coupled rows of plus's profile along which minus advances too, not just faces plus with a corner."""
    rows = np.flatnonzero(profile.coupled)
    size = (profile.s_to - profile.s_from)[rows]
    inset = np.minimum(size / 4, 1e-4)
    ends = np.concatenate([profile.s_from[rows] + inset, profile.s_to[rows] - inset])
    start, stop = _facing(minus, profile, np.tile(rows, 2), ends).reshape(2, -1)
    found: Ints = rows[(stop - start) > _LEAST_ADVANCE * (size - 2 * inset)]
    return found


def _facing(minus: Pieces, profile: SpacingProfile, rows: Ints, s: Floats) -> Floats:
    """Track length of minus at its points nearest to plus's points at s within the profile's rows."""
    share = (s - profile.s_from[rows]) / (profile.s_to - profile.s_from)[rows]
    at = profile.start[rows] + (profile.end - profile.start)[rows] * share[:, None]
    other = profile.other[rows]
    t, _ = nearest(curves_of(minus).take(other), at)
    found: Floats = track_before(minus)[other] + t * minus.length[other]
    return found
