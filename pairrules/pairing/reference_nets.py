"""Which nets' copper counts as reference."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

import numpy as np

from pairrules.board.board import Board
from pairrules.board.columns import Floats
from pairrules.pairing.net_patterns import matches
from pairrules.pairing.net_roles import is_ground_name

_SHARE = 1000
"""Rings that are worked on at once: a board has ten thousands."""


def reference_nets(board: Board, globs: tuple[str, ...] | None) -> tuple[int, ...]:
    """Nets whose copper is the pairs' reference, as indices into `Board.nets`, ascending.

    What decides, the first that gives an answer:

    1. `globs`, where settings give them: the nets that fit, be they none.
    2. Nets that the file calls ground.
    3. Nets with a ground's name (a whole word: GND, AGND, VSS, 0V, EARTH, CHASSIS, ...); where some of them have areas,
       these only.
    4. The net with the most copper area.

    Supply planes carry return current too, but through their decoupling, of which the file says little; they count only
    where the settings name them or nothing but step 4 is left. Source: common practice, no source.
    """
    if globs is not None:
        return tuple(net for net, name in enumerate(board.nets) if any(matches(name, glob) for glob in globs))
    grounds = tuple(net for net, kind in enumerate(board.net_kinds) if kind == "ground")
    if grounds:
        return grounds
    areas = _areas_mm2(board)
    named = [net for net, name in enumerate(board.nets) if is_ground_name(name) and board.net_kinds[net] != "signal"]
    poured = [net for net in named if areas[net] > 0]
    if poured or named:
        return tuple(poured or named)
    if not len(areas) or not areas.max() > 0:
        return ()
    # Equal to within rounding, the first by name holds, whatever the order the areas stand in.
    return (int(np.argmax(np.round(areas, 6))),)


def _areas_mm2(board: Board) -> Floats:
    """Total area [mm²] of each net, holes taken off."""
    pieces: list[list[float]] = [[] for _ in board.nets]
    nets = [area.net for area in board.areas for _ in range(1 + len(area.holes))]
    outer = [hole < 0 for area in board.areas for hole in range(-1, len(area.holes))]
    rings = [ring for area in board.areas for ring in (area.outline, *area.holes)]
    for net, is_outline, size in zip(nets, outer, _rings_mm2(rings), strict=True):
        if net >= 0:
            pieces[net].append(size if is_outline else -size)
    return np.array([math.fsum(of_net) for of_net in pieces], dtype=np.float64)


def _rings_mm2(rings: Sequence[Floats]) -> Iterator[float]:
    """Area within each closed line. Source: the shoelace formula, ½ |Σ (x_i y_{i+1} − x_{i+1} y_i)| (Gauss)."""
    for start in range(0, len(rings), _SHARE):
        some = rings[start : start + _SHARE]
        size = np.array([len(ring) for ring in some], dtype=np.int64)
        first = np.cumsum(size) - size
        at = np.concatenate(some)
        # About its own first corner, which keeps the digits of a small ring far from the origin.
        x, y = (at - np.repeat(at.take(first, axis=0), size, axis=0)).T
        following = np.arange(1, len(at) + 1)
        following[first + size - 1] = first
        cross = x * y.take(following) - x.take(following) * y
        yield from (np.abs(np.add.reduceat(cross, first)) / 2).tolist()
