"""A few numbers in which the copper of a pair and what lies near it is told again, so that small noise stays small.

Every number is a weighted sum over all the copper. The weights are waves across the board, so the number changes by
about as much as any piece is moved, lengthened or widened, and hardly at all with rounding. A sum knows no order, and
an integral along a line does not see where the line is cut. Two numbers may agree by accident; eight do not.

Source: random projections keep distances (Johnson and Lindenstrauss, 1984) and waves in place of kernels (Rahimi and
Recht, "Random Features for Large-Scale Kernel Machines", 2007), both from memory; the waves here are fixed, not random.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Bools, Floats, Ints
from pairrules.geometry.board_copper import BoardCopper
from pairrules.geometry.curves import Curves, lengths, points
from pairrules.geometry.net_graph import net_graph
from pairrules.geometry.pad_outlines import pad_outline
from pairrules.geometry.pair_geometry import TRACK, LegRoute, PairGeometry
from pairrules.geometry.surroundings import nearest_copper
from pairrules.pairing.link import Link

NUMBERS = 8
LEAST_REACH_MM = 1.0
"""Foreign and reference copper counts within the pair's reach, and this far at least."""

_SAMPLES = 1021
"""Samples along a leg; a prime, so that edges drawn on a grid seldom fall on one."""

_LEAST_AXIS_MM = 1.0137
_OFF_GRID_MM = 0.0137
"""Thresholds lie off the grids boards are drawn on, lest noise decide."""

# The constants are part of the fingerprint's version: whoever changes one changes `fingerprint.VERSION` too.
_J = np.arange(NUMBERS)
_TURN = _J * math.pi * (3 - math.sqrt(5))
_SIZE = 0.4 * 1.31**_J
_WAVE = np.stack([_SIZE * np.cos(_TURN), _SIZE * np.sin(_TURN)], axis=1)
"""Wave vectors (8, 2) [rad/mm], 0.4 to 2.6, turned by the golden angle from one to the next."""


def copper_sketch(board: Board, link: Link, geometry: PairGeometry, copper: BoardCopper) -> Floats:
    """The numbers (8,) [mm, roughly] of a link's copper.

    What counts: tracks (drawn twice counts once), vias, pads and areas of the link's nets, legs and layers told apart;
    along complete routes the distance to foreign copper on the layer and to the edge of reference copper above and
    below, within reach; thickness and permittivity of the stack's layers. Names count for nothing.
    """
    frames = _frames(board, link)
    total = np.zeros(NUMBERS)
    for leg, hops in enumerate((link.hops_plus, link.hops_minus)):
        for net in sorted({hop.net for hop in hops}):
            drawn = _drawn(copper, net)
            total += np.sum([drawn.sketch(frame, leg) for frame in frames], axis=0)
    total += _stack(board)
    if geometry.plus is not None and geometry.minus is not None:
        reach = _reach(geometry.reach_mm)
        own = np.zeros(len(board.nets) + 1, dtype=np.bool_)
        own[[hop.net for hop in (*link.hops_plus, *link.hops_minus)]] = True
        for leg, route in enumerate((geometry.plus, geometry.minus)):
            total += _around(copper, route, leg, own, reach)
    return total


def _reach(reach_mm: float | None) -> float:
    """The pair's reach rounded up by doubling, so that what little it changes by with noise changes nothing."""
    reach = LEAST_REACH_MM
    while reach < (reach_mm or 0.0) - _OFF_GRID_MM:
        reach *= 2
    return reach


class _Frame:
    """Axes of the pair's own, so that moving or turning the board changes nothing."""

    def __init__(self, origin: Floats, cos: float, sin: float) -> None:
        self._origin = origin
        self._turn = np.array([[cos, -sin], [sin, cos]])

    def place(self, at: Floats) -> Floats:
        """Places (n, 2) of the board in the pair's axes."""
        moved: Floats = (at - self._origin) @ self._turn
        return moved


