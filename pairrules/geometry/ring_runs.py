"""Edges of outlines in runs: few boxes to search among, so that a plane with thousands of voids stays cheap to ask."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
import shapely

from pairrules.board.columns import Floats, Ints

RUN = 12
"""Edges that follow one another and are searched for together. More make the tree smaller and its answers coarser."""

Shapes = npt.NDArray[np.object_]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class RingRuns:
    """Straight edges (n, 2, 2) [mm] in the order of their rings, and runs of them in a search tree.

    first: (r + 1,) where each run begins among the edges. ring: (n,) the ring of each edge.
    """

    edges: Floats
    ring: Ints
    first: Ints
    tree: shapely.STRtree

    def near(self, lines: Shapes, distance: Floats | float) -> tuple[Ints, Ints]:
        """Pairs of line and edge (k,), (k,) nearer than `distance` [mm]; a few more, never fewer."""
        which, run = self.tree.query(lines, predicate="dwithin", distance=distance)
        size = self.first[run + 1] - self.first[run]
        begin = np.cumsum(size) - size
        edge = np.repeat(self.first[run] - begin, size) + np.arange(size.sum())
        return np.repeat(which, size), edge

    def nearest(self, lines: Shapes) -> Floats:
        """How far [mm] each line is from the nearest edge; NaN where there is none."""
        found = np.full(len(lines), np.nan)
        (which, _), away = self.tree.query_nearest(lines, all_matches=False, return_distance=True)
        found[which] = away
        return found


def ring_runs(rings: Shapes) -> RingRuns:
    """The edges of closed rings (k,), those without length left out."""
    corners, ring = shapely.get_coordinates(rings, return_index=True)
    whole = (ring[1:] == ring[:-1]) & (corners[1:] != corners[:-1]).any(axis=1)
    edges, of = np.stack([corners[:-1][whole], corners[1:][whole]], axis=1), ring[:-1][whole]
    begins = np.flatnonzero(np.r_[True, of[1:] != of[:-1]]) if len(of) else np.zeros(0, dtype=np.int64)
    place = np.arange(len(of)) - np.repeat(begins, np.diff(np.append(begins, len(of))))
    first = np.append(np.flatnonzero(place % RUN == 0), len(of))
    # A run's corners: the starts of its edges and the end of the last.
    size = np.diff(first)
    run = np.repeat(np.arange(len(size)), size + 1)
    points = np.insert(edges[:, 0], first[1:], edges[first[1:] - 1, 1], axis=0) if len(of) else np.empty((0, 2))
    lines = np.asarray(shapely.linestrings(points, indices=run), dtype=np.object_) if len(of) else np.empty(0, object)
    return RingRuns(edges=edges, ring=of, first=first, tree=shapely.STRtree(lines))
