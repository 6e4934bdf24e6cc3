"""Where a route changes layer and its reference with it, and how far the nearest way for the return current is."""

from __future__ import annotations

import math

import numpy as np

from pairrules.balance.pair_electrical import LayerChange
from pairrules.board.board import Board
from pairrules.geometry.pair_geometry import BARREL, TRACK, LegRoute, Pieces
from pairrules.geometry.reference_cover import Cover


def layer_changes(
    board: Board, reference: frozenset[int], leg: str, route: LegRoute, cover: Cover
) -> tuple[LayerChange, ...]:
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
                return_mm=_nearest(board, reference, (via.x_mm, via.y_mm), left, right),
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


def _nearest(
    board: Board, reference: frozenset[int], at: tuple[float, float], before: set[int], after: set[int]
) -> float:
    """Distance [mm] to the nearest reference via or plated hole through a layer of each side; inf without one."""
    vias, pads = board.vias, board.pads
    nets = list(reference)
    joins = np.isin(vias.net, nets) & np.logical_or.reduce([(vias.first <= k) & (k <= vias.last) for k in before])
    joins &= np.logical_or.reduce([(vias.first <= k) & (k <= vias.last) for k in after])
    holes = np.isin(pads.net, nets) & (pads.layer < 0)
    places = np.concatenate([vias.at[joins], pads.at[holes]])
    return float(np.hypot(*(places - at).T).min()) if len(places) else math.inf
