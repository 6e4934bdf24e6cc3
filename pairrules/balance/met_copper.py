"""What copper each cut across a pair meets: beside the legs on their own layer, and as planes above and below."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from pairrules.balance.drawn_section import GRID_MM, NEAR_HEIGHTS, PLANE_HEIGHTS, Span
from pairrules.balance.sampled_cuts import Cuts
from pairrules.balance.stack_heights import Heights
from pairrules.board.columns import Bools, Ints
from pairrules.geometry.cross_cut import CrossCuts, Met

PLANE_WIDTH_MM = 1.0
"""Copper of other nets on another layer counts as a plane where the cut meets this much of it, else as nothing."""

SLIVER_MM = 2 * GRID_MM
"""Copper narrower than this, which a cut near a corner leaves, carries no field worth the name."""

_MOST_CUTS = 4096
"""So many cuts are made at once, or those of one pair."""

_EDGE_STEP = 0.1
WHOLE: tuple[Span, ...] = ((-math.inf, math.inf),)

Planes = tuple[tuple[int, tuple[Span, ...]], ...]
"""Copper at 0 V by layer."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Beside:
    """What one cut meets. spans: foreign copper on the legs' layer, nets its nets. planes: copper at 0 V by layer."""

    spans: tuple[Span, ...]
    nets: tuple[int, ...]
    planes: Planes


def met_copper(
    pairs: Sequence[Cuts],
    own: Sequence[frozenset[int]],
    heights: Heights,
    board_cuts: CrossCuts,
    reference: frozenset[int],
) -> list[list[Beside]]:
    """What each cut of each pair meets.

    Parameters: own: nets of each pair. reference: nets whose copper on other layers counts however narrow it is.
    """
    found: list[list[Beside]] = []
    while len(found) < len(pairs):
        first = last = len(found)
        cuts = 0
        while last < len(pairs) and (last == first or cuts + len(pairs[last]) <= _MOST_CUTS):
            cuts += len(pairs[last])
            last += 1
        found += _met_copper(pairs[first:last], own[first:last], heights, board_cuts, reference)
    return found


def _met_copper(
    pairs: Sequence[Cuts],
    own: Sequence[frozenset[int]],
    heights: Heights,
    board_cuts: CrossCuts,
    reference: frozenset[int],
) -> list[list[Beside]]:
    asked = _Asked(pairs, own, board_cuts, reference)
    planes: list[list[tuple[int, tuple[Span, ...]]]] = [[] for _ in range(len(asked.layer))]
    beside: list[tuple[tuple[Span, ...], tuple[int, ...]]] = [((), ())] * len(asked.layer)
    for layer in np.unique(asked.layer).tolist():
        rows = np.flatnonzero(asked.layer == layer)
        for side in (-1, 1):
            open_rows, k, nearer = rows, layer + side, np.zeros(len(asked.layer), dtype=np.bool_)
            while len(open_rows) and 0 <= k < len(heights.copper):
                open_rows = _planes_on(asked, open_rows, k, _height(heights, layer, k), planes, nearer)
                k += side
        near = NEAR_HEIGHTS * _nearest_height(heights, layer)
        met = asked.met(layer, rows, near)
        for place, row in enumerate(rows.tolist()):
            beside[row] = _beside_spans(met.of(place), asked.legs[row], near)
    found = [
        Beside(spans=spans, nets=nets, planes=tuple(sorted(on)))
        for (spans, nets), on in zip(beside, planes, strict=True)
    ]
    ends = np.cumsum([len(cuts) for cuts in pairs]).tolist()
    return [found[end - len(cuts) : end] for end, cuts in zip(ends, pairs, strict=True)]


