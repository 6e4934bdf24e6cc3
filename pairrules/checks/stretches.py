"""Contiguous stretches of a spacing profile: where a leg runs alone, and where the gap leaves a band.

`breakout_mm` is the track length at each end of the leg that is left out.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from pairrules.board.board import Board
from pairrules.board.columns import Bools, Floats
from pairrules.checks.wording import TIE_DIGITS, TOLERANCE, place
from pairrules.geometry.pair_geometry import SpacingProfile
from pairrules.result import Place


@dataclass(frozen=True, slots=True, kw_only=True)
class Stretch:
    """A stretch of one leg.

    Parameters
    ----------
    s_from, s_to: [mm] track length from the source end.
    first, last: the places of its ends; on an arc they lie on its chord, which is near enough to find them.
    worst: [mm] the extreme gap in it; NaN where no gap is meant.
    """

    s_from: float
    s_to: float
    first: Place
    last: Place
    worst: float

    @property
    def length_mm(self) -> float:
        """Track length [mm]."""
        return self.s_to - self.s_from


def alone(board: Board, profile: SpacingProfile, *, breakout_mm: float = 0.0) -> tuple[Stretch, ...]:
    """Where the other leg does not run beside this one, longest first."""
    whole = np.zeros(len(profile)), np.ones(len(profile))
    no_gap = np.full((2, len(profile)), np.nan)
    return _merged(board, profile, ~profile.coupled, *whole, no_gap, sign=1.0, breakout_mm=breakout_mm)


def wider(board: Board, profile: SpacingProfile, than_mm: float, *, breakout_mm: float = 0.0) -> tuple[Stretch, ...]:
    """Where the coupled gap is greater than `than_mm`, longest first. `worst` is the greatest gap."""
    return _outside(board, profile, than_mm, 1.0, breakout_mm)


def narrower(board: Board, profile: SpacingProfile, than_mm: float, *, breakout_mm: float = 0.0) -> tuple[Stretch, ...]:
    """Where the coupled gap is less than `than_mm`, longest first. `worst` is the least gap."""
    return _outside(board, profile, than_mm, -1.0, breakout_mm)


def in_breakout(whole: Iterable[Stretch], judged: Iterable[Stretch], breakout_mm: float) -> str:
    """The end of a message that tells how much of the same lies in the breakout and is not judged; "" where none does.

    Parameters: whole: the stretches found without a breakout. judged: those found with it.
    """
    left_out = math.fsum(one.length_mm for one in whole) - math.fsum(one.length_mm for one in judged)
    if left_out <= TOLERANCE:
        return ""
    return f"; another {left_out:.2f} mm lie in the breakout of {breakout_mm:.2f} mm at each end and are not judged"


def _outside(
    board: Board, profile: SpacingProfile, than_mm: float, sign: float, breakout_mm: float
) -> tuple[Stretch, ...]:
    """Each row is taken as two straight pieces of gap over length, through its ends and its middle."""
    # Halves interleaved: first half of row 0, second half of row 0, first half of row 1, …
    left = sign * np.column_stack([profile.gap_from, profile.gap_mid]).reshape(-1)
    right = sign * np.column_stack([profile.gap_mid, profile.gap_to]).reshape(-1)
    limit = sign * than_mm + TOLERANCE
    over_left, over_right = left > limit, right > limit
    with np.errstate(divide="ignore", invalid="ignore"):
        crossing = (limit - left) / (right - left)
    begin = np.where(over_left, 0.0, crossing)
    stop = np.where(over_right, 1.0, crossing)
    keep = (over_left | over_right) & np.repeat(profile.coupled, 2)
    return _merged(board, profile, keep, begin, stop, np.stack([left, right]), sign=sign, breakout_mm=breakout_mm)


def _merged(
    board: Board,
    profile: SpacingProfile,
    keep: Bools,
    begin: Floats,
    stop: Floats,
    gap: Floats,
    *,
    sign: float,
    breakout_mm: float,
) -> tuple[Stretch, ...]:
    """Join parts of rows that follow one another.

    Parameters: begin, stop: shares of each part (one or two parts a row). gap: (2, parts) `sign` × gap at its ends.
    """
    parts = max(len(keep) // max(len(profile), 1), 1)
    at = np.flatnonzero(keep)
    if not len(at):
        return ()
    row, half = at // parts, at % parts
    t_from, t_to = (half + begin[at]) / parts, (half + stop[at]) / parts
    s_span = profile.s_to - profile.s_from
    with np.errstate(divide="ignore", invalid="ignore"):
        t_first = np.nan_to_num((breakout_mm - profile.s_from[row]) / s_span[row], posinf=1.0, neginf=0.0)
        t_last = np.nan_to_num(
            (profile.s_to[-1] - breakout_mm - profile.s_from[row]) / s_span[row], posinf=1.0, neginf=0.0
        )
    t_from, t_to = np.maximum(t_from, t_first), np.minimum(t_to, t_last)
    within = t_to > t_from
    at, row, t_from, t_to = at[within], row[within], t_from[within], t_to[within]
    if not len(at):
        return ()
    half = at % parts
    left, right = gap[:, at]
    worst = np.fmax(*(left + (right - left) * (t * parts - half) for t in (t_from, t_to)))
    s_from = profile.s_from[row] + t_from * s_span[row]
    s_to = profile.s_from[row] + t_to * s_span[row]
    # A stretch goes on where the next part begins at the track length at which the last one ended.
    breaks = np.flatnonzero(s_from[1:] - s_to[:-1] > TOLERANCE) + 1
    found = []
    for group in np.split(np.arange(len(at)), breaks):
        a, b = group[0], group[-1]
        xy_a = _along(profile, int(row[a]), float(t_from[a]))
        xy_b = _along(profile, int(row[b]), float(t_to[b]))
        found.append(
            Stretch(
                s_from=float(s_from[a]),
                s_to=float(s_to[b]),
                first=place(board, int(profile.layer[row[a]]), xy_a[0], xy_a[1]),
                last=place(board, int(profile.layer[row[b]]), xy_b[0], xy_b[1]),
                worst=sign * float(worst[group].max()),
            )
        )
    found = [stretch for stretch in found if stretch.length_mm > TOLERANCE]
    return tuple(sorted(found, key=lambda stretch: (-round(stretch.length_mm, TIE_DIGITS), stretch.s_from)))


def _along(profile: SpacingProfile, row: int, share: float) -> tuple[float, float]:
    xy = profile.start[row] + share * (profile.end[row] - profile.start[row])
    return float(xy[0]), float(xy[1])
