"""The route of one leg: the copper path from its source pad to its load pad, and what branches off it.

Where copper gives more than one way, the shortest is the route (Dijkstra 1959); the rest are stubs.
"""

from __future__ import annotations

import heapq
import math
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from pairrules.board.board import Board
from pairrules.board.columns import Floats
from pairrules.geometry.copper_index import CopperIndex
from pairrules.geometry.crowding import CrowdedError
from pairrules.geometry.net_graph import NetGraph, net_graph
from pairrules.geometry.pair_geometry import BARREL, SERIES, TRACK, LegRoute, Pieces, Stub, ViaUse
from pairrules.pairing.link import Hop

_UNKNOWN_BARREL_MM = 1e-6
"""A barrel of unknown height counts next to nothing when ways are compared, yet more than no barrel at all."""


@dataclass(frozen=True, slots=True)
class Break:
    """Where a leg breaks off: layer (−1 where nothing was found), x, y [mm], and why in words.

    crowded: it was not followed, since its copper is too much; `why` goes on from the leg's name.
    """

    layer: int
    x_mm: float
    y_mm: float
    why: str
    crowded: bool = False


@dataclass(frozen=True, slots=True)
class _Row:
    start: tuple[float, float]
    end: tuple[float, float]
    centre: tuple[float, float]
    sweep: float
    width: float
    layer: int
    kind: int
    length: float


def leg_route(board: Board, index: CopperIndex, hops: tuple[Hop, ...]) -> LegRoute | tuple[Break, ...]:
    """One leg through all its nets, or where it breaks.

    Parameters: hops: one net each, source first; a part in series lies between each two.
    Returns: the route; or, where a net's copper does not lead from its start to its end, the places.
    """
    rows: list[_Row] = []
    vias: list[ViaUse] = []
    stubs: list[Stub] = []
    breaks: list[Break] = []
    last: tuple[tuple[float, float], int] | None = None
    for hop in hops:
        try:
            graph = net_graph(board, index, hop.net)
        except CrowdedError as error:
            return (Break(-1, math.nan, math.nan, str(error), crowded=True),)
        path = _shortest(graph, hop)
        if isinstance(path, Break):
            breaks.append(path)
            continue
        own, passed = _walk(graph, path)
        first = _place(graph, path.nodes[0])
        if last is not None and not breaks:
            rows.append(_Row(last[0], first[0], (math.nan, math.nan), 0.0, math.nan, last[1], SERIES, 0.0))
        last = _place(graph, path.nodes[-1])
        rows.extend(own)
        vias.extend(passed)
        stubs.extend(_stubs(graph, path))
    if breaks:
        return tuple(breaks)
    return _summed(rows, vias, stubs)


@dataclass(frozen=True, slots=True)
class _Path:
    nodes: list[int]
    edges: list[int]


def _place(graph: NetGraph, node: int) -> tuple[tuple[float, float], int]:
    return (float(graph.at[node, 0]), float(graph.at[node, 1])), int(graph.layer[node])


def _shortest(graph: NetGraph, hop: Hop) -> _Path | Break:
    beside: dict[int, list[tuple[int, int]]] = {}
    for edge, (a, b) in enumerate(graph.ends.tolist()):
        beside.setdefault(a, []).append((b, edge))
        beside.setdefault(b, []).append((a, edge))
    weight = np.where(np.isnan(graph.length), _UNKNOWN_BARREL_MM, graph.length)
    starts = sorted(node for row in hop.start for node in graph.pad_nodes.get(row, ()))
    goals = {node for row in hop.end for node in graph.pad_nodes.get(row, ())}
    if not starts or not goals:
        return _broken(graph, starts or sorted(goals), "no part's pad is known at one end")
    away = dict.fromkeys(starts, 0.0)
    came: dict[int, tuple[int, int]] = {}
    queue = [(0.0, node) for node in starts]
    while queue:
        length, node = heapq.heappop(queue)
        if length > away[node]:
            continue
        if node in goals:
            return _traced(node, came)
        for other, edge in beside.get(node, ()):
            reached = length + float(weight[edge])
            if reached < away.get(other, math.inf):
                away[other] = reached
                came[other] = (node, edge)
                heapq.heappush(queue, (reached, other))
    found = max(away, key=lambda node: (away[node], -node))
    return _broken(graph, [found], "the copper ends" if came else "no copper leaves the pad")


def _broken(graph: NetGraph, nodes: list[int], why: str) -> Break:
    if not nodes:
        return Break(-1, math.nan, math.nan, why)
    (x, y), layer = _place(graph, nodes[0])
    return Break(layer, x, y, why)


def _traced(node: int, came: dict[int, tuple[int, int]]) -> _Path:
    nodes, edges = [node], []
    while node in came:
        node, edge = came[node]
        nodes.append(node)
        edges.append(edge)
    return _Path(nodes[::-1], edges[::-1])


