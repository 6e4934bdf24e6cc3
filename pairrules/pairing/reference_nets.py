"""Which nets' copper counts as reference."""

from __future__ import annotations

import math

import numpy as np

from pairrules.board.areas import Area
from pairrules.board.board import Board
from pairrules.board.columns import Floats
from pairrules.pairing.net_patterns import matches
from pairrules.pairing.net_roles import is_ground_name


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
    for area in board.areas:
        if area.net >= 0:
            pieces[area.net].append(_area_mm2(area))
    return np.array([math.fsum(of_net) for of_net in pieces], dtype=np.float64)


def _area_mm2(area: Area) -> float:
    return _ring_mm2(area.outline) - math.fsum(_ring_mm2(hole) for hole in area.holes)


def _ring_mm2(ring: Floats) -> float:
    """Area within a closed line. Source: the shoelace formula, ½ |Σ (x_i y_{i+1} − x_{i+1} y_i)| (Gauss)."""
    x, y = (ring - ring[0]).T
    return abs(float(np.dot(x, np.roll(y, -1)) - np.dot(y, np.roll(x, -1)))) / 2
