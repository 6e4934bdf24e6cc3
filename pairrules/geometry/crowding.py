"""Whether a net's copper lies upon itself so often that it cannot be followed in any reasonable time and memory.

A leg is a few hundred pieces of copper that touch their neighbours. A file of some megabytes can hold ten thousands
that all lie upon one another; every pair that touches is looked at, so that time and memory grow with the square.
"""

from __future__ import annotations

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Floats
from pairrules.geometry.copper_index import CopperIndex

MOST_PIECES = 50_000
"""Pieces of copper one leg's net may have."""

MOST_MEETINGS = 1_000_000
"""Pairs of pieces whose bounding boxes may meet; a leg of a thousand pieces has some ten thousand."""

MOST_JOINED = 1000
"""Pieces of copper that one area may join."""


class CrowdedError(Exception):
    """Raised where copper cannot be followed; its text says why, going on from the leg's name."""


def refuse_crowds(board: Board, index: CopperIndex, net: int) -> None:
    """Raises: CrowdedError where the net has too many pieces, or they meet too often."""
    tracks, pads, vias = (index.rows(kind, net) for kind in ("tracks", "pads", "vias"))
    count = len(tracks) + len(pads) + len(vias)
    if count > MOST_PIECES:
        raise CrowdedError(f"has {count} pieces of copper; nets of more than {MOST_PIECES} are not followed")
    # Arcs reach no farther from their chord than their radius; a box about both ends and the width is near enough.
    half = board.tracks.width[tracks] / 2
    ends = np.stack([board.tracks.start[tracks], board.tracks.end[tracks]])
    low, high = ends.min(axis=0) - half[:, None], ends.max(axis=0) + half[:, None]
    spots = np.concatenate([board.pads.at[pads], board.vias.at[vias]])
    if _meetings(np.concatenate([low, spots]), np.concatenate([high, spots])) > MOST_MEETINGS:
        raise CrowdedError("has copper that lies upon itself too often to be followed")


def _meetings(low: Floats, high: Floats) -> int:
    """How many pairs of boxes meet; counting ends soon after `MOST_MEETINGS`."""
    if len(low) ** 2 <= MOST_MEETINGS:
        return 0
    boxes = np.asarray(shapely.box(low[:, 0], low[:, 1], high[:, 0], high[:, 1]), dtype=np.object_)
    tree, total = shapely.STRtree(boxes), 0
    # A share whose boxes all meet every box comes to the bound, and to no more memory than that takes.
    share = max(1, MOST_MEETINGS // len(boxes))
    for start in range(0, len(boxes), share):
        total += tree.query(boxes[start : start + share]).shape[1]
        if total > MOST_MEETINGS:
            break
    return total
