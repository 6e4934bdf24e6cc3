"""Profiles along a route as short rows: points that lie straight between their neighbours are left out.

A profile comes cut finely wherever the nearest copper changes or the gap bends; a page shows half a micrometre at most.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from pairrules.drawing import RunningDifference, SpacingStretch
from pairrules.reports.review_page.paths import micrometres

SAME_MM = 0.0005
"""Half a micrometre, the rounding of the page's drawing units."""


def spacing_rows(stretches: Sequence[SpacingStretch]) -> list[list[Any]]:
    """Rows of from, to, gap at both ends and the middle, whether coupled, layer, end and, after a break, start.

    Stretches that go straight on, on the board and in the profile, are joined, as most are.
    """
    joined: list[SpacingStretch] = []
    group: list[SpacingStretch] = []
    for one in stretches:
        whole = _one_stretch([*group, one])
        if whole is None:
            joined.append(one)
            group = [one]
        elif group:
            joined[-1] = whole
            group.append(one)
        else:
            joined, group = [one], [one]
    return [
        [
            short(one.from_mm, 3),
            short(one.to_mm, 3),
            short(one.gap_from_mm, 4),
            short(one.gap_mid_mm, 4),
            short(one.gap_to_mm, 4),
            int(one.coupled),
            one.layer,
            *micrometres(one.end),
            # Only where it is not the end of the one before.
            *(micrometres(one.start) if i == 0 or joined[i - 1].end != one.start else ()),
        ]
        for i, one in enumerate(joined)
    ]


def difference_rows(points: Sequence[RunningDifference]) -> list[list[Any]]:
    """Rows of length along plus, difference, layer, place."""
    return [
        [short(one.along_mm, 3), short(one.difference_mm, 4), one.layer, *micrometres(one.at)] for one in _bends(points)
    ]


def short(number: float | None, digits: int) -> float | int | None:
    """Rounded for the page, whole numbers without a point; −0 is 0."""
    if number is None:
        return None
    rounded = round(float(number), digits) + 0.0
    return int(rounded) if rounded.is_integer() else rounded


def _one_stretch(group: Sequence[SpacingStretch]) -> SpacingStretch | None:
    """Stretches that follow one another as one, whose gap is straight; `None` where that would show."""
    first, last = group[0], group[-1]
    if len(group) == 1:
        return first
    if last.coupled != first.coupled or last.layer != first.layer or group[-2].end != last.start:
        return None
    (ax, ay), (cx, cy) = first.start, last.end
    long = math.hypot(cx - ax, cy - ay)
    for one in group[1:]:
        bx, by = one.start
        if abs((bx - ax) * (cy - ay) - (by - ay) * (cx - ax)) > SAME_MM * long:
            return None
    if not first.coupled:
        # Where the legs are not side by side no gap is drawn.
        return replace(first, to_mm=last.to_mm, end=last.end)
    points = [
        point
        for one in group
        for point in (
            (one.from_mm, one.gap_from_mm),
            ((one.from_mm + one.to_mm) / 2, one.gap_mid_mm),
            (one.to_mm, one.gap_to_mm),
        )
    ]
    begin, end = first.gap_from_mm, last.gap_to_mm
    if begin is None or end is None:
        return None
    slope = (end - begin) / max(last.to_mm - first.from_mm, SAME_MM)
    for s, gap in points:
        if gap is None or abs(begin + slope * (s - first.from_mm) - gap) > 2 * SAME_MM:
            return None
    return replace(first, to_mm=last.to_mm, end=last.end, gap_mid_mm=(begin + end) / 2, gap_to_mm=end)


def _bends(points: Sequence[RunningDifference]) -> list[RunningDifference]:
    """The points without those that lie straight between the ones before and after, on the board and in the curve."""
    found = list(points[:1])
    for i in range(1, len(points) - 1):
        before, here, after = found[-1], points[i], points[i + 1]
        span = after.along_mm - before.along_mm
        share = (here.along_mm - before.along_mm) / span if span > 0 else math.inf
        between = (
            (before.difference_mm, here.difference_mm, after.difference_mm),
            (before.at[0], here.at[0], after.at[0]),
            (before.at[1], here.at[1], after.at[1]),
        )
        # A quarter of what is shown, so that what is left out in a row does not add up to something that is.
        straight = share <= 1 and all(abs(a + share * (b - a) - x) <= SAME_MM / 4 for a, x, b in between)
        if not straight or not before.layer == here.layer == after.layer:
            found.append(here)
    return [*found, *points[-1:]] if len(points) > 1 else found