def _frames(board: Board, link: Link) -> tuple[_Frame, ...]:
    """From each end toward the other: which one is the source is not told alike by every format."""
    ends = [
        _middle(board, [getattr(hops[place], end) for hops in (link.hops_plus, link.hops_minus) if hops])
        for place, end in ((0, "start"), (-1, "end"))
    ]
    first, last = ends
    if first is None or last is None:
        nets = sorted({hop.net for hop in (*link.hops_plus, *link.hops_minus)})
        return (_Frame(_centre(board, nets, first, last), 1.0, 0.0),)
    axis = last - first
    size = float(np.hypot(*axis))
    if size < _LEAST_AXIS_MM:
        return (_Frame((first + last) / 2, 1.0, 0.0),)
    cos, sin = float(axis[0]) / size, float(axis[1]) / size
    return (_Frame(first, cos, sin), _Frame(last, -cos, -sin))


def _middle(board: Board, rows: list[tuple[int, ...]]) -> Floats | None:
    """Half-way between both legs' pads at one end of the link; `None` where a leg has none there."""
    if len(rows) < 2 or not all(rows):
        return None
    middle: Floats = np.mean([board.pads.at[list(leg)].mean(axis=0) for leg in rows], axis=0)
    return middle


def _centre(board: Board, nets: list[int], first: Floats | None, last: Floats | None) -> Floats:
    """An origin where an end of the link is unknown: the known end, else the middle of its pads, else of its tracks."""
    for known in (first, last):
        if known is not None:
            return known
    on = np.isin(board.pads.net, nets)
    if on.any():
        pads: Floats = board.pads.at[on].mean(axis=0)
        return pads
    on = np.isin(board.tracks.net, nets)
    ends = np.stack([board.tracks.start[on], board.tracks.end[on]])
    if not ends.size:
        return np.zeros(2)
    size = np.hypot(*(ends[1] - ends[0]).T)
    middle: Floats = np.average(ends.mean(axis=0), axis=0, weights=size if size.sum() > 0 else None)
    return middle


@dataclass(frozen=True, slots=True, eq=False)
class _Drawn:
    """A net's copper as lines to integrate along and as points, each with its layer (as a phase) and weight."""

    start: Floats
    end: Floats
    line_layer: Floats
    line_weight: Floats
    at: Floats
    at_layer: Floats
    at_weight: Floats

    def sketch(self, frame: _Frame, leg: int) -> Floats:
        """Integrals are exact: along a line the wave at its middle times sin(x)/x of half the phase it passes."""
        start, end = frame.place(self.start), frame.place(self.end)
        half = (end - start) @ _WAVE.T / 2
        lines = _waves((start + end) / 2, self.line_layer, leg) * np.sinc(half / math.pi) * self.line_weight[:, None]
        spots = _waves(frame.place(self.at), self.at_layer, leg) * self.at_weight[:, None]
        total: Floats = lines.sum(axis=0) + spots.sum(axis=0)
        return total


def _drawn(copper: BoardCopper, net: int) -> _Drawn:
    """Tracks, vias, pads and areas of one net."""
    board, index = copper.board, copper.index
    graph = net_graph(board, index, net)
    track = np.flatnonzero(graph.kind == TRACK)
    start, end, size, of = _straightened(graph.curves.take(track))
    starts, ends, weights = [start], [end], [size * (1.0 + 2.0 * graph.width[track][of])]
    layers = [graph.layer[graph.ends[track, 0]][of].astype(np.float64)]

    vias, pads = board.vias, board.pads
    via, pad = index.rows("vias", net), index.rows("pads", net)
    rings = [(ring, int(pads.layer[row])) for row in pad.tolist() for ring in _rings(pad_outline(pads, row))]
    for row in index.rows("areas", net).tolist():
        area = board.areas[row]
        rings += [(np.concatenate([ring, ring[:1]]), area.layer) for ring in (area.outline, *area.holes)]
    for ring, layer in rings:
        starts.append(ring[:-1])
        ends.append(ring[1:])
        weights.append(np.hypot(*(ring[1:] - ring[:-1]).T))
        layers.append(np.full(len(ring) - 1, layer + 0.21))
    via_size = 1.0 + np.nan_to_num(vias.pad[via]) + 0.5 * np.nan_to_num(vias.drill[via])
    return _Drawn(
        start=np.concatenate(starts),
        end=np.concatenate(ends),
        line_layer=np.concatenate(layers),
        line_weight=np.concatenate(weights),
        at=np.concatenate([vias.at[via], pads.at[pad]]),
        at_layer=np.concatenate([vias.first[via] + 0.37 * vias.last[via], pads.layer[pad] + 0.73]),
        at_weight=np.concatenate([via_size, np.ones(len(pad))]),
    )


