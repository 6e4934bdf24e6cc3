"""Where along its stretches a pair is cut across, and what copper each cut meets, ready to be drawn as a section."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from pairrules.balance.drawn_section import GRID_MM, NEAR_HEIGHTS, PLANE_HEIGHTS, Leg, Span
from pairrules.balance.leg_stretches import Stretch, track_before
from pairrules.balance.stack_heights import Heights
from pairrules.board.columns import Floats, Ints
from pairrules.geometry.cross_cut import CrossCuts, Met
from pairrules.geometry.curves import directions, nearest, points
from pairrules.geometry.nearest_track import curves_of
from pairrules.geometry.pair_geometry import TRACK, Pieces, SpacingProfile

STEP_MM = 1.0
"""Sections are looked for at least this often; between, the cross-section is taken as it is in the middle."""

PLANE_WIDTH_MM = 1.0
"""Copper of other nets on another layer counts as a plane where the cut meets this much of it, else as nothing."""

SLIVER_MM = 2 * GRID_MM
"""Copper narrower than this, which a cut near a corner leaves, carries no field worth the name."""

_GAP_STEP = 0.05
"""Where the gap changes along the way, sections differ by this share of it."""

_EDGE_STEP = 0.1
_LEAST_MM = 1e-6
WHOLE: tuple[Span, ...] = ((-math.inf, math.inf),)


@dataclass(frozen=True, slots=True, kw_only=True)
class Cut:
    """One cut and the stretch it stands for.

    Parameters
    ----------
    leg: "both", "plus" or "minus". plus, minus: track length (from, to) [mm] of each leg. hop: as of its stretch.
    layer: copper layer. start, end: (x, y) [mm] of the stretch. origin, along: the cut's zero and direction.
    legs: their places along the cut. beside: foreign copper on the same layer; `beside_nets` its nets.
    planes: copper at 0 V by layer.
    """

    leg: str
    plus: Span
    minus: Span
    hop: int
    layer: int
    start: tuple[float, float]
    end: tuple[float, float]
    origin: tuple[float, float]
    along: tuple[float, float]
    legs: tuple[Leg, ...]
    beside: tuple[Span, ...] = ()
    beside_nets: tuple[int, ...] = ()
    planes: tuple[tuple[int, tuple[Span, ...]], ...] = ()


def cuts_of(
    plus: Pieces, minus: Pieces, profile: SpacingProfile, stretches: Iterable[Stretch], breaks: tuple[Floats, Floats]
) -> list[Cut]:
    """Cuts in order, without the copper they meet. `breaks`: further track lengths of each leg to cut at."""
    found: list[Cut] = []
    legs = (plus, minus)
    for stretch in stretches:
        if stretch.beside:
            found.extend(_beside(plus, minus, profile, stretch, breaks[0]))
            continue
        for name, span, pieces, own in zip(("plus", "minus"), (stretch.plus, stretch.minus), legs, breaks, strict=True):
            found.extend(_alone(name, span, pieces, stretch, own))
    return found


def _beside(plus: Pieces, minus: Pieces, profile: SpacingProfile, stretch: Stretch, breaks: Floats) -> Iterable[Cut]:
    edges = _edges(stretch.plus, np.concatenate([profile.s_from, profile.s_to, breaks]))
    middle = (edges[1:] + edges[:-1]) / 2
    row = np.clip(np.searchsorted(profile.s_to, middle), 0, len(profile) - 1)
    share = (middle - profile.s_from[row]) / (profile.s_to - profile.s_from)[row]
    piece, other = profile.piece[row], profile.other[row]
    at = _at(plus, edges)
    centre = _at(plus, middle)
    t, _ = nearest(curves_of(minus).take(other), centre)
    facing = points(curves_of(minus).take(other), t)
    ends_minus = _facing_lengths(minus, profile, edges, stretch.minus)
    a, m, b = profile.gap_from[row], profile.gap_mid[row], profile.gap_to[row]
    gap = a + (4 * m - 3 * a - b) * share + (2 * a + 2 * b - 4 * m) * share * share
    steady = np.maximum(np.abs(a - m), np.abs(b - m)) < 1e-4
    away = facing - centre
    size = np.hypot(away[:, 0], away[:, 1])
    for i in range(len(middle)):
        if not profile.coupled[row[i]] or size[i] <= 0:
            continue
        wide = float(plus.width[piece[i]]), float(minus.width[other[i]])
        space = float(gap[i]) if steady[i] else _stepped(float(gap[i]))
        if space <= 0:
            continue
        yield Cut(
            leg="both",
            plus=(float(edges[i]), float(edges[i + 1])),
            minus=(float(ends_minus[i]), float(ends_minus[i + 1])),
            hop=stretch.hop,
            layer=int(plus.layer[piece[i]]),
            start=_xy(at[i]),
            end=_xy(at[i + 1]),
            origin=_xy(centre[i]),
            along=_xy(away[i] / size[i]),
            legs=(
                Leg(name="plus", centre=0.0, width=wide[0]),
                Leg(name="minus", centre=space + (wide[0] + wide[1]) / 2, width=wide[1]),
            ),
        )


def _alone(name: str, span: Span, pieces: Pieces, stretch: Stretch, breaks: Floats) -> Iterable[Cut]:
    if span[1] - span[0] <= _LEAST_MM:
        return
    before = track_before(pieces)
    edges = _edges(span, np.concatenate([before, breaks]))
    middle = (edges[1:] + edges[:-1]) / 2
    row, t = _place(pieces, middle)
    curves = curves_of(pieces).take(row)
    centre, heading, at = points(curves, t), directions(curves, t), _at(pieces, edges)
    still = (span[0], span[0])
    for i in range(len(middle)):
        own = (float(edges[i]), float(edges[i + 1]))
        other = (stretch.minus if name == "plus" else stretch.plus)[0]
        still = (other, other)
        yield Cut(
            leg=name,
            plus=own if name == "plus" else still,
            minus=own if name == "minus" else still,
            hop=stretch.hop,
            layer=int(pieces.layer[row[i]]),
            start=_xy(at[i]),
            end=_xy(at[i + 1]),
            origin=_xy(centre[i]),
            along=(-math.sin(heading[i]), math.cos(heading[i])),
            legs=(Leg(name=name, centre=0.0, width=float(pieces.width[row[i]])),),
        )


def _edges(span: Span, breaks: Floats) -> Floats:
    inside = np.unique(breaks[(breaks > span[0] + _LEAST_MM) & (breaks < span[1] - _LEAST_MM)])
    coarse = np.concatenate([[span[0]], inside, [span[1]]])
    coarse = coarse[np.r_[True, np.diff(coarse) > _LEAST_MM]]
    coarse[-1] = span[1]
    steps = np.maximum(np.ceil(np.diff(coarse) / STEP_MM), 1).astype(np.int64)
    first = np.repeat(coarse[:-1], steps)
    width = np.repeat(np.diff(coarse) / steps, steps)
    nth = np.arange(len(first)) - np.repeat(np.cumsum(steps) - steps, steps)
    return np.concatenate([first + nth * width, [span[1]]])


def _place(pieces: Pieces, s: Floats) -> tuple[Ints, Floats]:
    """The piece and its parameter at each track length."""
    tracks = np.flatnonzero((pieces.kind == TRACK) & (pieces.length > 0))
    before = track_before(pieces)[tracks]
    row = tracks[np.clip(np.searchsorted(before, s, side="right") - 1, 0, len(tracks) - 1)]
    t = (s - track_before(pieces)[row]) / pieces.length[row]
    return row, np.clip(t, 0.0, 1.0)


def _at(pieces: Pieces, s: Floats) -> Floats:
    row, t = _place(pieces, s)
    return points(curves_of(pieces).take(row), t)


def _facing_lengths(minus: Pieces, profile: SpacingProfile, s: Floats, span: Span) -> Floats:
    """Track length of minus facing plus's track lengths s, from one end of its span to the other, never backwards."""
    row = np.clip(np.searchsorted(profile.s_to, s - _LEAST_MM), 0, len(profile) - 1)
    share = np.clip((s - profile.s_from[row]) / (profile.s_to - profile.s_from)[row], 0.0, 1.0)
    at = profile.start[row] + (profile.end - profile.start)[row] * share[:, None]
    other = np.maximum(profile.other[row], 0)
    t, _ = nearest(curves_of(minus).take(other), at)
    found = np.clip(track_before(minus)[other] + t * minus.length[other], span[0], span[1])
    found[0], found[-1] = span
    return np.maximum.accumulate(found)


