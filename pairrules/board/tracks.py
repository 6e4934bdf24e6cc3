"""Tracks: every straight or round piece of drawn copper line, one row a piece."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.board.columns import Floats, Ints, freeze


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Tracks:
    """Track pieces as columns of k rows; a drawn polyline of n segments is n rows.

    Parameters
    ----------
    start, end: (k, 2) [mm].
    centre: (k, 2) [mm]; NaN where the piece is straight.
    sweep: (k,) [rad] signed angle of an arc, positive counter-clockwise, |sweep| ≤ 2π; 0 where straight.
    width: (k,) [mm].
    layer: (k,) index into `Board.copper`.
    net: (k,) index into `Board.nets`; −1 where the copper belongs to no net (foreign copper).
    """

    start: Floats
    end: Floats
    centre: Floats
    sweep: Floats
    width: Floats
    layer: Ints
    net: Ints

    def __post_init__(self) -> None:
        freeze(
            self,
            {
                "start": (np.float64, (2,)),
                "end": (np.float64, (2,)),
                "centre": (np.float64, (2,)),
                "sweep": (np.float64, ()),
                "width": (np.float64, ()),
                "layer": (np.int64, ()),
                "net": (np.int64, ()),
            },
        )

    def __len__(self) -> int:
        return len(self.sweep)
