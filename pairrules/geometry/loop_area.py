"""The area between the two legs of a link: seen from above, and as a vector in space.

The closed path runs along plus from source to load, straight across to minus, back along minus, and straight across
the source ends. Without sign its area is ∫|w| dA, w the number of times the path winds about a point. For legs that
cross that is the sum of the lobes; a pair that passes over itself on another layer counts as gap times length, not as
the ring it draws; and no choice of a first point enters, as it would in a splitting into simple loops. Lobes of
opposite sign that lie upon each other cancel where they overlap.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shapely

from pairrules.board.columns import Floats, Ints
from pairrules.geometry.pair_geometry import Pieces

_AT_ONCE = 2_000_000
"""Rows of span and slab worked on at once: bounds the memory of a long serpentine, changes no result."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LoopArea:
    """Area between the legs seen from above [mm²]: lobes added without sign, and magnitude of the sum with sign."""

    total_mm2: float
    net_mm2: float


def loop_area(plus: Pieces, minus: Pieces) -> LoopArea:
    """Area between the centre lines of two legs, seen from above.

    Parameters: plus, minus: source end first; arcs stay arcs, joins and parts in series are straight, barrels a point.
    Returns: `total_mm2` (lobes added without sign), `net_mm2` (with sign, its magnitude).
    Raises: ValueError where a leg has no piece.
    Source: Green's theorem; an arc adds the circular segment r²(θ − sin θ)/2 (elementary geometry). The sum without
    sign sweeps a line over slabs between which no two pieces cross (M. I. Shamos, D. Hoey, Geometric intersection
    problems, 1976; from memory).
    """
    path = _closed_path(plus, minus)
    return LoopArea(total_mm2=_without_sign(path), net_mm2=abs(float(_vector(path)[2])))


def vector_area(plus: Pieces, minus: Pieces, heights: Floats) -> Floats:
    """Vector area ½∮ r × dr (3,) [mm²] of the closed path in space; a uniform field B threads it with the flux B·A.

    Parameters: plus, minus: as in `loop_area`. heights: (copper layers,) z of each layer's centre [mm], upward. Barrels
    stand upright; z of the result is positive where the path runs counter-clockwise seen from above.
    Returns: x and y are NaN where a height that the path needs is NaN.
    Raises: ValueError where a leg has no piece.
    Source: Stokes' theorem for a uniform field (elementary vector analysis).
    """
    return _vector(_closed_path(plus, minus, np.asarray(heights, dtype=np.float64)))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Path:
    """A closed polygon (2n, 3) of both ends of each piece, and the arcs that bulge from the chord of piece `piece`.

    A corner stands twice where pieces meet; the sides between are the ends' straight closings and barrels.
    """

    points: Floats
    piece: Ints
    centre: Floats
    radius: Floats
    angle: Floats
    sweep: Floats


def _closed_path(plus: Pieces, minus: Pieces, heights: Floats | None = None) -> _Path:
    if not len(plus) or not len(minus):
        raise ValueError("a leg without pieces encloses no area")
    start = np.concatenate([plus.start, minus.end[::-1]])
    end = np.concatenate([plus.end, minus.start[::-1]])
    centre = np.concatenate([plus.centre, minus.centre[::-1]])
    sweep = np.concatenate([plus.sweep, -minus.sweep[::-1]])
    layer = np.concatenate([plus.layer, minus.layer[::-1]])
    z = np.zeros(len(layer)) if heights is None else heights[layer]
    # About its own middle: far from the origin the products would lose the digits that matter.
    middle = (start.min(axis=0) + start.max(axis=0)) / 2
    start, end, centre = start - middle, end - middle, centre - middle

    piece = np.flatnonzero(sweep)
    centre, sweep = centre[piece], sweep[piece]
    first, last = start[piece] - centre, end[piece] - centre
    # A file's rounding leaves the ends of an arc at two radii; their mean reads the same backwards.
    radius = (np.hypot(*first.T) + np.hypot(*last.T)) / 2
    angle = np.arctan2(first[:, 1], first[:, 0])
    start[piece] = centre + radius[:, None] * np.column_stack([np.cos(angle), np.sin(angle)])
    end[piece] = centre + radius[:, None] * np.column_stack([np.cos(angle + sweep), np.sin(angle + sweep)])
    points = np.stack([np.column_stack([start, z]), np.column_stack([end, z])], axis=1).reshape(-1, 3)
    return _Path(points=points, piece=piece, centre=centre, radius=radius, angle=angle, sweep=sweep)


def _vector(path: _Path) -> Floats:
    area: Floats = np.cross(path.points, np.roll(path.points, -1, axis=0)).sum(axis=0) / 2
    area[2] += float((np.sign(path.sweep) * _segment(path.radius, np.abs(path.sweep))).sum())
    return area