def _stepped(gap: float) -> float:
    return math.exp(round(math.log(gap) / _GAP_STEP) * _GAP_STEP) if gap > 0 else gap


def _xy(point: Sequence[float] | Floats) -> tuple[float, float]:
    return float(point[0]), float(point[1])


# What the cuts meet


def with_copper(
    cuts: list[Cut], heights: Heights, board_cuts: CrossCuts, own: frozenset[int], reference: frozenset[int]
) -> list[Cut]:
    """The cuts with foreign copper beside the legs and planes above and below.

    Parameters: own: the pair's nets. reference: nets whose copper on other layers counts however narrow it is.
    """
    found = list(cuts)
    for layer in sorted({cut.layer for cut in cuts}):
        rows = [i for i, cut in enumerate(cuts) if cut.layer == layer]
        planes: dict[int, list[tuple[int, tuple[Span, ...]]]] = {i: [] for i in rows}
        for side in (-1, 1):
            open_rows, k = rows, layer + side
            while open_rows and 0 <= k < len(heights.copper):
                height = _height(heights, layer, k)
                reach = PLANE_HEIGHTS * height
                met = _met(board_cuts, k, [cuts[i] for i in open_rows], reach)
                still = []
                for place, i in enumerate(open_rows):
                    copper = _plane_copper(met, place, own, reference)
                    nearer = any((p - layer) * side > 0 for p, _ in planes[i])
                    spans = _plane_behind(copper, cuts[i], height) if nearer else _plane_spans(copper, cuts[i], height)
                    if spans:
                        planes[i].append((k, spans))
                    if not nearer and spans != WHOLE:
                        still.append(i)
                open_rows, k = still, k + side
        near = NEAR_HEIGHTS * _nearest_height(heights, layer)
        met = _met(board_cuts, layer, [cuts[i] for i in rows], near)
        for place, i in enumerate(rows):
            beside, nets = _beside_spans(met, place, cuts[i], near, own)
            found[i] = replace(found[i], beside=beside, beside_nets=nets, planes=tuple(sorted(planes[i])))
    return found


