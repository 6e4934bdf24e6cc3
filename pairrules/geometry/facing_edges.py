"""Which edges face a centre line square to it: each as a distance along the piece, and the nearest of them all.

A place on pieces is written 2·row + t, t the piece's parameter from 0 to 1, so that one sorted column holds all.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.board.columns import Bools, Floats, Ints
from pairrules.geometry.curve_edges import arc_parameter, crossings
from pairrules.geometry.curves import Curves, directions, points

_SAME_MM = 1e-9
"""Places nearer than this are one."""
_EQUAL_MM = 1e-6
"""Edges that lie nearer to each other than this are equally near."""
_ROUNDS = 40
"""Edges of overlapping copper cross; each round finds where the nearest edge changes. Two or three are the rule."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Facing:
    """Ranges of pieces over which one edge is met by the square line to one side, nearing or receding throughout.

    row: of the curves. edge: row of the edges. begin, end: places. side: 1 left of travel, −1 right.
    """

    row: Ints
    edge: Ints
    begin: Floats
    end: Floats
    side: Ints


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Nearest:
    """Pieces cut into stretches: ends as places, and per side (left, right) the nearest edge and its distance.

    begin, end: (k,). edge: (k, 2), −1 for none. at_begin, at_end: (k, 2) [mm] from the centre line; NaN for none.
    """

    begin: Floats
    end: Floats
    edge: Ints
    at_begin: Floats
    at_end: Floats


def facing(curves: Curves, lengths: Floats, edges: Floats, reach: Floats) -> Facing:
    """The ranges in which row for row an edge (k, 2, 2) faces a curve within `reach` [mm] of its centre line."""
    low, high = _shadow(curves, edges)
    rows = np.tile(np.arange(len(curves)), 2)
    low, high = np.clip(low, 0.0, 1.0), np.clip(high, 0.0, 1.0)
    some = (high - low) * lengths[rows] > _SAME_MM
    rows, low, high = rows[some], low[some], high[some]
    curves, edges, lengths, reach = curves.take(rows), edges[rows], lengths[rows], reach[rows]

    along = edges[:, 1] - edges[:, 0]
    to_foot = edges[:, 0] - curves.centre
    to_foot = to_foot - along * ((to_foot * along).sum(axis=1) / (along * along).sum(axis=1))[:, None]
    cuts = [low, high, arc_parameter(curves, to_foot)]
    for offset in (np.zeros(len(rows)), reach, -reach):
        cuts += crossings(_beside(curves, offset), edges)
    t = np.column_stack(cuts)
    t = np.sort(np.clip(np.where(np.isnan(t), low[:, None], t), low[:, None], high[:, None]), axis=1)
    begin, end = t[:, :-1].ravel(), t[:, 1:].ravel()
    which = np.repeat(np.arange(len(rows)), t.shape[1] - 1)
    kept = (end - begin) * lengths[which] > _SAME_MM
    begin, end, which = begin[kept], end[kept], which[kept]
    middle = distance_along(curves.take(which), edges[which], (begin + end) / 2)
    near = np.abs(middle) <= reach[which]
    which = which[near]
    row = rows[which]
    return Facing(
        row=row,
        edge=row,
        begin=begin[near],
        end=end[near],
        side=np.where(middle[near] > 0, 1, -1),
    )


def distance_along(curves: Curves, edges: Floats, t: Floats) -> Floats:
    """Signed distance [mm], positive to the left, from each curve at t to its edge, measured square to the curve."""
    at = points(curves, t)
    heading = directions(curves, t)
    normal = np.column_stack([-np.sin(heading), np.cos(heading)])
    along = edges[:, 1] - edges[:, 0]
    turn = along[:, 0] * normal[:, 1] - along[:, 1] * normal[:, 0]
    offset = at - edges[:, 0]
    u = (offset[:, 0] * normal[:, 1] - offset[:, 1] * normal[:, 0]) / np.where(turn == 0, np.inf, turn)
    # On the edge whatever rounding says, so that an edge nearly square to the curve stays within its own length.
    met = np.clip(u, 0.0, 1.0)[:, None] * along - offset
    distance: Floats = (met * normal).sum(axis=1)
    return distance


def enters(curves: Curves, edges: Floats, t: Floats, side: Ints) -> Bools:
    """Whether the square line to `side` enters the copper on the edge's left there, rather than leaves it."""
    heading = directions(curves, t)
    along = edges[:, 1] - edges[:, 0]
    inward: Bools = side * (along[:, 0] * np.cos(heading) + along[:, 1] * np.sin(heading)) > 0
    return inward


def nearest_facing(curves: Curves, lengths: Floats, edges: Floats, faces: Facing) -> Nearest:
    """The nearest edge on each side of each curve, in stretches over which it is the same.

    edges: rows that `faces.edge` counts.
    """
    rows: Floats = 2.0 * np.arange(len(curves), dtype=np.float64)
    extra: Floats = np.empty(0)
    for _ in range(_ROUNDS):
        found, more = _round(curves, lengths, edges, faces, rows, extra)
        if not len(more):
            break
        extra = np.concatenate([extra, more])
    return found


def cut_further(curves: Curves, edges: Floats, found: Nearest, places: Floats) -> Nearest:
    """The same stretches, cut at further places too."""
    begin = np.unique(np.concatenate([found.begin, places]))
    parent = np.searchsorted(found.begin, begin, side="right") - 1
    end = found.end[parent]
    within = np.flatnonzero(parent[1:] == parent[:-1])
    end[within] = begin[within + 1]
    row = (begin / 2).astype(np.int64)
    edge = found.edge[parent]
    at = np.full((2, len(begin), 2), np.nan)
    for side in (0, 1):
        met = np.flatnonzero(edge[:, side] >= 0)
        of, to = curves.take(row[met]), edges[edge[met, side]]
        for place, t in enumerate((begin, end)):
            at[place, met, side] = np.abs(distance_along(of, to, t[met] - 2 * row[met]))
    return Nearest(begin=begin, end=end, edge=edge, at_begin=at[0], at_end=at[1])


