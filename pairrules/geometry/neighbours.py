"""The nearest foreign copper on each side of a leg, along the leg: its net and its gap."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from pairrules.board.arcs import FLATTENING_MM
from pairrules.board.board import Board
from pairrules.board.columns import Floats, Ints, freeze
from pairrules.geometry.copper_outlines import centre_lines
from pairrules.geometry.curves import Curves, parts
from pairrules.geometry.facing_edges import Facing, Nearest, cut_further, enters, facing, nearest_facing
from pairrules.geometry.foreign_copper import ForeignCopper
from pairrules.geometry.legs import laid_out, tracks_of
from pairrules.geometry.pair_geometry import Pieces

__all__ = ["STEP", "STEP_MM", "ForeignCopper", "NeighbourProfile", "neighbours", "neighbours_of_legs"]

STEP = 1.05
"""A gap that grows by more than this factor begins a new stretch: a gap's error of 5 % is within etching tolerance
(common practice, no source)."""
STEP_MM = 0.001
"""Nor does a gap that grows by less than this."""
_ROUNDS = 8
"""Along a line the first round cuts the steps exactly, along a bend each round halves what is left over or better."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class NeighbourProfile:
    """The foreign copper that a cut square to the leg's track shows nearest on each side, on the track's own layer.

    Columns of k rows, in order of s. A stretch ends where on either side the neighbour's net changes or its gap has
    changed by more than `STEP` and `STEP_MM`, and where the piece ends.

    Parameters
    ----------
    s_from, s_to: [mm] track length from the source end (barrels, joins and series parts take none).
    piece: row of `Pieces`. layer: index into `Board.copper`. start, end: (k, 2) [mm] the stretch's ends on the board.
    left_gap, right_gap: [mm] edge to edge, the smallest in the stretch, left and right seen along the route from its
        source; NaN where there is no foreign copper within reach; 0 where the leg itself lies in it.
    left_net, right_net: index into `Board.nets`; −1 where there is none, or where the copper belongs to no net.
    """

    s_from: Floats
    s_to: Floats
    piece: Ints
    layer: Ints
    start: Floats
    end: Floats
    left_gap: Floats
    left_net: Ints
    right_gap: Floats
    right_net: Ints

    def __post_init__(self) -> None:
        freeze(
            self,
            {
                "s_from": (np.float64, ()),
                "s_to": (np.float64, ()),
                "piece": (np.int64, ()),
                "layer": (np.int64, ()),
                "start": (np.float64, (2,)),
                "end": (np.float64, (2,)),
                "left_gap": (np.float64, ()),
                "left_net": (np.int64, ()),
                "right_gap": (np.float64, ()),
                "right_net": (np.int64, ()),
            },
        )

    def __len__(self) -> int:
        return len(self.piece)


def neighbours(
    pieces: Pieces,
    board: Board,
    own_nets: tuple[int, ...],
    within_mm: float,
    *,
    copper: ForeignCopper | None = None,
) -> NeighbourProfile:
    """The neighbours of one leg. Parameters as of `neighbours_of_legs`."""
    (found,) = neighbours_of_legs([pieces], board, [own_nets], [within_mm], copper=copper)
    return found


def neighbours_of_legs(
    legs: Sequence[Pieces],
    board: Board,
    own_nets: Sequence[tuple[int, ...]],
    within_mm: Sequence[float],
    *,
    copper: ForeignCopper | None = None,
) -> list[NeighbourProfile]:
    """The neighbours of m legs, all in one pass.

    Parameters: own_nets: of each leg the nets of its pair, whose copper is not foreign and hides nothing behind it.
    within_mm: greatest gap looked at beside each. copper: of the board, where it is at hand from another leg.
    Returns: exact stretches but for the flattening of round copper; arcs of the leg are not flattened.
    Source: lower envelope of segments (elementary geometry).
    """
    copper = ForeignCopper(board) if copper is None else copper
    together = laid_out(legs)
    own = tracks_of(together)
    row, curves, length, layer, before = own.row, own.curves, own.length, own.layer, own.before
    half = together.pieces.width[row] / 2
    reach = np.array(within_mm)[own.leg] + half

    which, edges, net = _edges_near(copper, curves, layer, reach, own.leg, own_nets)
    faces = facing(curves.take(which), length[which], edges, reach[which])
    faces = Facing(row=which[faces.row], edge=faces.edge, begin=faces.begin, end=faces.end, side=faces.side)
    found = nearest_facing(curves, length, edges, faces)
    for _ in range(_ROUNDS):
        more = _steps(found, half)
        if not len(more):
            break
        found = cut_further(curves, edges, found, more)

    track = (found.begin / 2).astype(np.int64)
    gaps = [np.maximum(at - half[track, None], 0.0) for at in (found.at_begin, found.at_end)]
    nets = np.where(found.edge >= 0, np.append(net, -1)[found.edge], -1)
    for column, side in enumerate((1, -1)):
        met = np.flatnonzero(found.edge[:, column] >= 0)
        middle = (found.begin[met] + found.end[met]) / 2 - 2 * track[met]
        within = ~enters(curves.take(track[met]), edges[found.edge[met, column]], middle, np.full(len(met), side))
        gaps[0][met[within], column] = gaps[1][met[within], column] = 0.0
    low, high = np.fmin(*gaps), np.fmax(*gaps)
    opens = _opens(track, nets, _scale(low), _scale(high))
    closes = np.append(opens[1:], len(track)) - 1 if len(track) else opens
    least = np.fmin.reduceat(low, opens, axis=0) if len(track) else low
    track, begin, end = track[opens], found.begin[opens] - 2 * track[opens], found.end[closes] - 2 * track[closes]
    stretches = parts(curves, track, begin, end)
    s_from = before[track] + begin * length[track]
    s_to = before[track] + np.where(end == 1.0, length[track], end * length[track])
    profiles = []
    for number, span in enumerate(together.spans(row[track])):
        part = slice(*span)
        profiles.append(
            NeighbourProfile(
                s_from=s_from[part],
                s_to=s_to[part],
                piece=row[track[part]] - together.first[number],
                layer=layer[track[part]],
                start=stretches.start[part],
                end=stretches.end[part],
                left_gap=least[part, 0],
                left_net=nets[opens[part], 0],
                right_gap=least[part, 1],
                right_net=nets[opens[part], 1],
            )
        )
    return profiles


