"""Where a route changes layer and its reference with it, and how far the nearest way for the return current is."""

from __future__ import annotations

import math
from functools import cached_property

import numpy as np

from pairrules.balance.pair_electrical import LayerChange
from pairrules.board.board import Board
from pairrules.board.columns import Floats, Ints
from pairrules.geometry.pair_geometry import BARREL, TRACK, LegRoute, Pieces
from pairrules.geometry.reference_cover import Cover


class ReturnVias:
    """Vias and plated holes of the reference nets, picked out of the board's when first asked for."""

    def __init__(self, board: Board, reference: frozenset[int]) -> None:
        self._board, self._nets = board, list(reference)

    @cached_property
    def _found(self) -> tuple[Floats, Ints, Ints]:
        vias, pads = self._board.vias, self._board.pads
        own = np.flatnonzero(np.isin(vias.net, self._nets))
        holes = np.flatnonzero(np.isin(pads.net, self._nets) & (pads.layer < 0))
        through = np.full(len(holes), len(self._board.copper))
        return (
            np.concatenate([vias.at[own], pads.at[holes]]),
            np.concatenate([vias.first[own], np.zeros(len(holes), dtype=np.int64)]),
            np.concatenate([vias.last[own], through]),
        )

    def nearest(self, at: tuple[float, float], before: set[int], after: set[int]) -> float:
        """Distance [mm] to the nearest that goes through a layer of each side; inf without one."""
        places, first, last = self._found
        joins = np.ones(len(places), dtype=np.bool_)
        for side in (before, after):
            joins &= np.logical_or.reduce([(first <= k) & (k <= last) for k in side])
        return float(np.hypot(*(places[joins] - at).T).min(initial=math.inf))


def layer_changes(returns: ReturnVias, leg: str, route: LegRoute, cover: Cover) -> tuple[LayerChange, ...]:
    """The vias of one leg at which the copper layers that carry its reference change.

    The reference on either side is read from the cover of the tracks before and after the via. Where one layer serves
    on both sides the return current stays on it, and there is nothing to report.
    """
    pieces = route.pieces
    found = []
    for via, row in zip(route.vias, np.flatnonzero(pieces.kind == BARREL).tolist(), strict=True):
        tracks = np.flatnonzero(pieces.kind == TRACK)
        before, after = tracks[tracks < row], tracks[tracks > row]
        if not len(before) or not len(after):
            continue
        left, right = _layers(pieces, cover, before[::-1].tolist()), _layers(pieces, cover, after.tolist())
        if not left or not right or left & right:
            continue
        found.append(
            LayerChange(
                leg=leg,
                x_mm=via.x_mm,
                y_mm=via.y_mm,
                enter=via.enter,
                leave=via.leave,
                before=tuple(sorted(left)),
                after=tuple(sorted(right)),
                return_mm=returns.nearest((via.x_mm, via.y_mm), left, right),
            )
        )
    return tuple(found)


def _layers(pieces: Pieces, cover: Cover, away: list[int]) -> set[int]:
    """Copper layers with reference copper along the longest such stretch of the piece nearest to a via that has one.

    Parameters: away: tracks of the leg, the nearest first. Those on another layer than the first do not count.

    A piece that ends within the via's own antipad has no reference copper and says nothing of what lies beyond.
    """
    for piece in away:
        if pieces.layer[piece] != pieces.layer[away[0]]:
            break
        rows = np.flatnonzero((cover.piece == piece) & ((cover.above >= 0) | (cover.below >= 0)))
        if len(rows):
            row = rows[int(np.argmax((cover.s_to - cover.s_from)[rows]))]
            layer = int(cover.layer[row])
            return {k for k, net in ((layer - 1, cover.above[row]), (layer + 1, cover.below[row])) if net >= 0}
    return set()
