"""Standard primitives: the outline each one draws about its own origin, and the pad it makes.

From memory of the standard: a hexagon's and an octagon's `length` is taken corner to corner, an octagon lies on a flat,
a triangle's origin is the middle of its bounding box, a butterfly keeps its upper right and lower left quarter.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
import shapely
from shapely import affinity

from pairrules.board import PadShape
from pairrules.board.arcs import flatten
from pairrules.readers.ipc2581.drawing import Fill, Item, Stroke, disc, fills
from pairrules.readers.ipc2581.elements import local, number, size, truth, word, wrong
from pairrules.readers.ipc2581.transform import Plane

if TYPE_CHECKING:
    from pairrules.readers.ipc2581.element import Element

MOST_RINGS = 50
"""A moiré target has a handful of rings; more is a fault of the file."""


MOST_SPOKES = 16
"""A thermal relief has four spokes, seldom eight; more is a fault of the file."""


@dataclass(frozen=True, slots=True)
class Primitive:
    """What a shape draws, and the pad it makes (`None` where it makes none).

    As a pad a shape of several pieces (butterfly, donut, moiré, thermal) counts by its outer outline.
    """

    items: tuple[Item, ...]
    pad: PadShape | None
    thermal: bool = False

    @property
    def pieces(self) -> int:
        """Pieces of track and areas it comes to."""
        return sum(item.pieces for item in self.items)

    def scaled_pad(self, scale: float) -> PadShape | None:
        """The pad at another scale."""
        pad = self.pad
        if pad is None or scale == 1.0:
            return pad
        points = tuple((x * scale, y * scale) for x, y in pad.points)
        extent = (pad.size[0] * scale, pad.size[1] * scale)
        return PadShape(kind=pad.kind, size=extent, radius=pad.radius * scale, points=points)


def primitive(element: Element, factor: float) -> Primitive | None:
    """The shape of a standard primitive other than `Contour`; `None` where the element is no such primitive."""
    build = _SHAPES.get(local(element))
    return None if build is None else build(element, factor)


def polygon_pad(outline: Plane) -> PadShape:
    """A pad of any outline."""
    x, y = outline.real, outline.imag
    extent = (float(x.max() - x.min()), float(y.max() - y.min()))
    return PadShape(kind="polygon", size=extent, points=tuple(zip(x.tolist(), y.tolist(), strict=True)))


def outer_pad(regions: list[Any]) -> PadShape | None:
    """The pad of several pieces: the outline of the largest, holes closed; `None` where nothing is covered."""
    pieces = fills(shapely.union_all(regions))
    areas = [abs(signed_area(piece.outline)) for piece in pieces]
    if not areas:
        return None
    return polygon_pad(pieces[areas.index(max(areas))].outline)


def signed_area(outline: Plane) -> float:
    """Area [mm²] of a closed outline, positive where it runs counter-clockwise.

    Taken about the first corner, which keeps the digits of a small outline far from the origin.
    Source: shoelace formula (elementary geometry).
    """
    outline = outline - outline[0]
    return float(np.sum((outline.conjugate() * np.roll(outline, -1)).imag)) / 2


def _box(width: float, height: float, centre: complex = 0j) -> Plane:
    w, h = width / 2, height / 2
    return centre + np.array([complex(-w, -h), complex(w, -h), complex(w, h), complex(-w, h)])


def _one(outline: Plane, pad: PadShape | None = None) -> Primitive:
    return Primitive((Fill(outline),), pad or polygon_pad(outline))


def _rounded(width: float, height: float, radii: tuple[float, float, float, float]) -> Plane:
    """A box with a radius each at upper right, upper left, lower left, lower right."""
    w, h = width / 2, height / 2
    corners = (complex(w, h), complex(-w, h), complex(-w, -h), complex(w, -h))
    outline: list[complex] = []
    for quarter, (corner, radius) in enumerate(zip(corners, radii, strict=True)):
        if radius <= 0:
            outline.append(corner)
            continue
        inward = complex(-math.copysign(radius, corner.real), -math.copysign(radius, corner.imag))
        centre = corner + inward
        start = centre + radius * 1j**quarter
        outline.append(start)
        arc = flatten((start.real, start.imag), (centre.real, centre.imag), math.pi / 2)
        outline += [complex(x, y) for x, y in arc]
    return np.array(outline)


def _regular(corners: int, across: float, start: float) -> Plane:
    turns = start + 2 * math.pi * np.arange(corners) / corners
    return np.asarray(across / 2 * np.exp(1j * turns))


def _corner_flags(element: Element) -> tuple[bool, bool, bool, bool]:
    """Which corners are shaped. Those not mentioned are, unless another is mentioned as shaped."""
    names = ("upperRight", "upperLeft", "lowerLeft", "lowerRight")
    default = not any(truth(element, name) for name in names)
    ur, ul, ll, lr = (truth(element, name, default=default) for name in names)
    return ur, ul, ll, lr


def _circle(element: Element, factor: float) -> Primitive:
    diameter = size(element, "diameter", factor)
    return _one(disc(diameter), PadShape(kind="circle", size=(diameter, diameter)))


def _rect_center(element: Element, factor: float) -> Primitive:
    width, height = _extent(element, factor)
    return _one(_box(width, height), PadShape(kind="rect", size=(width, height)))


def _extent(element: Element, factor: float) -> tuple[float, float]:
    return size(element, "width", factor), size(element, "height", factor)


def _rect_corner(element: Element, factor: float) -> Primitive:
    names = ("lowerLeftX", "lowerLeftY", "upperRightX", "upperRightY")
    x0, y0, x1, y1 = (number(element, name) * factor for name in names)
    width, height, centre = abs(x1 - x0), abs(y1 - y0), complex(x0 + x1, y0 + y1) / 2
    centred = abs(centre) < 1e-9
    return _one(_box(width, height, centre), PadShape(kind="rect", size=(width, height)) if centred else None)


def _rect_round(element: Element, factor: float) -> Primitive:
    width, height = _extent(element, factor)
    radius = min(size(element, "radius", factor), width / 2, height / 2)
    flags = _corner_flags(element)
    ur, ul, ll, lr = (radius if flag else 0.0 for flag in flags)
    whole = PadShape(kind="round_rect", size=(width, height), radius=radius) if all(flags) else None
    return _one(_rounded(width, height, (ur, ul, ll, lr)), whole)


def _rect_cham(element: Element, factor: float) -> Primitive:
    width, height = _extent(element, factor)
    cut = min(size(element, "chamfer", factor), width / 2, height / 2)
    w, h = width / 2, height / 2
    outline: list[complex] = []
    corners = (complex(w, h), complex(-w, h), complex(-w, -h), complex(w, -h))
    for quarter, (corner, shaped) in enumerate(zip(corners, _corner_flags(element), strict=True)):
        along = (
            1j**quarter
        )  # at the upper right the outline comes up the right edge and leaves along the top, leftwards
        outline += [corner - 1j * along * cut, corner - along * cut] if shaped else [corner]
    return _one(np.array(outline))


def _oval(element: Element, factor: float) -> Primitive:
    width, height = _extent(element, factor)
    radius = min(width, height) / 2
    return _one(_rounded(width, height, (radius,) * 4), PadShape(kind="oval", size=(width, height)))


def _ellipse(element: Element, factor: float) -> Primitive:
    width, height = _extent(element, factor)
    unit = disc(max(width, height))
    scale = max(width, height) or 1.0
    return _one(unit.real * width / scale + 1j * unit.imag * height / scale)


def _diamond(element: Element, factor: float) -> Primitive:
    width, height = _extent(element, factor)
    return _one(np.array([width / 2 + 0j, 1j * height / 2, -width / 2 + 0j, -1j * height / 2]))


def _triangle(element: Element, factor: float) -> Primitive:
    base, height = size(element, "base", factor), size(element, "height", factor)
    return _one(np.array([complex(-base / 2, -height / 2), complex(base / 2, -height / 2), complex(0, height / 2)]))


def _hexagon(element: Element, factor: float) -> Primitive:
    return _one(_regular(6, size(element, "length", factor), 0.0))


def _octagon(element: Element, factor: float) -> Primitive:
    return _one(_regular(8, size(element, "length", factor), math.pi / 8))


def _butterfly(element: Element, factor: float) -> Primitive:
    if word(element, "shape").upper() == "SQUARE":
        side = size(element, "side", factor)
        quarters = [_box(side / 2, side / 2, complex(side, side) / 4 * sign) for sign in (1, -1)]
        return Primitive(tuple(Fill(quarter) for quarter in quarters), PadShape(kind="rect", size=(side, side)))
    diameter = size(element, "diameter", factor)
    radius = diameter / 2
    arc = flatten((radius, 0.0), (0.0, 0.0), math.pi / 2)
    quarter = np.concatenate([[0j, complex(radius, 0)], arc[:, 0] + 1j * arc[:, 1]])
    return Primitive((Fill(quarter), Fill(-quarter)), PadShape(kind="circle", size=(diameter, diameter)))


def _outline_of(shape: str, across: float) -> Plane:
    if shape == "SQUARE":
        return _box(across, across)
    if shape == "HEXAGON":
        return _regular(6, across, 0.0)
    if shape == "OCTAGON":
        return _regular(8, across, math.pi / 8)
    return disc(across)


def _ring_sizes(element: Element, factor: float) -> tuple[str, float, float, PadShape]:
    shape = word(element, "shape").upper()
    outer, inner = size(element, "outerDiameter", factor), size(element, "innerDiameter", factor)
    if inner > outer:
        wrong(element, f"{local(element)} has an innerDiameter greater than its outerDiameter")
    kind = {"ROUND": "circle", "SQUARE": "rect"}.get(shape)
    pad = PadShape(kind=kind, size=(outer, outer)) if kind else polygon_pad(_outline_of(shape, outer))
    return shape, outer, inner, pad


def _donut(element: Element, factor: float) -> Primitive:
    shape, outer, inner, pad = _ring_sizes(element, factor)
    holes = (_outline_of(shape, inner),) if inner > 0 else ()
    return Primitive((Fill(_outline_of(shape, outer), holes),), pad)


def _thermal(element: Element, factor: float) -> Primitive:
    """A ring cut through by spokes of width `gap`, the first at `spokeStartAngle`, the others evenly round."""
    shape, outer, inner, pad = _ring_sizes(element, factor)
    holes = (_outline_of(shape, inner),) if inner > 0 else ()
    region: Any = Fill(_outline_of(shape, outer), holes).region()
    count, gap = int(number(element, "spokeCount", 4)), size(element, "gap", factor, 0.0)
    if not 0 <= count <= MOST_SPOKES:
        wrong(element, f"Thermal has {count} spokes")
    for spoke in range(count if gap > 0 else 0):
        strip = shapely.box(0.0, -gap / 2, outer, gap / 2)
        angle = number(element, "spokeStartAngle", 0.0) + 360.0 * spoke / count
        region = region.difference(affinity.rotate(strip, angle, origin=(0, 0)))
    return Primitive(fills(region), pad, thermal=True)


def _moire(element: Element, factor: float) -> Primitive:
    """Rings from the outer diameter inwards, and a cross of two lines."""
    diameter = size(element, "diameter", factor)
    width, gap = size(element, "ringWidth", factor), size(element, "ringGap", factor)
    count = int(number(element, "ringNumber"))
    if not 0 <= count <= MOST_RINGS:
        wrong(element, f"Moire has {count} rings")
    regions: list[Any] = []
    outer = diameter
    for _ in range(count):
        if outer <= 0 or width == 0:
            break
        inner = outer - 2 * width
        regions.append(Fill(disc(outer), (disc(inner),) if inner > 0 else ()).region())
        outer = inner - 2 * gap
    line, reach = size(element, "lineWidth", factor, 0.0), size(element, "lineLength", factor, 0.0)
    if line > 0 and reach > 0:
        along = cmath.exp(1j * math.radians(number(element, "lineAngle", 0.0)))
        regions += [Fill(_box(reach, line) * across).region() for across in (along, 1j * along)]
    return Primitive(fills(shapely.union_all(regions)), PadShape(kind="circle", size=(diameter, diameter)))


def hollow(shape: Primitive, width: float) -> Primitive:
    """A shape whose inside is no copper: only its outline, drawn with the width given."""
    strokes: list[Item] = []
    for item in shape.items:
        if isinstance(item, Fill) and width > 0:
            for edge in (item.outline, *item.holes):
                corners = (*edge.tolist(), complex(edge[0]))
                strokes.append(Stroke(corners, (None,) * len(edge), (0.0,) * len(edge), width))
        elif isinstance(item, Stroke):
            strokes.append(item)
    return Primitive(tuple(strokes), None)


_SHAPES: dict[str, Callable[[Element, float], Primitive]] = {
    "Butterfly": _butterfly,
    "Circle": _circle,
    "Diamond": _diamond,
    "Donut": _donut,
    "Ellipse": _ellipse,
    "Hexagon": _hexagon,
    "Moire": _moire,
    "Octagon": _octagon,
    "Oval": _oval,
    "RectCenter": _rect_center,
    "RectCham": _rect_cham,
    "RectCorner": _rect_corner,
    "RectRound": _rect_round,
    "Thermal": _thermal,
    "Triangle": _triangle,
}
