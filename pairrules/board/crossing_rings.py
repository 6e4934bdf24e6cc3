"""Outlines that cross or touch themselves, found and placed: later stages read them by their lines, readers tell."""

from __future__ import annotations

import re
from collections.abc import Sequence

import numpy as np
import shapely

from pairrules.board.columns import Floats

_PLACE = re.compile(r"\[([-+.\deE]+) ([-+.\deE]+)\]")


def crossing_rings(rings: Sequence[Floats]) -> list[tuple[int, float, float]]:
    """Which of the outlines (n, 2) [mm] are no simple ring, and where each first meets itself; NaN where unknown.

    Source: validity of a ring as in the Simple Feature Access standard, OGC 06-103r4, 6.1.11 (tested by GEOS).
    """
    if not rings:
        return []
    of = np.repeat(np.arange(len(rings)), [len(ring) for ring in rings])
    shapes = np.asarray(shapely.polygons(shapely.linearrings(np.concatenate(rings), indices=of)), dtype=np.object_)
    found = []
    for place in np.flatnonzero(~shapely.is_valid(shapes)).tolist():
        at = _PLACE.search(str(shapely.is_valid_reason(shapes[place])))
        x, y = (float("nan"), float("nan")) if at is None else (float(at[1]), float(at[2]))
        found.append((place, x, y))
    return found
