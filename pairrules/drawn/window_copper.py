"""What of a board's copper lies in a window around one pair: copper by net, openings in the reference, vias."""

from __future__ import annotations

import math

import numpy as np
import shapely

from pairrules.board.board import Board
from pairrules.board.columns import Floats
from pairrules.drawing import DrawnCopper, DrawnOpening, DrawnVia
from pairrules.drawn.plain_shapes import plain_shapes, point
from pairrules.geometry.board_copper import BoardCopper
from pairrules.geometry.copper_outlines import Outlines, copper_outlines

Window = tuple[float, float, float, float]

_ROLES = ("plus", "minus", "reference", "neighbour")


class DrawnBoard:
    """A board's copper layer by layer, searchable; each layer is made when it is first asked for."""

    def __init__(self, copper: BoardCopper) -> None:
        self.copper = copper
        self.board: Board = copper.board
        self._layers: dict[int, tuple[Outlines, shapely.STRtree]] = {}

    def within(self, layer: int, box: shapely.Polygon) -> dict[int, shapely.Geometry]:
        """The copper of each net of a layer that meets the box, clipped."""
        if layer not in self._layers:
            outlines = copper_outlines(self.board, layer)
            self._layers[layer] = (outlines, shapely.STRtree(outlines.polygons))
        outlines, tree = self._layers[layer]
        rows = np.sort(tree.query(box, predicate="intersects"))
        nets = outlines.net[rows]
        found: dict[int, shapely.Geometry] = {}
        for net in np.unique(nets).tolist():
            clipped = shapely.intersection(outlines.polygons[rows[nets == net]], box)
            found[net] = shapely.union_all(clipped)
        return found


class Roles:
    """What each net is to one pair. `plus`, `minus`: nets of the legs."""

    def __init__(self, plus: frozenset[int], minus: frozenset[int], reference: tuple[int, ...]) -> None:
        self.plus, self.minus, self.reference = plus, minus, frozenset(reference)

    def of(self, net: int) -> str:
        """The net's role: "plus", "minus", "reference" or "neighbour"."""
        for nets, role in ((self.plus, "plus"), (self.minus, "minus"), (self.reference, "reference")):
            if net in nets:
                return role
        return "neighbour"


def drawn_copper(drawn: DrawnBoard, roles: Roles, layers: tuple[int, ...], window: Window) -> tuple[DrawnCopper, ...]:
    """Copper of all nets on `layers`, reference copper on those next to them."""
    box = shapely.box(*window)
    found = []
    for layer in sorted({*layers, *beside(drawn.board, layers)}):
        for net, shape in drawn.within(layer, box).items():
            role = roles.of(net)
            if layer not in layers and role != "reference":
                continue
            shapes = plain_shapes(shape)
            if shapes:
                name = drawn.board.nets[net] if net >= 0 else ""
                found.append(DrawnCopper(layer=layer, net=name, role=role, shapes=shapes))
    return tuple(sorted(found, key=lambda one: (one.layer, _ROLES.index(one.role), one.net)))


def drawn_openings(
    drawn: DrawnBoard, layers: tuple[int, ...], window: Window
) -> tuple[tuple[DrawnOpening, ...], tuple[int, ...]]:
    """Where the layers next to `layers` have no reference copper, and which of them are not in the file.

    Without any reference net nothing is an opening: it is then not known what copper counts.
    """
    reference, box = drawn.copper.reference, shapely.box(*window)
    openings, unknown = [], []
    if not reference.reference:
        return (), ()
    for layer in beside(drawn.board, layers):
        if not reference.known(layer):
            unknown.append(layer)
            continue
        parts = [part for _, own, _ in reference.layer(layer).by_net for part in own]
        held = shapely.union_all([shapely.intersection(part, box) for part in parts])
        shapes = plain_shapes(shapely.difference(box, held))
        if shapes:
            of = tuple(one for one in layers if abs(one - layer) == 1)
            openings.append(DrawnOpening(layer=layer, of=of, shapes=shapes))
    return tuple(openings), tuple(unknown)


def drawn_vias(board: Board, roles: Roles, used: frozenset[int], window: Window) -> tuple[DrawnVia, ...]:
    """Vias and pins' plated holes whose centre lies in the window. `used`: rows of `Board.vias` the legs pass."""
    x0, y0, x1, y1 = window
    found = []

    def inside(at: Floats) -> list[int]:
        kept = (at[:, 0] >= x0) & (at[:, 0] <= x1) & (at[:, 1] >= y0) & (at[:, 1] <= y1)
        rows: list[int] = np.flatnonzero(kept).tolist()
        return rows

    def name(net: int) -> str:
        return board.nets[net] if net >= 0 else ""

    vias, pads = board.vias, board.pads
    for row in inside(vias.at):
        net = int(vias.net[row])
        found.append(
            DrawnVia(
                at=point(vias.at[row]),
                first=int(vias.first[row]),
                last=int(vias.last[row]),
                pad_mm=known(vias.pad[row]),
                drill_mm=known(vias.drill[row]),
                net=name(net),
                role=roles.of(net),
                used=row in used,
            )
        )
    for row in inside(pads.at):
        if pads.layer[row] >= 0 or math.isnan(pads.drill[row]):
            continue
        net = int(pads.net[row])
        found.append(
            DrawnVia(
                at=point(pads.at[row]),
                first=0,
                last=len(board.copper) - 1,
                pad_mm=None,
                drill_mm=known(pads.drill[row]),
                net=name(net),
                role=roles.of(net),
                used=False,
            )
        )
    return tuple(sorted(found, key=lambda via: (via.at, via.first, via.last, via.net, via.drill_mm or 0.0)))


def beside(board: Board, layers: tuple[int, ...]) -> tuple[int, ...]:
    """The copper layers next to the given ones, top first."""
    near = {layer + step for layer in layers for step in (-1, 1)}
    return tuple(sorted(layer for layer in near if 0 <= layer < len(board.copper)))


def known(value: float) -> float | None:
    """A number, `None` for NaN."""
    return None if math.isnan(value) else float(value)