class _Asked:
    """The cuts of all pairs in one row, and what of the board's copper they ask for."""

    def __init__(
        self, pairs: Sequence[Cuts], own: Sequence[frozenset[int]], board_cuts: CrossCuts, reference: frozenset[int]
    ) -> None:
        self._board_cuts = board_cuts
        self._reference = np.array(sorted(reference), dtype=np.int64)
        self.layer = np.concatenate([cuts.layer for cuts in pairs])
        self._origin = np.concatenate([cuts.origin for cuts in pairs])
        self._along = np.concatenate([cuts.along for cuts in pairs])
        self.left, self.right = (np.concatenate(ends) for ends in zip(*(cuts.reach for cuts in pairs), strict=True))
        self.legs: list[list[Span]] = [
            [(low, high) for low, high in spans if low == low]  # noqa: PLR0124 (NaN is absent)
            for cuts in pairs
            for spans in cuts.spans.tolist()
        ]
        self._pair = np.repeat(np.arange(len(pairs)), [len(cuts) for cuts in pairs])
        nets = [np.array(sorted(of), dtype=np.int64) for of in own]
        self._most = 1 + max((int(of.max(initial=0)) for of in nets), default=0)
        self._own = np.concatenate([_code(pair, of, self._most) for pair, of in enumerate(nets)])

    def met(self, layer: int, rows: Ints, reach: float) -> _MetByCut:
        """Copper of a layer, but for the pair's own, along the cuts of the rows and so far beyond their legs."""

        def unwanted(cut: Ints, net: Ints) -> Bools:
            own = np.isin(_code(self._pair[rows[cut]], net, self._most), self._own) & (net >= 0) & (net < self._most)
            return own & ~np.isin(net, self._reference)

        found = self._board_cuts.across(
            layer,
            self._origin[rows],
            self._along[rows],
            self.left[rows] - reach,
            self.right[rows] + reach,
            unwanted=unwanted,
        )
        own = np.isin(_code(self._pair[rows[found.cut]], found.net, self._most), self._own)
        own &= (found.net >= 0) & (found.net < self._most)
        return _MetByCut(found, len(rows), own, np.isin(found.net, self._reference))


def _code(pair: Ints | int, net: Ints, most: int) -> Ints:
    code: Ints = pair * most + net
    return code


class _MetByCut:
    """What cuts met, ready to be gone through cut by cut. own, reference: whether it is the pair's, or at 0 V."""

    def __init__(self, met: Met, cuts: int, own: Bools, reference: Bools) -> None:
        self.met, self.own = met, own
        self.plane = reference | ((met.net >= 0) & ~own & (met.high - met.low >= PLANE_WIDTH_MM))
        self.bounds = np.searchsorted(met.cut, np.arange(cuts + 1)).tolist()
        self._rows = list(
            zip(met.net.tolist(), met.low.tolist(), met.high.tolist(), own.tolist(), self.plane.tolist(), strict=True)
        )

    def of(self, place: int) -> list[tuple[int, float, float]]:
        """Net, and where it begins and ends, of foreign copper that one cut meets."""
        rows = self._rows[self.bounds[place] : self.bounds[place + 1]]
        return [(net, low, high) for net, low, high, own, _ in rows if not own]

    def plane_copper(self, place: int) -> list[list[float]]:
        """Stretches of copper at 0 V of one cut, in order; what touches is one."""
        merged: list[list[float]] = []
        for _, low, high, _, plane in self._rows[self.bounds[place] : self.bounds[place + 1]]:
            if not plane:
                continue
            if merged and low <= merged[-1][1]:
                merged[-1][1] = max(merged[-1][1], high)
            else:
                merged.append([low, high])
        return merged


