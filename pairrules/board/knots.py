"""Lines that cross one another so often that to tell what they enclose would take any time and memory.

What an outline that crosses itself encloses is found from its crossings, whose number grows with the square of its
edges: a file of some kilobytes can hold millions. Real outlines cross themselves here and there.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt
import shapely

from pairrules.board.columns import Floats

MOST_CROSSINGS = 500
"""Crossings of one outline with itself, and of all that cross themselves more than `_FEW` times taken together.

A slip of a pour makes a few. What a thousand enclose takes half a second to tell, twice as many the fourfold and more.
"""

_FEW = 20

MOST_MEETINGS = 100_000
"""Pairs of things to be united whose bounding boxes may meet, and ten for each thing beside: clearances of a plane meet
a few of their neighbours, a hatch of some hundred lines each way ten thousands."""

_FEW_EDGES = 8
"""An outline of so many edges crosses itself `_FEW` times at most."""

_SHARE = 500
"""Outlines that are geometries at one time: a board has ten thousands."""

_MOST_BOXES = 2_000_000


def knotted(rings: Sequence[Floats]) -> int:
    """The outline (n, 2) [mm] with which crossings come to more than `MOST_CROSSINGS`, -1 where they do not."""
    long = [place for place, ring in enumerate(rings) if len(ring) > _FEW_EDGES]
    total = 0
    for start in range(0, len(long), _SHARE):
        for place in _crossed(rings, long[start : start + _SHARE]):
            crossings = _crossings(rings[place])
            total += crossings if crossings > _FEW else 0
            if total > MOST_CROSSINGS:
                return place
    return -1


def _crossed(rings: Sequence[Floats], places: list[int]) -> list[int]:
    """Those of the places whose outlines cross themselves."""
    of = np.repeat(np.arange(len(places)), [len(rings[place]) for place in places])
    lines = shapely.linearrings(np.concatenate([rings[place] for place in places]), indices=of)
    return [places[row] for row in np.flatnonzero(~np.asarray(shapely.is_valid(shapely.polygons(lines)))).tolist()]


def _crossings(ring: Floats) -> int:
    """How often an outline crosses itself, a little over `MOST_CROSSINGS` where it is more."""
    edges = np.asarray(shapely.linestrings(np.stack([ring, np.roll(ring, -1, axis=0)], axis=1)), dtype=np.object_)
    most = _MOST_BOXES + 10 * len(ring)
    if _meetings(edges, most) > most:
        return MOST_CROSSINGS + 1
    # Each edge meets itself and its two neighbours.
    own = 3 * len(ring)
    return (_meetings(edges, 2 * MOST_CROSSINGS + own, exact=True) - own) // 2


def crowded(shapes: Sequence[shapely.Geometry]) -> bool:
    """Whether more than `MOST_MEETINGS` pairs of the shapes may meet."""
    bound = 2 * MOST_MEETINGS + 20 * len(shapes)
    return len(shapes) ** 2 > bound and meetings(shapes, bound) > bound


def meetings(shapes: Sequence[shapely.Geometry], most: int) -> int:
    """How often the shapes' bounding boxes meet, each pair twice and each with itself; counting ends beyond `most`."""
    return _meetings(np.asarray(shapes, dtype=np.object_), most)


def _meetings(shapes: npt.NDArray[np.object_], most: int, *, exact: bool = False) -> int:
    tree, total = shapely.STRtree(shapes), 0
    share = max(1, 100_000 // len(shapes))
    for start in range(0, len(shapes), share):
        total += tree.query(shapes[start : start + share], predicate="intersects" if exact else None).shape[1]
        if total > most:
            break
    return total
