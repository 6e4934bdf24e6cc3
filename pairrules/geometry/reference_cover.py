"""Where a leg runs over or under copper of a reference net, where not, and how far from that copper's edge."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from pairrules.board.arcs import FLATTENING_MM
from pairrules.board.board import Board
from pairrules.board.columns import Bools, Floats, Ints, freeze
from pairrules.geometry.copper_outlines import centre_lines
from pairrules.geometry.curve_edges import crossings, nearest_to_edges
from pairrules.geometry.curves import Curves, parts, points
from pairrules.geometry.legs import laid_out, tracks_of
from pairrules.geometry.pair_geometry import Pieces
from pairrules.geometry.reference_copper import NO_NET, UNKNOWN, ReferenceCopper
from pairrules.geometry.ring_runs import RingRuns

__all__ = ["NO_NET", "UNKNOWN", "Cover", "ReferenceCopper", "reference_cover", "reference_covers"]

_SAME_MM = 1e-9
"""Cuts nearer than this are one: far below any copper, far above rounding."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Cover:
    """Reference cover along a leg's tracks, as stretches (columns of k rows, in order of s) of unchanged cover.

    Parameters
    ----------
    s_from, s_to: [mm] track length from the source end (barrels, joins and series parts take none).
    piece: row of `Pieces`. layer: index into `Board.copper`. start, end: (k, 2) [mm] the stretch's ends on the board.
    above, below: the reference net (index into `Board.nets`) on the next copper layer above and below; `NO_NET` where
        there is none, `UNKNOWN` where that layer is not in the file.
    edge_above, edge_below: [mm] least distance, seen from above, from the stretch's centre line to the edge of the
        reference copper that covers it; NaN where none does. The antipad of a via in a plane is such an edge.
    edge_above_at, edge_below_at: (k, 2) [mm] where on the stretch that is.
    uncovered_mm: track length with reference copper neither above nor below; `None` where unknown.
    missing: why it is unknown, in one sentence; "" where it is known.
    """

    s_from: Floats
    s_to: Floats
    piece: Ints
    layer: Ints
    start: Floats
    end: Floats
    above: Ints
    below: Ints
    edge_above: Floats
    edge_below: Floats
    edge_above_at: Floats
    edge_below_at: Floats
    uncovered_mm: float | None
    missing: str = ""

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
                "above": (np.int64, ()),
                "below": (np.int64, ()),
                "edge_above": (np.float64, ()),
                "edge_below": (np.float64, ()),
                "edge_above_at": (np.float64, (2,)),
                "edge_below_at": (np.float64, (2,)),
            },
        )

    def __len__(self) -> int:
        return len(self.piece)

    @property
    def uncovered(self) -> Bools:
        """Whether each stretch is known to lack reference copper on both sides."""
        bare: Bools = (self.above == NO_NET) & (self.below == NO_NET)
        return bare


def reference_cover(pieces: Pieces, board: Board, reference: tuple[int, ...] | ReferenceCopper) -> Cover:
    """The cover of one leg. Parameters as of `reference_covers`."""
    (cover,) = reference_covers([pieces], board, reference)
    return cover


def reference_covers(legs: Sequence[Pieces], board: Board, reference: tuple[int, ...] | ReferenceCopper) -> list[Cover]:
    """The cover of legs by reference copper on the copper layers next to their own, all in one pass.

    Parameters: reference: indices of the reference nets, or their copper where it is at hand from another leg of the
    same board.
    Returns: of each leg stretches cut exactly where a piece's centre line, arcs included, passes an edge of the copper.
    Source: common practice, no source (a return current follows the nearest plane).
    """
    copper = reference if isinstance(reference, ReferenceCopper) else ReferenceCopper(board, reference)
    together = laid_out(legs)
    own = tracks_of(together)
    row, curves, length, layer, before = own.row, own.curves, own.length, own.layer, own.before

    track, t_from, t_to = _cut(copper, curves, layer, length)
    middle = points(curves.take(track), (t_from + t_to) / 2)
    nets = [_next_net(copper, layer[track] + step, middle) for step in (-1, 1)]
    opens = np.ones(len(track), dtype=np.bool_)
    opens[1:] = (track[1:] != track[:-1]) | (nets[0][1:] != nets[0][:-1]) | (nets[1][1:] != nets[1][:-1])
    closes = np.append(opens[1:], True)[: len(opens)]
    track, t_from, t_to, nets = track[opens], t_from[opens], t_to[closes], [net[opens] for net in nets]
    stretches = parts(curves, track, t_from, t_to)
    edges = [
        _edge_distance(copper, stretches, layer[track] + step, net) for step, net in zip((-1, 1), nets, strict=True)
    ]
    s_from = before[track] + t_from * length[track]
    s_to = before[track] + np.where(t_to == 1.0, length[track], t_to * length[track])
    bare = (nets[0] == NO_NET) & (nets[1] == NO_NET)
    covers = []
    for leg, (begin, end) in enumerate(together.spans(row[track])):
        part = slice(begin, end)
        missing = _missing(copper, layer[track[part]], [net[part] for net in nets])
        covers.append(
            Cover(
                s_from=s_from[part],
                s_to=s_to[part],
                piece=row[track[part]] - together.first[leg],
                layer=layer[track[part]],
                start=stretches.start[part],
                end=stretches.end[part],
                above=nets[0][part],
                below=nets[1][part],
                edge_above=edges[0][0][part],
                edge_below=edges[1][0][part],
                edge_above_at=edges[0][1][part],
                edge_below_at=edges[1][1][part],
                uncovered_mm=None if missing else float((s_to - s_from)[part][bare[part]].sum()),
                missing=missing,
            )
        )
    return covers


