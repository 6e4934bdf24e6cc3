"""Areas: filled copper (planes, pours, copper drawn as outlines)."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.board.columns import Floats


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Area:
    """One connected piece of filled copper.

    Arcs of its outline are already flattened to chords (`arcs.FLATTENING_MM` from the true arc at most).

    Parameters
    ----------
    net: index into `Board.nets`, −1 for none. layer: index into `Board.copper`.
    outline: (n, 2) [mm], not closed. holes: each (m, 2) [mm], not closed.
    hatched: within it copper is drawn as a mesh, of which no more is known; for reference cover it counts as whole.
    """

    net: int
    layer: int
    outline: Floats
    holes: tuple[Floats, ...] = ()
    hatched: bool = False

    def __post_init__(self) -> None:
        object.__setattr__(self, "outline", _ring(self.outline))
        object.__setattr__(self, "holes", tuple(_ring(hole) for hole in self.holes))


def _ring(points: Floats) -> Floats:
    ring = np.array(points, dtype=np.float64).reshape(-1, 2)
    if len(ring) > 1 and ring[0].tolist() == ring[-1].tolist():
        ring = ring[:-1]
    if len(ring) < 3:
        raise ValueError(f"an outline needs three points, {len(ring)} given")
    ring.flags.writeable = False
    return ring