def _rings(outline: shapely.Geometry) -> list[Floats]:
    return [shapely.get_coordinates(ring) for ring in shapely.get_rings(shapely.get_parts(outline))]


def _straightened(curves: Curves) -> tuple[Floats, Floats, Floats, Ints]:
    """Curves as chords so short that it does not matter where they were cut: start, end, true length, and the curve."""
    size = lengths(curves)
    # A chord of this angle θ misses its arc by rθ²/8, half a millionth of the radius.
    count = np.where(curves.sweep == 0.0, 1, np.ceil(np.abs(curves.sweep) / 0.002)).astype(np.int64)
    of = np.repeat(np.arange(len(curves)), count)
    nth = np.arange(len(of)) - np.repeat(np.cumsum(count) - count, count)
    pieces = curves.take(of)
    return points(pieces, nth / count[of]), points(pieces, (nth + 1) / count[of]), size[of] / count[of], of


def _waves(at: Floats, layer: Floats, leg: int) -> Floats:
    """The waves (n, 8) at places (n, 2) [mm] of the pair's frame; layer and leg shift their phase."""
    phase = 1.7 * _J + 2.3 * leg
    waves: Floats = np.cos(at @ _WAVE.T + phase + layer[:, None] * (0.9 + 0.23 * _J))
    return waves


def _stack(board: Board) -> Floats:
    total = np.zeros(NUMBERS)
    for place, layer in enumerate(board.stackup.layers):
        thickness, permittivity = layer.thickness_mm or 0.0, layer.permittivity or 0.0
        total += 5.0 * thickness * np.cos(0.8 * place + 1.1 * _J) + permittivity * np.cos(0.6 * place + 2.3 * _J)
    return total


def _around(copper: BoardCopper, route: LegRoute, leg: int, own: Bools, reach: float) -> Floats:
    """What lies near one leg, sampled evenly along its tracks."""
    board = copper.board
    row = np.flatnonzero((route.pieces.kind == TRACK) & (route.pieces.length > 0))
    if not len(row):
        return np.zeros(NUMBERS)
    curves = Curves(
        start=route.pieces.start, end=route.pieces.end, centre=route.pieces.centre, sweep=route.pieces.sweep
    ).take(row)
    reached = np.cumsum(lengths(curves))
    s = (np.arange(_SAMPLES) + 0.5) * reached[-1] / _SAMPLES
    piece = np.minimum(np.searchsorted(reached, s, side="right"), len(row) - 1)
    size = lengths(curves)[piece]
    at = points(curves.take(piece), np.clip(1.0 - (reached[piece] - s) / size, 0.0, 1.0))
    layer = route.pieces.layer[row][piece]

    reference = np.zeros(len(board.nets) + 1, dtype=np.bool_)
    reference[list(copper.reference_nets)] = True
    near = np.full((4, _SAMPLES), reach)
    for one in np.unique(layer).tolist():
        here = layer == one
        groups = (~own & ~reference, ~own & reference)
        near[0, here], near[1, here] = nearest_copper(copper.layers.layer(one), at[here], reach, groups)
        for column, beside in ((2, one - 1), (3, one + 1)):
            near[column, here] = _cover(copper, beside, at[here], reach)
    phase = 1.3 * _J + 0.7 * leg
    along = sum(np.cos(np.multiply.outer(way, 0.5 * 1.29**_J) + phase) for way in (s, reached[-1] - s))
    weight = np.cos(np.multiply.outer(np.arange(4), 0.7 + 0.31 * _J)) + 0.2
    total: Floats = np.einsum("cs,sj,cj->j", near, along, weight) * (reached[-1] / _SAMPLES)
    return total


def _cover(copper: BoardCopper, layer: int, at: Floats, reach: float) -> Floats:
    """Distance to the edge of the reference copper on a layer, negative outside it, no further than reach."""
    if not 0 <= layer < len(copper.board.copper) or not copper.reference.known(layer):
        return np.full(len(at), -reach)
    of = copper.reference.layer(layer)
    distance = np.full(len(at), reach)
    if len(of.edges):
        spots = np.asarray(shapely.points(at), dtype=np.object_)
        (which, _), away = of.tree.query_nearest(spots, all_matches=False, return_distance=True)
        distance[which] = np.minimum(away, reach)
    return np.where(of.net_at(at) >= 0, distance, -distance)
