"""Where foreign copper stands beside one leg of a pair and not beside the other."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.board.columns import Bools, Floats, Ints
from pairrules.checks.leg_line import LegLine
from pairrules.checks.wording import TIE_DIGITS, TOLERANCE
from pairrules.geometry.neighbours import NeighbourProfile
from pairrules.geometry.pair_geometry import SpacingProfile


@dataclass(frozen=True, slots=True, kw_only=True)
class OneSided:
    """A stretch of a leg: s_from, s_to [mm] track length; gap [mm], the least in it; net of the copper, −1 for none."""

    s_from: float
    s_to: float
    gap: float
    net: int

    @property
    def length_mm(self) -> float:
        """Track length [mm]."""
        return self.s_to - self.s_from


def one_sided(
    own: LegLine,
    other: LegLine,
    own_beside: NeighbourProfile,
    other_beside: NeighbourProfile,
    spacing: SpacingProfile,
    *,
    gap_mm: float,
    breakout_mm: float = 0.0,
) -> tuple[OneSided, ...]:
    """Stretches with copper nearer than `gap_mm` on the leg's outer side, none within twice that on the other's.

    The outer side is the one away from the partner. Only where the legs run beside each other; `breakout_mm` at each
    end is left out. Parameters: spacing: of the leg whose `own` is the line. Returns: longest first.
    """
    whole = float(own.s_from[-1] + own.length[-1])
    # Nothing changes between two cuts: neither leg's neighbours, nor whether the legs run side by side.
    images = [own.facing(at, other_beside.layer) for at in (other_beside.start, other_beside.end)]
    ends = np.array([breakout_mm, whole - breakout_mm])
    cuts = np.concatenate([own_beside.s_from, own_beside.s_to, spacing.s_from, spacing.s_to, *images, ends])
    cuts = np.unique(cuts[(cuts >= breakout_mm) & (cuts <= whole - breakout_mm)])
    begin, end = cuts[:-1], cuts[1:]
    longer = end - begin > TOLERANCE
    begin, end = begin[longer], end[longer]
    if not len(begin):
        return ()
    middle = (begin + end) / 2
    at, along, layer = own.at(middle)
    s_other = other.facing(at, layer)
    coupled = spacing.coupled[_row(spacing.s_from, middle)] & ~np.isnan(s_other)
    at_other, along_other, _ = other.at(np.nan_to_num(s_other))
    gap, net = _outer(own_beside, middle, _left_of(at, along, at_other))
    facing_gap, _ = _outer(other_beside, np.nan_to_num(s_other), _left_of(at_other, along_other, at))
    tilted = coupled & (gap < gap_mm - TOLERANCE) & ~(facing_gap <= 2 * gap_mm + TOLERANCE)
    return _joined(begin, end, gap, net, tilted)


def _row(s_from: Floats, s: Floats) -> Ints:
    rows: Ints = np.clip(np.searchsorted(s_from, s, side="right") - 1, 0, len(s_from) - 1)
    return rows


def _left_of(at: Floats, along: Floats, point: Floats) -> Bools:
    """Whether each point lies to the left of its line's direction."""
    away = point - at
    left: Bools = along[:, 0] * away[:, 1] - along[:, 1] * away[:, 0] > 0
    return left


def _outer(beside: NeighbourProfile, s: Floats, partner_left: Bools) -> tuple[Floats, Ints]:
    """Gap and net on the side away from the partner."""
    row = _row(beside.s_from, s)
    gap = np.where(partner_left, beside.right_gap[row], beside.left_gap[row])
    net = np.where(partner_left, beside.right_net[row], beside.left_net[row])
    return gap, net


def _joined(begin: Floats, end: Floats, gap: Floats, net: Ints, tilted: Bools) -> tuple[OneSided, ...]:
    rows = np.flatnonzero(tilted)
    if not len(rows):
        return ()
    apart = np.flatnonzero(begin[rows[1:]] - end[rows[:-1]] > TOLERANCE) + 1
    found = []
    for group in np.split(rows, apart):
        lengths = {int(one): float((end - begin)[group][net[group] == one].sum()) for one in np.unique(net[group])}
        found.append(
            OneSided(
                s_from=float(begin[group[0]]),
                s_to=float(end[group[-1]]),
                gap=float(gap[group].min()),
                net=max(lengths, key=lambda one: (lengths[one], -one)),
            )
        )
    return tuple(sorted(found, key=lambda one: (-round(one.length_mm, TIE_DIGITS), one.s_from)))