def _walk(graph: NetGraph, path: _Path) -> tuple[list[_Row], list[ViaUse]]:
    rows: list[_Row] = []
    vias: list[ViaUse] = []
    step = 0
    while step < len(path.edges):
        edge, node = path.edges[step], path.nodes[step]
        if graph.kind[edge] == BARREL:
            last = step
            while last + 1 < len(path.edges) and graph.kind[path.edges[last + 1]] == BARREL:
                last += 1
            (at, enter), (_, leave) = _place(graph, node), _place(graph, path.nodes[last + 1])
            height = math.fsum(float(graph.length[e]) for e in path.edges[step : last + 1])
            rows.append(_Row(at, at, (math.nan, math.nan), 0.0, math.nan, leave, BARREL, height))
            vias.append(ViaUse(via=int(graph.via[edge]), x_mm=at[0], y_mm=at[1], enter=enter, leave=leave))
            step = last + 1
            continue
        rows.append(_piece(graph, edge, backwards=int(graph.ends[edge, 0]) != node))
        step += 1
    return rows, vias


def _piece(graph: NetGraph, edge: int, *, backwards: bool) -> _Row:
    curves = graph.curves
    start, end = curves.start[edge], curves.end[edge]
    sweep = float(curves.sweep[edge])
    if backwards:
        start, end, sweep = end, start, -sweep
    return _Row(
        (float(start[0]), float(start[1])),
        (float(end[0]), float(end[1])),
        (float(curves.centre[edge, 0]), float(curves.centre[edge, 1])),
        sweep + 0.0,
        float(graph.width[edge]),
        int(graph.layer[graph.ends[edge, 0]]),
        int(graph.kind[edge]),
        float(graph.length[edge]),
    )


def _stubs(graph: NetGraph, path: _Path) -> Iterator[Stub]:
    """Connected branches of track that hang on the route without belonging to it."""
    taken, on_route = set(path.edges), set(path.nodes)
    rest = [edge for edge in range(len(graph.ends)) if edge not in taken]
    at_node: dict[int, list[int]] = {}
    for edge in rest:
        for node in graph.ends[edge].tolist():
            if node not in on_route:
                at_node.setdefault(node, []).append(edge)
    seen: set[int] = set()
    for first in rest:
        if first in seen:
            continue
        seen.add(first)
        branch, todo = [], [first]
        while todo:
            edge = todo.pop()
            branch.append(edge)
            for node in graph.ends[edge].tolist():
                for other in at_node.get(node, ()):
                    if other not in seen:
                        seen.add(other)
                        todo.append(other)
        roots = sorted({node for edge in branch for node in graph.ends[edge].tolist()} & on_route)
        tracks = sorted(edge for edge in branch if graph.kind[edge] == TRACK)
        if roots and tracks:
            (x, y), _ = _place(graph, roots[0])
            layer = int(graph.layer[graph.ends[tracks[0], 0]])
            yield Stub(length_mm=math.fsum(graph.length[tracks]), layer=layer, x_mm=x, y_mm=y)


def _summed(rows: list[_Row], vias: list[ViaUse], stubs: list[Stub]) -> LegRoute:
    pieces = Pieces(
        start=np.array([row.start for row in rows]).reshape(-1, 2),
        end=np.array([row.end for row in rows]).reshape(-1, 2),
        centre=np.array([row.centre for row in rows]).reshape(-1, 2),
        sweep=np.array([row.sweep for row in rows]),
        width=np.array([row.width for row in rows]),
        layer=np.array([row.layer for row in rows], dtype=np.int64),
        kind=np.array([row.kind for row in rows], dtype=np.int64),
        length=np.array([row.length for row in rows]),
    )
    track = pieces.kind == TRACK
    length, width, layer = pieces.length[track], pieces.width[track], pieces.layer[track]
    ordered = sorted(stubs, key=lambda stub: (-stub.length_mm, stub.layer, stub.x_mm, stub.y_mm))
    return LegRoute(
        pieces=pieces,
        length_mm=math.fsum(pieces.length[~np.isnan(pieces.length)]),
        barrels_known=not bool(np.isnan(pieces.length).any()),
        track_mm=math.fsum(length),
        vias=tuple(vias),
        stubs=tuple(ordered),
        stub_mm=math.fsum(stub.length_mm for stub in stubs),
        width_mm=weighted_median(width, length),
        widths=tuple((float(w), math.fsum(length[width == w])) for w in np.unique(width)),
        layers=tuple((int(k), math.fsum(length[layer == k])) for k in np.unique(layer)),
    )


def weighted_median(values: Floats, weights: Floats) -> float | None:
    """The value that half of the weight lies at or below; `None` where there is no weight.

    Where exactly half the weight lies below a step, the mean of both sides.
    """
    if not len(values) or not weights.sum() > 0:
        return None
    order = np.argsort(values, kind="stable")
    values, reached = values[order], np.cumsum(weights[order])
    half = reached[-1] / 2
    low = int(np.searchsorted(reached, half * (1 - 1e-12)))
    high = int(np.searchsorted(reached, half * (1 + 1e-12)))
    return float(values[low] + values[min(high, len(values) - 1)]) / 2