def _edges_near(
    copper: ForeignCopper,
    curves: Curves,
    layer: Ints,
    reach: Floats,
    leg: Ints,
    own_nets: Sequence[tuple[int, ...]],
) -> tuple[Ints, Floats, Ints]:
    """Pairs of curve and foreign edge within reach on one layer: row of the curve, edge (k, 2, 2), net."""
    which, edges, nets = [np.empty(0, np.int64)], [np.empty((0, 2, 2))], [np.empty(0, np.int64)]
    for one in np.unique(layer).tolist():
        mine = np.flatnonzero(layer == one)
        lines = centre_lines(curves.take(mine))
        near, edge, net = copper.near(one, lines, reach[mine] + 2 * FLATTENING_MM, leg[mine], own_nets)
        order = np.argsort(near, kind="stable")
        which.append(mine[near[order]])
        edges.append(edge[order])
        nets.append(net[order])
    return np.concatenate(which), np.concatenate(edges), np.concatenate(nets)


def _scale(gap: Floats) -> Floats:
    """A measure of gap that grows by 1 in each step worth a new stretch: STEP_MM at first, then the factor STEP."""
    turn = STEP_MM / (STEP - 1)
    return np.where(gap < turn, gap / STEP_MM, turn / STEP_MM + np.log(np.maximum(gap, turn) / turn) / np.log(STEP))


def _steps(found: Nearest, half: Floats) -> Floats:
    """Places at which a slanting neighbour's gap has changed by one step."""
    places = []
    track = (found.begin / 2).astype(np.int64)
    for side in (0, 1):
        met = np.flatnonzero(found.edge[:, side] >= 0)
        first, last = (np.maximum(at[met, side] - half[track[met]], 0.0) for at in (found.at_begin, found.at_end))
        steps = np.ceil(np.abs(_scale(last) - _scale(first)) - 1e-6).astype(np.int64)
        inner = np.maximum(steps - 1, 0)
        of = np.repeat(np.arange(len(met)), inner)
        nth = np.arange(len(of)) - np.repeat(np.cumsum(inner) - inner, inner) + 1
        wanted = _scale(first)[of] + (_scale(last) - _scale(first))[of] * nth / steps[of]
        share = (_gap(wanted) - first[of]) / (last - first)[of]
        begin, end = found.begin[met], found.end[met]
        places.append(begin[of] + (end - begin)[of] * share)
    return np.concatenate(places)


def _gap(scale: Floats) -> Floats:
    """The gap of a measure: `_scale` turned round."""
    turn = STEP_MM / (STEP - 1)
    over = np.maximum(scale - turn / STEP_MM, 0.0)
    return np.where(over > 0, turn * STEP**over, scale * STEP_MM)


def _opens(track: Ints, nets: Ints, low: Floats, high: Floats) -> Ints:
    """First row of each stretch: rows that follow one another are one while piece, nets and gaps stay.

    low, high: smallest and greatest gap of each row on either side, on `_scale`; NaN for no neighbour.
    """
    opens = []
    none = np.isnan(low)
    keys = np.column_stack([track, nets, none]).tolist()
    lows, highs = np.where(none, 0.0, low).tolist(), np.where(none, 0.0, high).tolist()
    since: list[int] = []
    down = up = (0.0, 0.0)
    for row, (key, new_low, new_high) in enumerate(zip(keys, lows, highs, strict=True)):
        wide_down = (min(down[0], new_low[0]), min(down[1], new_low[1]))
        wide_up = (max(up[0], new_high[0]), max(up[1], new_high[1]))
        if key == since and max(wide_up[0] - wide_down[0], wide_up[1] - wide_down[1]) <= 1 + 1e-6:
            down, up = wide_down, wide_up
        else:
            opens.append(row)
            since, down, up = key, tuple(new_low), tuple(new_high)
    return np.array(opens, dtype=np.int64)