def _height(heights: Heights, layer: int, other: int) -> float:
    if other < layer:
        return heights.copper[other][0] - heights.copper[layer][1]
    return heights.copper[layer][0] - heights.copper[other][1]


def _nearest_height(heights: Heights, layer: int) -> float:
    return min(_height(heights, layer, k) for k in (layer - 1, layer + 1) if 0 <= k < len(heights.copper))


def _window(cut: Cut, reach: float) -> Span:
    return min(leg.span[0] for leg in cut.legs) - reach, max(leg.span[1] for leg in cut.legs) + reach


def _met(board_cuts: CrossCuts, layer: int, cuts: list[Cut], reach: float) -> Met:
    windows = np.array([_window(cut, reach) for cut in cuts])
    origin, along = np.array([cut.origin for cut in cuts]), np.array([cut.along for cut in cuts])
    return board_cuts.across(layer, origin, along, windows[:, 0], windows[:, 1])


def _of(met: Met, place: int) -> Iterable[tuple[int, float, float]]:
    first, last = np.searchsorted(met.cut, [place, place + 1])
    for i in range(first, last):
        yield int(met.net[i]), float(met.low[i]), float(met.high[i])


def _plane_copper(met: Met, place: int, own: frozenset[int], reference: frozenset[int]) -> list[list[float]]:
    """Stretches of copper at 0 V of one cut, in order; what touches is one."""
    merged: list[list[float]] = []
    for low, high in sorted(
        (low, high)
        for net, low, high in _of(met, place)
        if net in reference or (net >= 0 and net not in own and high - low >= PLANE_WIDTH_MM)
    ):
        if merged and low <= merged[-1][1]:
            merged[-1][1] = max(merged[-1][1], high)
        else:
            merged.append([low, high])
    return merged


def _plane_spans(copper: list[list[float]], cut: Cut, height: float) -> tuple[Span, ...]:
    """The nearest plane: its copper with the slots and edges that the legs can feel, on a grid.

    A leg's image current spreads over a few heights. A slot counts if it begins within three heights of the legs and is
    wider than a quarter of its distance to them, an edge if it lies within six heights; where all copper is farther
    than three heights there is no plane.
    """
    left, right = min(leg.span[0] for leg in cut.legs), max(leg.span[1] for leg in cut.legs)
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


def _plane_behind(copper: list[list[float]], cut: Cut, height: float) -> tuple[Span, ...]:
    """A plane behind slots of a nearer one: whole if it has copper within its own height of the legs, else none."""
    left, right = min(leg.span[0] for leg in cut.legs) - height, max(leg.span[1] for leg in cut.legs) + height
    return WHOLE if any(low < right and high > left for low, high in copper) else ()


def _on_grid(x: float, left: float, right: float, height: float) -> float:
    away = max(left - x, x - right, 0.0)
    step = _EDGE_STEP * height * (1.0 if away < height else 3.0)
    return round(x / step) * step


def _beside_spans(
    met: Met, place: int, cut: Cut, near: float, own: frozenset[int]
) -> tuple[tuple[Span, ...], tuple[int, ...]]:
    """The nearest foreign copper on each side of the legs, and what lies between them; gaps in steps of 5 %."""
    legs = sorted(leg.span for leg in cut.legs)
    left, right = legs[0][0], legs[-1][1]
    found: list[tuple[Span, int]] = []
    outer: dict[str, tuple[float, Span, int]] = {}
    for net, low, high in _of(met, place):
        if net in own or high - low < SLIVER_MM:
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