def _planes_on(
    asked: _Asked,
    rows: Ints,
    layer: int,
    height: float,
    planes: list[list[tuple[int, tuple[Span, ...]]]],
    nearer: Bools,
) -> Ints:
    """Look for planes on one layer; returns the rows that look farther on the same side.

    Parameters: planes: of each cut; added to. nearer: whether a nearer layer of the side has one; kept up.
    """
    met = asked.met(layer, rows, PLANE_HEIGHTS * height)
    farther = []
    ends = zip(rows.tolist(), asked.left[rows].tolist(), asked.right[rows].tolist(), strict=True)
    for place, (row, left, right) in enumerate(ends):
        copper = met.plane_copper(place)
        behind = nearer[row]
        spans = _plane_behind(copper, left, right, height) if behind else _plane_spans(copper, left, right, height)
        if spans:
            planes[row].append((layer, spans))
            nearer[row] = True
        if not behind and spans != WHOLE:
            farther.append(row)
    return np.array(farther, dtype=np.int64)


def _height(heights: Heights, layer: int, other: int) -> float:
    if other < layer:
        return heights.copper[other][0] - heights.copper[layer][1]
    return heights.copper[layer][0] - heights.copper[other][1]


def _nearest_height(heights: Heights, layer: int) -> float:
    return min(_height(heights, layer, k) for k in (layer - 1, layer + 1) if 0 <= k < len(heights.copper))


def _plane_spans(copper: list[list[float]], left: float, right: float, height: float) -> tuple[Span, ...]:
    """The nearest plane: its copper with the slots and edges that the legs can feel, on a grid.

    A leg's image current spreads over a few heights. A slot counts if it begins within three heights of the legs and is
    wider than a quarter of its distance to them, an edge if it lies within six heights; where all copper is farther
    than three heights there is no plane.
    """
    kept: list[list[float]] = []
    for low, high in copper:
        if kept:
            gap = kept[-1][1], low
            away = max(left - gap[1], gap[0] - right, 0.0)
            if away > 3 * height or gap[1] - gap[0] < 0.25 * (height + away):
                kept[-1][1] = high
                continue
        kept.append([low, high])
    drawn: list[Span] = []
    for low, high in kept:
        if high < left - 3 * height or low > right + 3 * height:
            continue
        a = -math.inf if low < left - 6 * height else _on_grid(low, left, right, height)
        b = math.inf if high > right + 6 * height else _on_grid(high, left, right, height)
        if b > a and (not drawn or a > drawn[-1][1]):
            drawn.append((a, b))
    return tuple(drawn)


def _plane_behind(copper: list[list[float]], left: float, right: float, height: float) -> tuple[Span, ...]:
    """A plane behind slots of a nearer one: whole if it has copper within its own height of the legs, else none."""
    return WHOLE if any(low < right + height and high > left - height for low, high in copper) else ()


def _on_grid(x: float, left: float, right: float, height: float) -> float:
    away = max(left - x, x - right, 0.0)
    step = _EDGE_STEP * height * (1.0 if away < height else 3.0)
    return round(x / step) * step


def _beside_spans(
    met: list[tuple[int, float, float]], legs: list[Span], near: float
) -> tuple[tuple[Span, ...], tuple[int, ...]]:
    """The nearest foreign copper on each side of the legs, and what lies between them; gaps in steps of 5 %."""
    left, right = legs[0][0], legs[-1][1]
    found: list[tuple[Span, int]] = []
    outer: dict[str, tuple[float, Span, int]] = {}
    for net, low, high in met:
        if high - low < SLIVER_MM:
            continue
        if high <= left:
            side, gap = "left", left - high
        elif low >= right:
            side, gap = "right", low - right
        else:
            if len(legs) == 2 and low > legs[0][1] and high < legs[1][0]:
                found.append(((low, high), net))
            continue
        if gap > 0 and (side not in outer or gap < outer[side][0]):
            wide = min(high - low, near)
            space = math.exp(round(math.log(gap) / 0.05) * 0.05)
            outer[side] = (
                gap,
                (left - space - wide, left - space) if side == "left" else (right + space, right + space + wide),
                net,
            )
    found += [(span, net) for _, span, net in outer.values()]
    found.sort()
    return tuple(span for span, _ in found), tuple(net for _, net in found)
