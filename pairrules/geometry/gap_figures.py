"""The gap of a pair in a few figures: least, median, greatest, and the one it usually has."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from pairrules.board.columns import Floats, Ints
from pairrules.geometry.nearest_track import COUPLED_TURN
from pairrules.geometry.pair_geometry import SpacingProfile

_BIN_MM = 0.001
_MOST_BINS = 2000
"""A run over more bins than these (two millimetres) is not spelled out: a leg that leaves its partner for metres would
fill the memory."""

_SAME_MM = 1e-9
_PARTS = np.arange(1, 16) / 16
_ROUNDS = 14
"""Enough to come from ten metres to where doubles end."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class GapFigures:
    """Gaps [mm] over the coupled stretches, and their length [mm]; `None` where none is coupled."""

    least: float | None
    median: float | None
    greatest: float | None
    coupled_mm: float


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
    wide = span > _MOST_BINS
    narrow = np.where(wide, 0, span)
    bins = np.repeat(first, narrow) + (np.arange(narrow.sum()) - np.repeat(np.cumsum(narrow) - narrow, narrow))
    share = np.repeat(weight / span, narrow)
    middle = np.repeat((low + high) / 2, narrow)
    centre = np.where(np.repeat(narrow, narrow) == 1, middle, (bins + 0.5) * _BIN_MM)
    beside = [bins - 1, bins + 1, *_near_ends(first[wide], last[wide])] if wide.any() else []
    distinct, place = np.unique(np.concatenate([bins, *beside]), return_inverse=True)
    spread = _spread(distinct, first[wide], last[wide], (weight / span)[wide])
    place = place[: len(bins)]
    mass: Floats = spread + np.bincount(place, share, minlength=len(distinct))
    moment: Floats = spread * (distinct + 0.5) * _BIN_MM + np.bincount(place, share * centre, minlength=len(distinct))
    left, right = np.searchsorted(distinct, distinct - 1), np.searchsorted(distinct, distinct + 2)
    total = np.concatenate([[0.0], np.cumsum(mass)])
    window = total[right] - total[left]
    best = int(np.argmax(window > window.max() * (1 - 1e-9)))
    # The heaviest bin of the window speaks for it, so that a steady gap comes out as drawn.
    heaviest = left[best] + int(np.argmax(mass[left[best] : right[best]]))
    return float(moment[heaviest] / mass[heaviest])


def _near_ends(first: Ints, last: Ints) -> list[Ints]:
    """The bins at and about the ends of wide runs: between these what all of them add up to does not change."""
    return [end + step for end in (first, last) for step in range(-2, 3)]


def _spread(bins: Ints, first: Ints, last: Ints, share: Floats) -> Floats:
    """What wide runs that put `share` into each bin from first to last put into each of `bins`."""
    if not len(share):
        return np.zeros(len(bins))
    begins, ends = np.argsort(first, kind="stable"), np.argsort(last, kind="stable")
    begun = np.concatenate([[0.0], np.cumsum(share[begins])])[np.searchsorted(first[begins], bins, side="right")]
    ended = np.concatenate([[0.0], np.cumsum(share[ends])])[np.searchsorted(last[ends], bins, side="left")]
    return np.asarray(begun - ended)


