"""Where along a route a running difference grows most: the shortest stretch that makes a given part of it."""

from __future__ import annotations

from collections import deque

from pairrules.board.columns import Floats

MOST = 0.75
"""What part of a difference is most of it: a word of ours, not a limit."""


def steepest_stretch(along: Floats, running: Floats, least: float) -> tuple[int, int] | None:
    """First and last index of the shortest stretch over which `running` grows by at least `least`.

    Parameters: along (n,): never falling, such as track length. running (n,). least: greater than 0.
    Returns: `None` where it grows by so much nowhere; of equally short ones the first.
    Source: the shortest run of a given sum by a queue of rising values, textbook of algorithms (from memory).
    """
    best: tuple[int, int] | None = None
    starts: deque[int] = deque()
    for last in range(len(running)):
        # A start that has served once can only make longer stretches.
        while starts and running[last] - running[starts[0]] >= least:
            first = starts.popleft()
            if best is None or along[last] - along[first] < along[best[1]] - along[best[0]]:
                best = first, last
        while starts and running[starts[-1]] >= running[last]:
            starts.pop()
        starts.append(last)
    return best
