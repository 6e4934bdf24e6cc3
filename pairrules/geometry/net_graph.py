"""How the copper of one net hangs together: a graph rebuilt from what touches, not from the order of drawing.

Nodes are places on a copper layer: track ends, pad centres, via centres, and points where one track meets another.
Edges are stretches of drawn track between nodes, straight joins, and barrels.

Copper that meets exactly (an end on a centre line, on a pad's or a via's centre) needs no join. Where copper touches
without that, a straight join is added, and only between parts that would else be separate: a join inside copper that
is already connected would be a short cut past the drawn centre line. First pads and vias join tracks that touch them,
then one another, then tracks join tracks, then areas join whatever they cover.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from itertools import combinations, pairwise

import numpy as np
import numpy.typing as npt
import shapely
from shapely.geometry.base import BaseGeometry

from pairrules.board.board import Board
from pairrules.board.columns import Floats, Ints
from pairrules.geometry.copper_index import CopperIndex
from pairrules.geometry.crowding import MOST_JOINED, CrowdedError, refuse_crowds
from pairrules.geometry.curves import Curves, chords, lengths, nearest, parts, points
from pairrules.geometry.pad_outlines import pad_outline
from pairrules.geometry.pair_geometry import BARREL, JOIN, TRACK

SAME_MM = 0.0005
"""Points nearer than this are one: half a micrometre, above every format's rounding, below every process's."""

_SEARCH_MM = 0.001
_MANY = 60


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class NetGraph:
    """The graph of one net.

    Parameters
    ----------
    at: (n, 2) [mm], layer: (n,) of the nodes.
    ends: (m, 2) the nodes of each edge. kind: (m,) TRACK, JOIN or BARREL. curves: m pieces, running from the first node
        to the second. width: (m,) [mm], NaN unless TRACK. length: (m,) [mm], NaN for a barrel of unknown height.
    via: (m,) row of `Board.vias` for a barrel, −1 else and for a pin's hole.
    pad_nodes: the nodes of each pad row of the net.
    """

    at: Floats
    layer: Ints
    ends: Ints
    kind: Ints
    curves: Curves
    width: Floats
    length: Floats
    via: Ints
    pad_nodes: dict[int, tuple[int, ...]]


class _Parts:
    """Which nodes hang together (disjoint sets)."""

    def __init__(self, count: int) -> None:
        self._parent = list(range(count))

    def add(self) -> int:
        self._parent.append(len(self._parent))
        return len(self._parent) - 1

    def find(self, node: int) -> int:
        while self._parent[node] != node:
            self._parent[node] = self._parent[self._parent[node]]
            node = self._parent[node]
        return node

    def join(self, a: int, b: int) -> bool:
        a, b = self.find(a), self.find(b)
        if a == b:
            return False
        self._parent[max(a, b)] = min(a, b)
        return True

    def count(self, nodes: Iterable[int]) -> int:
        return len({self.find(node) for node in nodes})


def net_graph(board: Board, index: CopperIndex, net: int) -> NetGraph:
    """The graph of `net`. Raises: CrowdedError where its copper is too much or too crowded to be followed."""
    refuse_crowds(board, index, net)
    return _Builder(board, index, net).graph()


@dataclass(frozen=True, slots=True)
class _Spot:
    """A pad or via: its nodes by layer, its centre, its outline (`None` until asked for)."""

    nodes: dict[int, int]
    at: tuple[float, float]
    pad: int
    via: int


class _Builder:
    """Gathers nodes and edges of one net step by step; lives only while its graph is made."""

    def __init__(self, board: Board, index: CopperIndex, net: int) -> None:
        self._board = board
        self._tracks = index.rows("tracks", net)
        self._pads = index.rows("pads", net)
        self._vias = index.rows("vias", net)
        self._areas = [board.areas[i] for i in index.rows("areas", net)]
        self._node_at: list[tuple[float, float]] = []
        self._node_layer: list[int] = []
        self._joins: list[tuple[int, int]] = []
        self._splits: dict[int, list[tuple[float, int]]] = {}

    def graph(self) -> NetGraph:
        self._place_nodes()
        self._cut_tracks()
        self._find_parts()
        if self._parts.count(self._copper_nodes()) > 1:
            outlines = self._outlines()
            self._join_spots_to_tracks(outlines)
            self._join_spots(outlines)
            self._join_tracks()
            self._join_areas(outlines)
        return self._assemble()

    # Nodes and exact connections

    def _place_nodes(self) -> None:
        board, tracks = self._board, self._board.tracks
        rows = self._tracks
        at = np.concatenate(
            [tracks.start[rows], tracks.end[rows], board.pads.at[self._pads], board.vias.at[self._vias]]
        )
        site, places = _merge(at)
        count = len(rows)
        layers = len(board.copper)
        self._by_place: dict[tuple[int, int], int] = {}

        def node(of: int, layer: int) -> int:
            key = (int(site[of]), int(layer))
            if key not in self._by_place:
                self._by_place[key] = len(self._node_at)
                self._node_at.append((float(places[key[0], 0]), float(places[key[0], 1])))
                self._node_layer.append(key[1])
            return self._by_place[key]

        self._track_nodes = [
            (node(i, tracks.layer[row]), node(count + i, tracks.layer[row])) for i, row in enumerate(rows)
        ]
        self._spots: list[_Spot] = []
        for i, row in enumerate(self._pads):
            of, layer = 2 * count + i, int(board.pads.layer[row])
            on = range(layers) if layer < 0 else range(layer, layer + 1)
            x, y = board.pads.at[row].tolist()
            self._spots.append(_Spot({k: node(of, k) for k in on}, (x, y), int(row), -1))
        for i, row in enumerate(self._vias):
            of = 2 * count + len(self._pads) + i
            on = range(int(board.vias.first[row]), int(board.vias.last[row]) + 1)
            x, y = board.vias.at[row].tolist()
            self._spots.append(_Spot({k: node(of, k) for k in on}, (x, y), -1, int(row)))

    def _cut_tracks(self) -> None:
        """Tracks cut wherever a node lies on their centre line; what is drawn twice is kept once, at its widest."""
        tracks, rows = self._board.tracks, self._tracks
        curves = Curves(
            start=tracks.start[rows], end=tracks.end[rows], centre=tracks.centre[rows], sweep=tracks.sweep[rows]
        )
        size = lengths(curves)
        cuts: list[list[tuple[float, int]]] = [[(0.0, a), (1.0, b)] for a, b in self._track_nodes]
        at, layer = np.array(self._node_at).reshape(-1, 2), np.array(self._node_layer, dtype=np.int64)
        if len(rows):
            lines = _lines(curves)
            node, piece = shapely.STRtree(lines).query(
                shapely.points(at), predicate="dwithin", distance=SAME_MM + _SEARCH_MM
            )
            same = layer[node] == tracks.layer[rows][piece]
            node, piece = node[same], piece[same]
            t, away = nearest(curves.take(piece), at[node])
            inside = (away <= SAME_MM) & (t * size[piece] > SAME_MM) & ((1 - t) * size[piece] > SAME_MM)
            for i in np.flatnonzero(inside).tolist():
                cuts[piece[i]].append((float(t[i]), int(node[i])))
        piece_rows, t_from, t_to, ends = [], [], [], []
        for i, cut in enumerate(cuts):
            cut.sort()
            for (ta, a), (tb, b) in pairwise(cut):
                if a != b or (tb - ta) * size[i] > 4 * SAME_MM:
                    piece_rows.append(i)
                    t_from.append(ta)
                    t_to.append(tb)
                    ends.append((a, b))
        taken = np.array(piece_rows, dtype=np.int64)
        self._curves = parts(curves, taken, np.array(t_from, dtype=np.float64), np.array(t_to, dtype=np.float64))
        self._ends = np.array(ends, dtype=np.int64).reshape(-1, 2)
        self._width = tracks.width[rows][taken]
        self._layer = tracks.layer[rows][taken]
        self._snap(at)
        kept = self._once()
        self._curves, self._ends = self._curves.take(kept), self._ends[kept]
        self._width, self._layer = self._width[kept], self._layer[kept]

    def _snap(self, at: Floats) -> None:
        """Straight pieces end exactly at their nodes, so that a route has no gaps; arcs keep their circle."""
        straight = self._curves.sweep == 0.0
        start, end = self._curves.start.copy(), self._curves.end.copy()
        start[straight] = at[self._ends[straight, 0]]
        end[straight] = at[self._ends[straight, 1]]
        self._curves = Curves(start=start, end=end, centre=self._curves.centre, sweep=self._curves.sweep)

    def _once(self) -> Ints:
        """Rows of the pieces that are no repetition of a wider or earlier one."""
        middle = points(self._curves, np.full(len(self._ends), 0.5))
        seen: dict[tuple[int, int], list[int]] = {}
        kept: list[int] = []
        for i in np.argsort(-self._width, kind="stable"):
            a, b = sorted(self._ends[i].tolist())
            others = seen.setdefault((a, b), [])
            if any(np.hypot(*(middle[i] - middle[j])) < 2 * SAME_MM for j in others):
                continue
            others.append(int(i))
            kept.append(int(i))
        return np.array(sorted(kept), dtype=np.int64)

    def _find_parts(self) -> None:
        self._parts = _Parts(len(self._node_at))
        for a, b in self._ends:
            self._parts.join(int(a), int(b))
        for spot in self._spots:
            for a, b in pairwise(spot.nodes.values()):
                self._parts.join(a, b)

    def _copper_nodes(self) -> Iterator[int]:
        for a, _ in self._ends:
            yield int(a)
        for spot in self._spots:
            yield next(iter(spot.nodes.values()))

    # Joins between parts that touch

    def _outlines(self) -> list[BaseGeometry]:
        vias = self._board.vias
        found: list[BaseGeometry] = []
        for spot in self._spots:
            if spot.pad >= 0:
                found.append(pad_outline(self._board.pads, spot.pad))
            else:
                size = np.nanmax([vias.pad[spot.via], vias.drill[spot.via], 0.0])
                found.append(shapely.Point(spot.at).buffer(size / 2) if size > 0 else shapely.Point(spot.at))
        return found

    def _join(self, a: int, b: int) -> None:
        if self._parts.join(a, b):
            self._joins.append((a, b))

    def _split(self, edge: int, t: float) -> int:
        """The node at parameter t of a track edge, made where there is none."""
        size = float(lengths(self._curves.take(np.array([edge])))[0])
        for end, near in ((0, t), (1, 1 - t)):
            if near * size <= SAME_MM:
                return int(self._ends[edge, end])
        at = points(self._curves.take(np.array([edge])), np.array([t]))[0]
        node = self._parts.add()
        self._node_at.append((float(at[0]), float(at[1])))
        self._node_layer.append(int(self._layer[edge]))
        self._parts.join(node, int(self._ends[edge, 0]))
        self._splits.setdefault(edge, []).append((t, node))
        return node

    def _join_spots_to_tracks(self, outlines: list[BaseGeometry]) -> None:
        if not len(self._ends) or not self._spots:
            return
        spot, edge = shapely.STRtree(_lines(self._curves)).query(
            np.array(outlines), predicate="dwithin", distance=float(self._width.max()) / 2
        )
        lines = _lines(self._curves.take(edge))
        touch = shapely.distance(np.array(outlines)[spot], lines) <= self._width[edge] / 2
        on = np.array(
            [int(self._layer[e]) in self._spots[s].nodes for s, e in zip(spot, edge, strict=True)], dtype=bool
        )
        spot, edge = spot[touch & on], edge[touch & on]
        t, away = nearest(self._curves.take(edge), np.array([self._spots[s].at for s in spot]).reshape(-1, 2))
        loose = self._loose_ends()
        for i in np.lexsort((edge, spot, away)):
            own = self._spots[spot[i]].nodes[int(self._layer[edge[i]])]
            if self._parts.find(own) != self._parts.find(int(self._ends[edge[i], 0])):
                self._join(own, self._split(int(edge[i]), float(t[i])))
            elif t[i] in {0.0, 1.0} and (end := int(self._ends[edge[i], int(t[i])])) in loose:
                # A second way into a pad: a track that stops in it is joined too, though a longer way is already.
                self._joins.append((own, end))

    def _loose_ends(self) -> set[int]:
        """Nodes where just one track ends and nothing else is."""
        node, count = np.unique(self._ends, return_counts=True)
        held = {n for spot in self._spots for n in spot.nodes.values()}
        return set(node[count == 1].tolist()) - held

    def _join_spots(self, outlines: list[BaseGeometry]) -> None:
        if len(outlines) < 2:
            return
        first, second = shapely.STRtree(outlines).query(np.array(outlines), predicate="intersects")
        for a, b in sorted({(int(i), int(k)) for i, k in zip(first, second, strict=True) if i < k}):
            shared = sorted(self._spots[a].nodes.keys() & self._spots[b].nodes.keys())
            if shared:
                self._join(self._spots[a].nodes[shared[0]], self._spots[b].nodes[shared[0]])

    def _join_tracks(self) -> None:
        if len(self._ends) < 2:
            return
        lines = _lines(self._curves)
        first, second = shapely.STRtree(lines).query(lines, predicate="dwithin", distance=float(self._width.max()))
        once = (first < second) & (self._layer[first] == self._layer[second])
        first, second = first[once], second[once]
        touch = shapely.distance(lines[first], lines[second]) <= (self._width[first] + self._width[second]) / 2
        found = []
        for i, k in zip(first[touch].tolist(), second[touch].tolist(), strict=True):
            if self._parts.find(int(self._ends[i, 0])) != self._parts.find(int(self._ends[k, 0])):
                found.append((*self._closest(i, k), i, k))
        for _, t_first, t_second, i, k in sorted(found):
            if self._parts.find(int(self._ends[i, 0])) != self._parts.find(int(self._ends[k, 0])):
                self._join(self._split(i, t_first), self._split(k, t_second))

    def _closest(self, i: int, k: int) -> tuple[float, float, float]:
        """Distance [mm] between two track edges and the parameters where they come nearest."""
        rows = np.array([i, i, k, k])
        other = np.array([k, k, i, i])
        ends = np.array([0.0, 1.0, 0.0, 1.0])
        t, away = nearest(self._curves.take(other), points(self._curves.take(rows), ends))
        best = int(np.argmin(away))
        pair = (ends[best], t[best]) if best < 2 else (t[best], ends[best])
        lines = _lines(self._curves.take(np.array([i, k])))
        if shapely.distance(lines[0], lines[1]) >= away[best] - _SEARCH_MM:
            return float(away[best]), float(pair[0]), float(pair[1])
        # They cross between their ends: alternate feet on either converge to the crossing from its chord estimate.
        at = shapely.get_coordinates(shapely.shortest_line(lines[0], lines[1]))[:1]
        pieces = [self._curves.take(np.array([row])) for row in (i, k)]
        found = [0.0, 0.0]
        gap = 0.0
        for turn in range(60):
            t_now, away_now = nearest(pieces[turn % 2], at)
            found[turn % 2], gap = float(t_now[0]), float(away_now[0])
            at = points(pieces[turn % 2], t_now)
        return gap, found[0], found[1]

    def _join_areas(self, outlines: list[BaseGeometry]) -> None:
        by_layer: dict[int, list[BaseGeometry]] = {}
        for area in self._areas:
            polygon = shapely.make_valid(shapely.Polygon(area.outline, list(area.holes)))
            by_layer.setdefault(area.layer, []).append(polygon)
        for layer in sorted(by_layer):
            for copper in shapely.get_parts(shapely.union_all(by_layer[layer])):
                self._join_by(copper, layer, outlines)

    def _join_by(self, copper: BaseGeometry, layer: int, outlines: list[BaseGeometry]) -> None:
        """Straight joins across one piece of filled copper between all parts that it touches."""
        touching: dict[int, list[int]] = {}
        covered = shapely.dwithin(copper, shapely.points(np.array(self._node_at).reshape(-1, 2)), SAME_MM)
        for node in np.flatnonzero(covered & (np.array(self._node_layer) == layer)):
            touching.setdefault(self._parts.find(int(node)), []).append(int(node))
        for spot, outline in zip(self._spots, outlines, strict=True):
            own = spot.nodes.get(layer)
            if own is not None and self._parts.find(own) not in touching and shapely.intersects(copper, outline):
                touching.setdefault(self._parts.find(own), []).append(own)
        lines = _lines(self._curves)
        near = shapely.distance(copper, lines) <= self._width / 2 if len(lines) else np.zeros(0, dtype=bool)
        for edge in np.flatnonzero(near & (self._layer == layer)):
            part = self._parts.find(int(self._ends[edge, 0]))
            if part not in touching:
                at = shapely.get_coordinates(shapely.shortest_line(lines[edge], copper))[:1]
                t, _ = nearest(self._curves.take(np.array([edge])), at)
                touching[part] = [self._split(int(edge), float(t[0]))]
        if len(touching) > MOST_JOINED:
            raise CrowdedError(f"has an area that joins more than {MOST_JOINED} pieces of its copper")
        # Where tracks simply stop in the copper, their ends are what it joins, so that drawn line is not cut short.
        loose = self._loose_ends()
        touching = {part: [node for node in nodes if node in loose] or nodes for part, nodes in touching.items()}
        for first, second in combinations(sorted(touching), 2):
            pairs = [(a, b) for a in touching[first] for b in touching[second]]
            if len(pairs) > _MANY:
                pairs = [min(pairs, key=lambda pair: (self._distance(*pair), pair))]
            self._joins.extend(pairs)
        for part, other in pairwise(sorted(touching)):
            self._parts.join(part, other)

    def _distance(self, a: int, b: int) -> float:
        return float(np.hypot(*np.subtract(self._node_at[a], self._node_at[b])))

    # The graph

    def _assemble(self) -> NetGraph:
        self._apply_splits()
        at, layer = np.array(self._node_at).reshape(-1, 2), np.array(self._node_layer, dtype=np.int64)
        barrels = list(self._barrels())
        extra = np.array([(a, b) for a, b in self._joins] + [(a, b) for a, b, _ in barrels], dtype=np.int64).reshape(
            -1, 2
        )
        tracks, joins = len(self._ends), len(self._joins)
        count = tracks + len(extra)
        kind = np.full(count, BARREL)
        kind[:tracks], kind[tracks : tracks + joins] = TRACK, JOIN
        via = np.full(count, -1)
        via[tracks + joins :] = [row for _, _, row in barrels]
        nan = np.full((len(extra), 2), np.nan)
        curves = Curves(
            start=np.concatenate([self._curves.start, at[extra[:, 0]]]),
            end=np.concatenate([self._curves.end, at[extra[:, 1]]]),
            centre=np.concatenate([self._curves.centre, nan]),
            sweep=np.concatenate([self._curves.sweep, np.zeros(len(extra))]),
        )
        length = lengths(curves)
        length[tracks + joins :] = [self._board.stackup.barrel_mm(int(layer[a]), int(layer[b])) for a, b, _ in barrels]
        return NetGraph(
            at=at,
            layer=layer,
            ends=np.concatenate([self._ends, extra]),
            kind=kind,
            curves=curves,
            width=np.concatenate([self._width, np.full(len(extra), np.nan)]),
            length=length,
            via=via,
            pad_nodes={spot.pad: tuple(spot.nodes.values()) for spot in self._spots if spot.pad >= 0},
        )

    def _apply_splits(self) -> None:
        if not self._splits:
            return
        rows, t_from, t_to, ends = [], [], [], []
        for edge, (first, last) in enumerate(self._ends.tolist()):
            cut = [(0.0, first), *sorted(self._splits.get(edge, [])), (1.0, last)]
            for (ta, a), (tb, b) in pairwise(cut):
                rows.append(edge)
                t_from.append(ta)
                t_to.append(tb)
                ends.append((a, b))
        taken = np.array(rows, dtype=np.int64)
        self._curves = parts(self._curves, taken, np.array(t_from), np.array(t_to))
        self._ends = np.array(ends, dtype=np.int64).reshape(-1, 2)
        self._width, self._layer = self._width[taken], self._layer[taken]

    def _barrels(self) -> Iterator[tuple[int, int, int]]:
        done: set[tuple[int, int]] = set()
        for spot in self._spots:
            for a, b in pairwise(spot.nodes.values()):
                if (a, b) not in done:
                    done.add((a, b))
                    yield a, b, spot.via


def _merge(at: Floats) -> tuple[Ints, Floats]:
    """Points nearer than `SAME_MM` as one: the place (n,) of each point, and the places (k, 2)."""
    # As complex numbers, which are sorted much faster than rows of two.
    places, site = np.unique(at[:, 0] + 1j * at[:, 1], return_inverse=True)
    distinct = np.column_stack([places.real, places.imag])
    spots = _points(distinct)
    first, second = shapely.STRtree(spots).query(spots, predicate="dwithin", distance=SAME_MM)
    close = first < second
    if not close.any():
        return site, distinct
    together = _Parts(len(distinct))
    for a, b in zip(first[close].tolist(), second[close].tolist(), strict=True):
        together.join(a, b)
    leader = np.array([together.find(i) for i in range(len(distinct))], dtype=np.int64)
    return leader[site], distinct


def _points(at: Floats) -> npt.NDArray[np.object_]:
    made = np.empty(len(at), dtype=object)
    made[:] = shapely.points(at)
    return made


def _lines(curves: Curves) -> npt.NDArray[np.object_]:
    if not len(curves):
        return np.zeros(0, dtype=object)
    at, rows = chords(curves, within=_SEARCH_MM / 2)
    made = np.empty(len(curves), dtype=object)
    made[:] = shapely.linestrings(at, indices=rows)
    return made
