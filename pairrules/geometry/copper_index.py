"""Which tracks, pads, vias and areas belong to which net, found once a board."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.board.board import Board
from pairrules.board.columns import Ints


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class CopperIndex:
    """Rows of each kind of copper in the order of their net, and where each net's rows begin (nets + 1 offsets)."""

    tracks: tuple[Ints, Ints]
    pads: tuple[Ints, Ints]
    vias: tuple[Ints, Ints]
    areas: tuple[Ints, Ints]

    def rows(self, kind: str, net: int) -> Ints:
        """Rows of `kind` ("tracks", "pads", "vias", "areas") on the net, ascending."""
        order, offsets = getattr(self, kind)
        found: Ints = order[offsets[net] : offsets[net + 1]]
        return found


def index_copper(board: Board) -> CopperIndex:
    """The index of a board."""
    count = len(board.nets)
    areas = np.array([area.net for area in board.areas], dtype=np.int64)
    return CopperIndex(
        tracks=_group(board.tracks.net, count),
        pads=_group(board.pads.net, count),
        vias=_group(board.vias.net, count),
        areas=_group(areas, count),
    )


def _group(net: Ints, count: int) -> tuple[Ints, Ints]:
    order = np.argsort(net, kind="stable")
    return order, np.searchsorted(net[order], np.arange(count + 1))