def _segment(radius: Floats, angle: Floats) -> Floats:
    """Area r²(θ − sin θ)/2 between an arc and its chord; the series where the difference would lose its digits."""
    square = angle * angle
    series = angle * square / 6 * (1 - square / 20 * (1 - square / 42 * (1 - square / 72)))
    return radius * radius * np.where(angle < 0.1, series, angle - np.sin(angle)) / 2


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Spans:
    """Pieces of the path as functions y(x) on x0 < x1: a line (half 0), or a circle's upper (1) or lower (−1) side.

    `along` is 1 where the path runs toward greater x, else −1. Upright lines bound no slab and are left out.
    """

    x0: Floats
    x1: Floats
    y0: Floats
    y1: Floats
    along: Ints
    half: Ints
    centre: Floats
    radius: Floats

    def height(self, row: Ints, x: Floats) -> Floats:
        """Ordinate of spans `row` at `x`."""
        part = (x - self.x0[row]) / (self.x1[row] - self.x0[row])
        line = self.y0[row] * (1 - part) + self.y1[row] * part
        rise = np.sqrt(np.maximum(self.radius[row] ** 2 - (x - self.centre[row, 0]) ** 2, 0.0))
        return np.where(self.half[row] == 0, line, self.centre[row, 1] + self.half[row] * rise)


def _spans(path: _Path) -> _Spans:
    start, end = path.points[:, :2], np.roll(path.points[:, :2], -1, axis=0)
    straight = start[:, 0] != end[:, 0]
    straight[2 * path.piece] = False
    start, end = start[straight], end[straight]
    # Each arc is cut where it turns back in x: at the multiples of π, three at most in a whole turn.
    low = np.minimum(path.angle, path.angle + path.sweep)
    high = np.maximum(path.angle, path.angle + path.sweep)
    turns = (np.ceil(low / np.pi)[:, None] + np.arange(3)) * np.pi
    cuts = np.column_stack([low, np.clip(turns, low[:, None], high[:, None]), high])
    from_angle, to_angle = cuts[:, :-1].ravel(), cuts[:, 1:].ravel()
    arc = np.repeat(np.arange(len(path.piece)), 4)
    half = np.where(np.sin((from_angle + to_angle) / 2) > 0, 1, -1)
    centre, radius = path.centre[arc], path.radius[arc]
    along = -half * np.sign(path.sweep[arc]).astype(np.int64)
    ends = np.stack([from_angle, to_angle])
    x = centre[:, 0] + radius * np.cos(ends)
    y = centre[:, 1] + radius * np.sin(ends)
    left = np.argmin(x, axis=0)
    rows = np.arange(len(arc))
    kept = np.abs(x[0] - x[1]) > 0

    right = start[:, 0] < end[:, 0]
    none = np.zeros(len(start))
    return _Spans(
        x0=np.concatenate([np.minimum(start[:, 0], end[:, 0]), x[left, rows][kept]]),
        x1=np.concatenate([np.maximum(start[:, 0], end[:, 0]), x[1 - left, rows][kept]]),
        y0=np.concatenate([np.where(right, start[:, 1], end[:, 1]), y[left, rows][kept]]),
        y1=np.concatenate([np.where(right, end[:, 1], start[:, 1]), y[1 - left, rows][kept]]),
        along=np.concatenate([np.where(right, 1, -1), along[kept]]),
        half=np.concatenate([none.astype(np.int64), half[kept]]),
        centre=np.concatenate([np.column_stack([none, none]), centre[kept]]),
        radius=np.concatenate([none, radius[kept]]),
    )


def _without_sign(path: _Path) -> float:
    spans = _spans(path)
    edges = np.unique(np.concatenate([spans.x0, spans.x1, _crossings(spans)]))
    if len(edges) < 2:
        return 0.0
    first, last = np.searchsorted(edges, spans.x0), np.searchsorted(edges, spans.x1)
    begun = np.bincount(first, minlength=len(edges)) - np.bincount(last, minlength=len(edges))
    rows_before = np.concatenate([[0], np.cumsum(np.cumsum(begun)[:-1])])
    total, slab = 0.0, 0
    while slab < len(edges) - 1:
        beyond = max(slab + 1, int(np.searchsorted(rows_before, rows_before[slab] + _AT_ONCE, side="right")) - 1)
        total += _slabs(spans, edges, np.clip(first, slab, beyond), np.clip(last, slab, beyond))
        slab = beyond
    return total


