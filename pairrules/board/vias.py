"""Vias: plated holes that join copper layers and hold no part's pin."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.board.columns import Floats, Ints, freeze


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Vias:
    """Vias as columns of k rows.

    Parameters
    ----------
    at: (k, 2) [mm].
    first, last: (k,) indices into `Board.copper` of the upper and lower end of the barrel, first ≤ last.
    drill, pad, antipad: (k,) diameters [mm]; NaN where the file does not say.
    net: (k,) index into `Board.nets`, −1 for none.
    """

    at: Floats
    first: Ints
    last: Ints
    drill: Floats
    pad: Floats
    antipad: Floats
    net: Ints

    def __post_init__(self) -> None:
        freeze(
            self,
            {
                "at": (np.float64, (2,)),
                "first": (np.int64, ()),
                "last": (np.int64, ()),
                "drill": (np.float64, ()),
                "pad": (np.float64, ()),
                "antipad": (np.float64, ()),
                "net": (np.int64, ()),
            },
        )

    def __len__(self) -> int:
        return len(self.net)