def gap_figures(profile: SpacingProfile) -> GapFigures:
    """Least, length-weighted median and greatest gap over the coupled stretches of a profile.

    Each stretch is taken as the parabola through its three gaps; stretches are cut so that this holds within 0.1 nm.
    """
    use = np.flatnonzero(profile.coupled)
    length = (profile.s_to - profile.s_from)[use]
    size = coupled_length(profile)
    if size <= 0:
        return GapFigures(least=None, median=None, greatest=None, coupled_mm=0.0)
    start, middle, end = profile.gap_from[use], profile.gap_mid[use], profile.gap_to[use]
    slope, bend = 4 * middle - 3 * start - end, 2 * (start + end) - 4 * middle
    turn = np.clip(-slope / np.where(bend == 0.0, 1.0, 2 * bend), 0.0, 1.0)
    every = np.stack([start, end, start + (slope + bend * turn) * turn])
    least, greatest = every.min(axis=0), every.max(axis=0)
    flat = greatest - least <= _SAME_MM

    def below(gaps: Floats, left: float, right: float) -> Floats:
        """Length over which the gap is at most each of `gaps` (m,), none of which lies beyond left or right."""
        some = np.flatnonzero((greatest > left - _SAME_MM) & (least <= right + _SAME_MM))
        gap = gaps[:, None]
        middle = (least[some] + greatest[some]) / 2
        share = np.where(flat[some], gap >= middle, _share_below(start[some] - gap, slope[some], bend[some]))
        return share @ length[some] + float(length[greatest <= left - _SAME_MM].sum())

    by_least, by_greatest = np.argsort(least, kind="stable"), np.argsort(greatest, kind="stable")
    begun, done = np.cumsum(length[by_least]), np.cumsum(length[by_greatest])

    def reaching(part: float) -> float:
        """The least gap, within `_SAME_MM`, that holds or is undercut over the length `part`."""
        # Below `left` stretches too short in all have begun, at `right` stretches long enough have ended.
        last = len(length) - 1
        left = float(least[by_least[min(int(np.searchsorted(begun, part)), last)]]) - _SAME_MM
        right = float(greatest[by_greatest[min(int(np.searchsorted(done, part)), last)]])
        for _ in range(_ROUNDS):
            if right - left <= _SAME_MM / 1000:
                break
            # In many parts at once, since a question costs hardly more for many gaps than for one.
            places = np.concatenate([[left], left + (right - left) * _PARTS, [right]])
            first = 1 + int(np.argmax(np.append(below(places[1:-1], left, right) >= part, True)))
            left, right = float(places[first - 1]), float(places[first])
        return right

    median = reaching(size / 2 * (1 - 1e-12))
    beyond = median + _SAME_MM
    if below(np.array([beyond]), median, beyond)[0] < size / 2 * (1 + 1e-12):
        # Exactly half the length lies below a step: the middle of the step.
        median = (median + reaching(size / 2 * (1 + 1e-12))) / 2
    return GapFigures(least=float(least.min()), median=median, greatest=float(greatest.max()), coupled_mm=size)


def coupled_length(profile: SpacingProfile) -> float:
    """Length [mm] over which the other leg runs beside this one."""
    return math.fsum((profile.s_to - profile.s_from)[profile.coupled])


def _share_below(c: Floats, b: Floats, a: Floats) -> Floats:
    """What share of u in 0 … 1 has a u² + b u + c ≤ 0; roots in the form that does not cancel."""
    root = np.sqrt(np.maximum(b * b - 4 * a * c, 0.0))
    q = -(b + np.where(b < 0, -root, root)) / 2
    with np.errstate(divide="ignore", invalid="ignore"):
        one, two = q / a, c / q
    one = np.where(np.isfinite(one), one, np.where(a * b <= 0, np.inf, -np.inf))
    two = np.where(np.isfinite(two), two, 0.0)
    low, high = np.clip(np.minimum(one, two), 0.0, 1.0), np.clip(np.maximum(one, two), 0.0, 1.0)
    # Between roots u lies in [0, low], [low, high], [high, 1]; each counts where its middle does.
    total = np.zeros_like(c)
    for left, right in ((np.zeros_like(low), low), (low, high), (high, np.ones_like(high))):
        u = (left + right) / 2
        total += np.where((a * u + b) * u + c <= 0, right - left, 0.0)
    return total


def _runs(profile: SpacingProfile, use: Ints) -> tuple[Floats, Floats, Floats]:
    """Halves of the stretches as runs over which the gap goes from low to high, with their lengths."""
    ends = np.concatenate([profile.gap_from[use], profile.gap_to[use]])
    middle = np.tile(profile.gap_mid[use], 2)
    half = np.tile((profile.s_to - profile.s_from)[use] / 2, 2)
    return np.minimum(ends, middle), np.maximum(ends, middle), half