def _slabs(spans: _Spans, edges: Floats, first: Ints, last: Ints) -> float:
    """Σ |w| times area between neighbouring spans, over the slabs `first` to `last` of each span."""
    counts = last - first
    row = np.repeat(np.arange(len(counts)), counts)
    slab = np.arange(len(row)) + np.repeat(first - (np.cumsum(counts) - counts), counts)
    x0, x1 = edges[slab], edges[slab + 1]
    order = np.lexsort((spans.height(row, (x0 + x1) / 2), slab))
    row, slab, x0, x1 = row[order], slab[order], x0[order], x1[order]
    y0, y1 = spans.height(row, x0), spans.height(row, x1)
    under = (y0 + y1) / 2 * (x1 - x0)
    arcs = np.flatnonzero(spans.half[row])
    radius = spans.radius[row[arcs]]
    chord = np.hypot(x1[arcs] - x0[arcs], y1[arcs] - y0[arcs])
    under[arcs] += spans.half[row[arcs]] * _segment(radius, 2 * np.arcsin(np.minimum(chord / (2 * radius), 1.0)))
    winding = np.cumsum(spans.along[row])
    # Each slab begins anew: its first span's winding is its own direction, whatever came before.
    opens = np.flatnonzero(np.concatenate([[True], slab[1:] != slab[:-1]]))
    before = winding[opens] - spans.along[row[opens]]
    winding = winding - np.repeat(before, np.diff(np.append(opens, len(slab))))
    inside = slab[1:] == slab[:-1]
    return float((np.abs(winding[:-1]) * np.diff(under))[inside].sum())


def _crossings(spans: _Spans) -> Floats:
    """The x at which two spans cross. One too many is harmless: it only cuts a slab in two."""
    peak = np.where((spans.centre[:, 0] > spans.x0) & (spans.centre[:, 0] < spans.x1), spans.half, 0)
    top = np.maximum(np.maximum(spans.y0, spans.y1), np.where(peak > 0, spans.centre[:, 1] + spans.radius, -np.inf))
    bottom = np.minimum(np.minimum(spans.y0, spans.y1), np.where(peak < 0, spans.centre[:, 1] - spans.radius, np.inf))
    boxes = shapely.box(spans.x0, bottom, spans.x1, top)
    one, two = shapely.STRtree(boxes).query(boxes)
    one, two = one[one < two], two[one < two]
    one, two = np.where(spans.half[one] == 0, one, two), np.where(spans.half[one] == 0, two, one)
    low, high = np.maximum(spans.x0[one], spans.x0[two]), np.minimum(spans.x1[one], spans.x1[two])
    lines = (spans.half[one] == 0) & (spans.half[two] == 0)
    mixed = (spans.half[one] == 0) & ~lines
    arcs = spans.half[one] != 0
    found = [
        _line_line(spans, one[lines], two[lines], low[lines], high[lines]),
        *_line_circle(spans, one[mixed], two[mixed]),
        *_circle_circle(spans, one[arcs], two[arcs]),
    ]
    low = np.concatenate([low[lines], low[mixed], low[mixed], low[arcs], low[arcs]])
    high = np.concatenate([high[lines], high[mixed], high[mixed], high[arcs], high[arcs]])
    x = np.concatenate(found)
    return x[(x > low) & (x < high)]  # NaN, where there is no crossing, is in no range


def _line_line(spans: _Spans, one: Ints, two: Ints, low: Floats, high: Floats) -> Floats:
    at_low = spans.height(one, low) - spans.height(two, low)
    at_high = spans.height(one, high) - spans.height(two, high)
    cross = at_low * at_high < 0
    return np.where(cross, low + (high - low) * at_low / np.where(cross, at_low - at_high, 1.0), np.nan)


def _line_circle(spans: _Spans, line: Ints, arc: Ints) -> tuple[Floats, Floats]:
    dx, dy = spans.x1[line] - spans.x0[line], spans.y1[line] - spans.y0[line]
    px, py = spans.x0[line] - spans.centre[arc, 0], spans.y0[line] - spans.centre[arc, 1]
    square = dx * dx + dy * dy
    foot = -(px * dx + py * dy) / square
    off = (px * dy - py * dx) ** 2 / square
    within = spans.radius[arc] ** 2 - off
    reach = np.sqrt(np.where(within > 0, within, np.nan) / square)
    return spans.x0[line] + (foot - reach) * dx, spans.x0[line] + (foot + reach) * dx


def _circle_circle(spans: _Spans, one: Ints, two: Ints) -> tuple[Floats, Floats]:
    apart = spans.centre[two] - spans.centre[one]
    square = (apart * apart).sum(axis=1)
    square = np.where(square > 0, square, np.nan)
    r1, r2 = spans.radius[one] ** 2, spans.radius[two] ** 2
    along = (square + r1 - r2) / (2 * square)
    within = r1 / square - along * along
    across = np.sqrt(np.where(within > 0, within, np.nan))
    x = spans.centre[one, 0] + along * apart[:, 0]
    return x - across * apart[:, 1], x + across * apart[:, 1]