def _round(
    curves: Curves, lengths: Floats, edges: Floats, faces: Facing, rows: Floats, extra: Floats
) -> tuple[Nearest, Floats]:
    places, back = np.unique(
        np.concatenate([rows, rows + 1, faces.begin + rows[faces.row], faces.end + rows[faces.row], extra]),
        return_inverse=True,
    )
    row = (places / 2).astype(np.int64)
    kept = np.concatenate([[True], np.diff(places) * lengths[row[1:]] > _SAME_MM])[: len(places)]
    index = (np.cumsum(kept) - 1)[back]
    places, row = places[kept], row[kept]
    places[index[len(rows) : 2 * len(rows)]] = rows + 1
    count, ranges = len(rows), len(faces.row)
    first, last = index[2 * count : 2 * count + ranges], index[2 * count + ranges : 2 * count + 2 * ranges]

    counts = last - first
    face = np.repeat(np.arange(ranges), counts)
    slab = np.arange(len(face)) + np.repeat(first - (np.cumsum(counts) - counts), counts)
    begin, end = places[slab] - rows[row[slab]], places[slab + 1] - rows[row[slab]]
    of, to, side = curves.take(faces.row[face]), edges[faces.edge[face]], faces.side[face]
    at = np.stack([np.abs(distance_along(of, to, t)) for t in (begin, (begin + end) / 2, end)])

    group = 2 * slab + (side < 0)
    best = [_smallest(group, at[place], faces.edge[face]) for place in range(3)]
    winner = best[1]
    more = []
    for place in (0, 2):
        rival = best[place]
        gain = at[place, winner] - at[place, rival]
        beaten = gain > _EQUAL_MM
        lead = at[1, rival] - at[1, winner]
        away = begin if place == 0 else end
        middle = (begin[winner] + end[winner]) / 2
        t = away[winner] + (middle - away[winner]) * gain / np.where(beaten, gain + lead, 1.0)
        more.append((t + rows[row[slab[winner]]])[beaten & (gain + lead > 0)])

    opens = np.flatnonzero(row[1:] == row[:-1])
    edge = np.full((len(places), 2), -1, dtype=np.int64)
    ends = np.full((2, len(places), 2), np.nan)
    where = (slab[winner], group[winner] % 2)
    edge[where] = faces.edge[face[winner]]
    ends[0][where], ends[1][where] = at[0, winner], at[2, winner]
    found = Nearest(
        begin=places[opens], end=places[opens + 1], edge=edge[opens], at_begin=ends[0][opens], at_end=ends[1][opens]
    )
    fresh: Floats = np.unique(np.concatenate(more))
    return found, fresh[~np.isin(fresh, extra)]


def _smallest(group: Ints, value: Floats, tie: Ints) -> Ints:
    """Row of the smallest value of each group, in the order of the groups."""
    order = np.lexsort((tie, value, group))
    first: Ints = order[np.concatenate([[True], np.diff(group[order]) > 0])[: len(order)]]
    return first


def _shadow(curves: Curves, edges: Floats) -> tuple[Floats, Floats]:
    """From and to (2k,) of the parameters at which the square line may meet each edge; an arc's second turn after."""
    chord = curves.end - curves.start
    square = (chord * chord).sum(axis=1)
    arc = curves.sweep != 0
    t = [((edges[:, end] - curves.start) * chord).sum(axis=1) / np.where(square > 0, square, 1.0) for end in (0, 1)]
    spoke = curves.start - curves.centre
    turn = np.sign(curves.sweep)
    angle = []
    for end in (0, 1):
        radial = edges[:, end] - curves.centre
        cross = spoke[:, 0] * radial[:, 1] - spoke[:, 1] * radial[:, 0]
        angle.append(np.arctan2(cross, (spoke * radial).sum(axis=1)) * turn)
    step = (angle[1] - angle[0] + np.pi) % (2 * np.pi) - np.pi
    whole = np.where(arc, np.abs(curves.sweep), 1.0)
    low = np.where(arc, np.minimum(angle[0], angle[0] + step) / whole, np.minimum(*t))
    high = np.where(arc, np.maximum(angle[0], angle[0] + step) / whole, np.maximum(*t))
    again = np.where(arc, 2 * np.pi / whole, np.nan)
    return np.concatenate([low, low + again]), np.concatenate([high, high + again])


def _beside(curves: Curves, offset: Floats) -> Curves:
    """Each curve moved to its left by `offset`; NaN where an arc would shrink beyond its centre."""
    chord = curves.end - curves.start
    size = np.hypot(chord[:, 0], chord[:, 1])
    normal = np.column_stack([-chord[:, 1], chord[:, 0]]) / np.where(size > 0, size, 1.0)[:, None]
    spoke, last = curves.start - curves.centre, curves.end - curves.centre
    scale = 1 - np.sign(curves.sweep) * offset / np.hypot(spoke[:, 0], spoke[:, 1])
    scale = np.where(scale > 0, scale, np.nan)[:, None]
    arc = (curves.sweep != 0)[:, None]
    return Curves(
        start=np.where(arc, curves.centre + scale * spoke, curves.start + normal * offset[:, None]),
        end=np.where(arc, curves.centre + scale * last, curves.end + normal * offset[:, None]),
        centre=curves.centre,
        sweep=curves.sweep,
    )
