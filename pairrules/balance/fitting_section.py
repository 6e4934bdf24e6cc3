"""Which width of the legs, or which gap, would give a cross-section the impedance that is wanted, all else as it is.

The section is drawn and solved again with each value that is tried, so that planes, mask and copper beside the legs
count as they do in the figure that missed its limit.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import lru_cache

from pairrules.balance.drawn_section import Drawing, Leg
from pairrules.fields.cross_section import CrossSection
from pairrules.fields.solve import solve_section

STEP_MM = 0.005
"""Values are tried and named in steps of this."""

LEAST_MM = 0.05
"""Legs narrower, and copper nearer, are not looked at. Common practice, no source: finer copper is seldom made."""

_FIRST, _STRIDE = 1.2, 2.0
"""How far the second value lies from the first, and at most a next one from the nearest: factors."""

_WIDEST = 5.0
"""Legs up to so many times as wide, and gaps up to so many times as wide, are looked at."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Fitting:
    """A value [mm] on the grid of `STEP_MM`, and the differential impedance [ohm] that the section then has."""

    value_mm: float
    impedance_ohm: float


def fitting_width(drawing: Drawing, aim: float, band: tuple[float, float]) -> Fitting | None:
    """The width of both legs that comes nearest to `aim` [ohm] and lies in the band; their inner edges stay.

    `None` where none does, be it for want of room beside other copper.
    """
    return _fitting(drawing, aim, band, _with_width, max(leg.width for leg in drawing.legs))


def fitting_gap(drawing: Drawing, aim: float, band: tuple[float, float]) -> Fitting | None:
    """The gap that comes nearest to `aim` [ohm] and lies in the band; both legs move by the same amount."""
    return _fitting(drawing, aim, band, _with_gap, _gap(drawing))


def impedance(drawing: Drawing) -> float | None:
    """The differential impedance [ohm]; `None` where the section cannot be solved."""
    return _solved(drawing.section())


@lru_cache(maxsize=512)
def _solved(section: CrossSection) -> float | None:
    # Pairs of a board often have the same section, and each would try the same values.
    try:
        pair = solve_section(section).pair
    except ValueError:
        return None
    return None if pair is None else pair.impedance_diff_ohm


def _fitting(
    drawing: Drawing,
    aim: float,
    band: tuple[float, float],
    changed: Callable[[Drawing, float], Drawing],
    given: float,
) -> Fitting | None:
    if len(drawing.legs) != 2:
        return None
    steps = range(round(LEAST_MM / STEP_MM), round(given * _WIDEST / STEP_MM) + 1)
    room = [step for step in steps if _has_room(drawing, changed(drawing, step * STEP_MM))]
    if not room:
        return None
    solved: dict[int, float] = {}
    step = min(max(round(given / STEP_MM), room[0]), room[-1])
    while step not in solved:
        found = impedance(changed(drawing, step * STEP_MM))
        if found is None:
            return None
        solved[step] = found
        step = min(max(_next(solved, aim), room[0]), room[-1])
    near = [(step, found) for step, found in sorted(solved.items()) if band[0] <= found <= band[1]]
    if not near:
        return None
    step, found = min(near, key=lambda one: abs(one[1] - aim))
    return Fitting(value_mm=round(step * STEP_MM, 6), impedance_ohm=found)


def _next(solved: dict[int, float], aim: float) -> int:
    """The step to look at next: where the impedance, straight over logarithms, would be `aim`; one seen ends it.

    Two steps that lie next to each other on either side of `aim` end it as well.
    """
    if len(solved) == 1:
        ((step, found),) = solved.items()
        return max(step + 1, round(step * _FIRST)) if found != aim else step
    below = min(((aim - z, step) for step, z in solved.items() if z <= aim), default=None)
    above = min(((z - aim, step) for step, z in solved.items() if z > aim), default=None)
    if below and above:
        pair = sorted((below[1], above[1]))
        if pair[1] - pair[0] <= 1:
            return pair[0]
    else:
        pair = sorted(solved, key=lambda step: abs(solved[step] - aim))[:2]
    (x0, z0), (x1, z1) = ((math.log(step), math.log(solved[step])) for step in pair)
    if z0 == z1:
        return pair[0]
    where = x0 + (math.log(aim) - z0) * (x1 - x0) / (z1 - z0)
    nearest = math.log(pair[0]) if not (below and above) else None
    if nearest is not None:
        where = min(max(where, nearest - math.log(_STRIDE)), nearest + math.log(_STRIDE))
        step = round(math.exp(where))
        return step if step != pair[0] else step + (1 if where > nearest else -1)
    return min(max(round(math.exp(where)), pair[0] + 1), pair[1] - 1)


def _gap(drawing: Drawing) -> float:
    return drawing.legs[1].span[0] - drawing.legs[0].span[1]


def _with_width(drawing: Drawing, width: float) -> Drawing:
    left, right = drawing.legs
    legs = (
        Leg(name=left.name, centre=left.span[1] - width / 2, width=width),
        Leg(name=right.name, centre=right.span[0] + width / 2, width=width),
    )
    return replace(drawing, legs=legs)


def _with_gap(drawing: Drawing, gap: float) -> Drawing:
    out = (gap - _gap(drawing)) / 2
    left, right = drawing.legs
    return replace(drawing, legs=(replace(left, centre=left.centre - out), replace(right, centre=right.centre + out)))


def _has_room(given: Drawing, changed: Drawing) -> bool:
    """Whether the legs keep `LEAST_MM` to all other copper, or what they have where that is less already."""
    for before, after in zip(given.legs, changed.legs, strict=True):
        for low, high in given.beside:
            kept = min(LEAST_MM, max(low - before.span[1], before.span[0] - high))
            if max(low - after.span[1], after.span[0] - high) < kept - 1e-9:
                return False
    return True