def _missing(copper: ReferenceCopper, layer: Ints, nets: list[Ints]) -> str:
    if not copper.reference:
        return "no reference net is known; name them under `reference_nets` in the settings"
    unsure = (np.minimum(nets[0], nets[1]) == UNKNOWN) & (np.maximum(nets[0], nets[1]) < 0)
    if not unsure.any():
        return ""
    names = " and ".join(copper.board.copper[one] for one in np.unique(layer[unsure]))
    return f"the copper layer next to {names} is not in the file, so the reference copper there is unknown"


def _beside(copper: ReferenceCopper, layer: Ints) -> list[tuple[int, Bools]]:
    """The known layers among `layer`, the layer beside each row, and the rows of each."""
    return [
        (int(one), layer == one)
        for one in np.unique(layer)
        if 0 <= one < len(copper.board.copper) and copper.known(int(one))
    ]


def _next_net(copper: ReferenceCopper, layer: Ints, at: Floats) -> Ints:
    inside = (layer >= 0) & (layer < len(copper.board.copper))
    net = np.where(inside, UNKNOWN, NO_NET)
    for one, rows in _beside(copper, layer):
        net[rows] = copper.layer(one).net_at(at[rows])
    return net


def _cut(copper: ReferenceCopper, curves: Curves, layer: Ints, length: Floats) -> tuple[Ints, Floats, Floats]:
    """Row, from and to of the stretches between the places where the curves pass an edge above or below."""
    every = np.arange(len(curves))
    row, t = [every, every], [np.zeros(len(curves)), np.ones(len(curves))]
    for step in (-1, 1):
        for one, chosen in _beside(copper, layer + step):
            mine = np.flatnonzero(chosen)
            beside = copper.layer(one)
            which, edge = _near(beside.outline, curves.take(mine), 0.0)
            for at in crossings(curves.take(mine[which]), beside.edges[edge]):
                # NaN, where there is no crossing, fails both.
                hit = (at * length[mine[which]] > _SAME_MM) & ((1 - at) * length[mine[which]] > _SAME_MM)
                row.append(mine[which[hit]])
                t.append(at[hit])
    rows, ts = np.concatenate(row), np.concatenate(t)
    order = np.lexsort((ts, rows))
    rows, ts = rows[order], ts[order]
    apart = np.ones(len(rows), dtype=np.bool_)
    apart[1:] = (rows[1:] != rows[:-1]) | ((ts[1:] - ts[:-1]) * length[rows[1:]] > _SAME_MM)
    rows, ts = rows[apart], ts[apart]
    whole = rows[1:] == rows[:-1]
    return rows[:-1][whole], ts[:-1][whole], ts[1:][whole]


def _near(edges: RingRuns, curves: Curves, distance: Floats | float) -> tuple[Ints, Ints]:
    """Pairs of curve and edge nearer than `distance` [mm]; a few more, never fewer."""
    return edges.near(centre_lines(curves), distance + 2 * FLATTENING_MM)


def _edge_distance(copper: ReferenceCopper, stretches: Curves, layer: Ints, net: Ints) -> tuple[Floats, Floats]:
    """Least distance (k,) from each covered stretch to the covering copper's edge, and where (k, 2) on the stretch."""
    distance, at = np.full(len(layer), np.nan), np.full((len(layer), 2), np.nan)
    for one, chosen in _beside(copper, layer):
        mine = np.flatnonzero(chosen & (net >= 0))
        if not len(mine):
            continue
        edges, curves = copper.layer(one).outline, stretches.take(mine)
        which, edge = _near(edges, curves, edges.nearest(centre_lines(curves)))
        t, apart = nearest_to_edges(curves.take(which), edges.edges[edge])
        # The smallest of each stretch; of equal ones the nearest to its start.
        order = np.lexsort((t, apart, which))
        best = order[np.concatenate([[True], np.diff(which[order]) > 0])]
        distance[mine[which[best]]] = apart[best]
        at[mine[which[best]]] = points(curves.take(which[best]), t[best])
    return distance, at
