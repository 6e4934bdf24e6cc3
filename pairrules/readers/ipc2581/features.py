"""Features: from the elements that draw (lines, outlines, contours, primitives, user shapes) to strokes and fills."""

from __future__ import annotations

from collections.abc import Container, Iterable
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

from pairrules.board import PadShape
from pairrules.board.arcs import chords_of
from pairrules.board.knots import meetings
from pairrules.readers.ipc2581.corners import corners
from pairrules.readers.ipc2581.drawing import Fill, Item, Stroke, placed, ring, surplus, sweep
from pairrules.readers.ipc2581.elements import child, children, line, local, named, point, size, truth, word, wrong
from pairrules.readers.ipc2581.primitives import Primitive, hollow, outer_pad, polygon_pad, primitive
from pairrules.readers.ipc2581.remarks import Remarks
from pairrules.readers.ipc2581.transform import IDENTITY, Plane, Transform, xform

if TYPE_CHECKING:
    from pairrules.readers.ipc2581.element import Element

MOST_PIECES = 5_000_000
"""Pieces of copper a board may have, far above any (common practice, no source)."""

_FEW_PIECES = 50_000
_BYTES_A_PIECE = 8
_PIECES_A_MEETING = 5

MOST_ITEMS = 20_000
"""Items one user shape may draw; a shape that names others over and over would fill the memory."""

THINNEST_MM = 0.0001
"""A line below a tenth of a micrometre is none: exporters write nothing, or next to it, where they know no width."""

ROUGH_ARC_MM = 0.01
"""An arc whose two ends differ by more in their distance from its centre is mended, and remarked upon."""

MOST_OFF = 0.1
"""Share of the radius by which they may differ; beyond it nobody can say which of the three points is wrong."""

STYLES = {"LineDesc", "LineDescRef", "FillDesc", "FillDescRef", "Color", "ColorRef", "ColorTerm", "Xform"}
PRIMITIVES = {"StandardPrimitiveRef", "UserPrimitiveRef"}


def most_pieces(size: int) -> int:
    """Pieces of copper and pins that a file of `size` bytes may come to.

    Each takes dozens of bytes where it is written out; shapes that are named and repeated take fewer, but not next to
    nothing: a small file that repeats a shape without end would fill the memory.
    """
    return min(MOST_PIECES, max(_FEW_PIECES, size // _BYTES_A_PIECE))


@dataclass(frozen=True, slots=True)
class Line:
    """How a line is drawn. width: [mm]. erase: the line removes copper."""

    width: float
    erase: bool = False


@dataclass(slots=True)
class Shapes:
    """What the file's dictionaries name, and the reading of features with their help. most: pieces it may draw."""

    remarks: Remarks
    most: int = MOST_PIECES
    spent: int = 0
    lines: dict[str, Line] = field(default_factory=dict)
    fillings: dict[str, str] = field(default_factory=dict)
    standard: dict[str, Primitive] = field(default_factory=dict)
    user: dict[str, Primitive] = field(default_factory=dict)
    user_pads: dict[str, Primitive] = field(default_factory=dict)
    absent: set[tuple[str, str]] = field(default_factory=set)
    outlines: dict[Element, Plane] = field(default_factory=dict)
    """Corners of outlines whose own elements are dropped already, of the record that is being read."""

    def spend(self, element: Element, pieces: int) -> None:
        """Count pieces that are about to be drawn or copied. Raises: BoardError where they become too many."""
        self.spent += pieces
        if self.spent > self.most:
            wrong(element, f"the board draws more than {self.most} pieces")

    # -- dictionaries -------------------------------------------------------------------------------------------------

    def know(self, other: Shapes) -> None:
        """Take over what another reading of the same file found in its dictionaries."""
        self.lines, self.fillings = dict(other.lines), dict(other.fillings)
        self.standard, self.user = dict(other.standard), dict(other.user)

    def asked_too_early(self) -> bool:
        """Whether a name was asked for before it stood in a dictionary."""
        held: dict[str, Container[str]] = {
            "LineDescRef": self.lines,
            "StandardPrimitiveRef": self.standard,
            "UserPrimitiveRef": self.user,
        }
        return any(name in held[tag] for tag, name in self.absent)

    def entry(self, element: Element, factor: float) -> None:
        """Take in one `Entry…` of a dictionary. factor: millimetres in the dictionary's unit."""
        name, kind = word(element, "id"), local(element)
        for tag, inner in children(element):
            if kind == "EntryLineDesc" and tag == "LineDesc":
                self.lines[name] = self._line(inner, factor)
            elif kind == "EntryFillDesc" and tag == "FillDesc":
                self.fillings[name] = word(inner, "fillProperty", "FILL").upper()
            elif kind in {"EntryStandard", "EntryUser"}:
                shape = self.shape(inner, factor)
                if shape is None:
                    self.remarks.unknown(tag, "dictionaries")
                elif len(shape.items) > MOST_ITEMS:
                    wrong(element, f'shape "{name}" draws more than {MOST_ITEMS} pieces')
                else:
                    (self.standard if kind == "EntryStandard" else self.user)[name] = shape

    # -- styles -------------------------------------------------------------------------------------------------------

    @staticmethod
    def _line(element: Element, factor: float) -> Line:
        return Line(size(element, "lineWidth", factor), word(element, "lineProperty").upper() == "ERASE")

    def line(self, element: Element, factor: float, default: Line | None = None) -> Line | None:
        """The line style among an element's children; `default` where it has none."""
        for tag, inner in named(element, "LineDescRef", "LineDesc"):
            if tag == "LineDescRef":
                found = self.lines.get(word(inner, "id"))
                if found is None:
                    self.absent.add((tag, word(inner, "id")))
                    self.remarks.count("{n} line style{s} named by features {are} not in the file's dictionary")
                return found
            return self._line(inner, factor)
        return default

    def filling(self, element: Element) -> str:
        """The fill property among an element's children, or its polygon's; "FILL" where neither says."""
        for tag, inner in named(element, "FillDescRef", "FillDesc"):
            if tag == "FillDescRef":
                return self.fillings.get(word(inner, "id"), "FILL")
            return word(inner, "fillProperty", "FILL").upper()
        polygon = child(element, "Polygon")
        return "FILL" if polygon is None else self.filling(polygon)

    def placement(self, element: Element | None, factor: float) -> Transform:
        """The placement of an `Xform`, remarked upon where the standard leaves room for another reading."""
        by = xform(element, factor)
        if by.shift and (by.flip or by.turn != 1):
            self.remarks.count("{n} placement{s} {are} read as turned first and then moved by the offset")
        return by

    # -- shapes -------------------------------------------------------------------------------------------------------

    def shape(self, element: Element, factor: float, default: Line | None = None) -> Primitive | None:
        """What an element draws about its own origin, its own `Xform` obeyed; `None` where it draws nothing known."""
        found = self._bare_shape(element, factor, default)
        if found is None:
            return None
        turned = child(element, "Xform")
        if turned is None or local(element) == "Text":
            return found
        by = self.placement(turned, factor)
        if by == IDENTITY:
            return found
        self.spend(element, found.pieces)
        moved = placed(found.items, by)
        return Primitive(moved, None if found.pad is None else self.outer_pad(element, moved))

    def as_pad(self, element: Element, factor: float) -> Primitive | None:
        """The same as `shape`, with the outer outline as the pad where lines or several pieces draw it."""
        if local(element) == "StandardPrimitiveRef" and not len(element):
            named = self.standard.get(word(element, "id"))
            if named is not None and named.pad is not None:
                return named  # what most pads are: one shape of the dictionary as it is
        found = self.shape(element, factor)
        if found is None or found.pad is not None or all(item.erase for item in found.items):
            return found
        if local(element) != "UserPrimitiveRef":
            return replace(found, pad=self.outer_pad(element, found.items))
        name = word(element, "id")  # drawn once for all pads that name it
        if name not in self.user_pads:
            self.user_pads[name] = replace(found, pad=self.outer_pad(element, found.items))
        return self.user_pads[name]

    def outer_pad(self, element: Element, items: Iterable[Item]) -> PadShape | None:
        """The pad of several pieces, which are united; those that meet count, since each crossing takes its time."""
        regions = [item.region() for item in items if not item.erase]
        if len(regions) > 1:
            self.spend(element, (meetings(regions, self.most) - len(regions)) // 2 * _PIECES_A_MEETING)
        return outer_pad(regions)

    def _bare_shape(self, element: Element, factor: float, default: Line | None) -> Primitive | None:
        tag = local(element)
        if tag in PRIMITIVES:
            found = (self.standard if tag == "StandardPrimitiveRef" else self.user).get(word(element, "id"))
            if found is None:
                self.absent.add((tag, word(element, "id")))
                self.remarks.count(
                    "{n} shape{s} named by features {are} not in the file's dictionaries and {are} left out"
                )
                return Primitive((), None)
            return found
        if tag in {"Line", "Arc", "Polyline", "Outline"}:
            return Primitive(self._strokes(element, tag, factor, default), None)
        if tag in {"Contour", "Polygon"}:
            return self._filled(element, self._contour(element, tag, factor), factor, default)
        if tag == "UserSpecial":
            return self._special(element, factor, default)
        if tag in {"Hexagon", "Octagon"}:
            self.remarks.count("{n} hexagon{s} or octagon{s} {are} read with the length from corner to corner")
        found = primitive(element, factor)
        if found is None:
            return None
        self.spend(element, found.pieces - len(found.items))
        return self._filled(element, found, factor, default)

    def _special(self, element: Element, factor: float, default: Line | None) -> Primitive:
        items: list[Item] = []
        for tag, inner in children(element):
            if tag in STYLES:
                continue
            drawn = self.shape(inner, factor, default)
            if drawn is None:
                self.remarks.unknown(tag, "user shapes")
            else:
                self.spend(element, drawn.pieces)
                items += drawn.items
                if len(items) > MOST_ITEMS:
                    wrong(element, f"a user shape draws more than {MOST_ITEMS} pieces")
        return Primitive(tuple(items), None)

    def _filled(self, element: Element, shape: Primitive, factor: float, default: Line | None) -> Primitive:
        filling = self.filling(element)
        if filling == "HOLLOW":
            style = self.line(element, factor, default)
            if style is None or style.width == 0:
                self.remarks.count("{n} hollow shape{s} without line width {are} no copper and {are} left out")
            return hollow(shape, 0.0 if style is None else style.width)
        if filling == "VOID":
            return Primitive(tuple(replace(item, erase=True) for item in shape.items), None)
        if filling in {"HATCH", "MESH"}:
            self.remarks.count(
                "{n} hatched shape{s} {are} read as solid copper, beside which no impedance is known",
                line=line(element),
            )
            items = tuple(replace(item, hatched=True) if isinstance(item, Fill) else item for item in shape.items)
            return replace(shape, items=items)
        return shape

    def _contour(self, element: Element, tag: str, factor: float) -> Primitive:
        outline = element if tag == "Polygon" else child(element, "Polygon")
        if outline is None:
            wrong(element, "Contour has no Polygon")
        corners = self.outline(outline, factor)
        cutouts = [self.outline(inner, factor) for _, inner in named(element, "Cutout")]
        if len(corners) < 3:
            self.remarks.count("{n} outline{s} of fewer than three corners {are} left out", line=line(element))
            return Primitive((), None)
        fill = Fill(corners, tuple(cutout for cutout in cutouts if len(cutout) > 2))
        return Primitive((fill,), polygon_pad(corners))

    def outline(self, element: Element, factor: float) -> Plane:
        """The closed outline of a `Polygon` or `Cutout`."""
        held = self.outlines.get(element)
        if held is not None:
            return held
        found = corners(element, factor)
        return ring(*(self._steps(element, factor) if found is None else self._rounded(*found, factor)))

    def keep_outline(self, element: Element, factor: float) -> None:
        """Take in the corners of an outline that nothing is wrong with, and drop its elements; leave any other be."""
        found = corners(element, factor)
        if found is not None:
            points, curves = found
            self.outlines[element] = ring(*self._rounded(points, curves, factor)) if curves else ring(points, (), ())
            element.steps = ()

    def _rounded(
        self, points: Plane, curves: list[tuple[int, Element]], factor: float
    ) -> tuple[Plane, list[complex | None], list[float]]:
        """Corners with the centres and angles of the steps between them."""
        centres: list[complex | None] = [None] * (len(points) - 1)
        sweeps = [0.0] * (len(points) - 1)
        for place, inner in curves:
            start, end = complex(points[place - 1]), complex(points[place])
            centres[place - 1], sweeps[place - 1] = self._round(inner, start, end, factor)
        return points, centres, sweeps

    # -- lines --------------------------------------------------------------------------------------------------------

    def _strokes(self, element: Element, tag: str, factor: float, default: Line | None) -> tuple[Item, ...]:
        style = self.line(element, factor, default)
        if style is None or style.width < THINNEST_MM:
            self.remarks.count("{n} line{s} on copper without a width {are} left out", line=line(element))
            return ()
        if tag == "Outline":
            polygon = child(element, "Polygon")
            if polygon is None:
                wrong(element, "Outline has no Polygon")
            points, centres, sweeps = self._steps(polygon, factor)
            if points[0] != points[-1]:
                points, centres, sweeps = [*points, points[0]], [*centres, None], [*sweeps, 0.0]
        elif tag == "Polyline":
            found = corners(element, factor, styled=True)
            if found is None:
                points, centres, sweeps = self._steps(element, factor)
            else:
                places, centres, sweeps = self._rounded(*found, factor)
                points = places.tolist()
        else:
            start = point(element, "startX", "startY", factor)
            end = point(element, "endX", "endY", factor)
            centre, angle = self._round(element, start, end, factor) if tag == "Arc" else (None, 0.0)
            points, centres, sweeps = [start, end], [centre], [angle]
        if len(points) < 2:
            return ()
        return (Stroke(tuple(points), tuple(centres), tuple(sweeps), style.width, style.erase),)

    def _steps(self, element: Element, factor: float) -> tuple[list[complex], list[complex | None], list[float]]:
        """The corners of a polyline or polygon: first `PolyBegin`, then straight and round steps."""
        points: list[complex] = []
        centres: list[complex | None] = []
        sweeps: list[float] = []
        for tag, inner in children(element):
            if tag in {"PolyStepSegment", "PolyStepCurve", "PolyBegin"}:
                at = point(inner, "x", "y", factor)
                if (tag == "PolyBegin") == bool(points):
                    wrong(inner, f"{local(element)} has a {tag} out of its order")
                if points:
                    curved = tag == "PolyStepCurve"
                    centre, angle = self._round(inner, points[-1], at, factor) if curved else (None, 0.0)
                    centres.append(centre)
                    sweeps.append(angle)
                points.append(at)
            elif tag not in STYLES:
                self.remarks.unknown(tag, f"{local(element)} elements")
        if not points:
            wrong(element, f"{local(element)} has no PolyBegin")
        return points, centres, sweeps

    def _round(self, element: Element, start: complex, end: complex, factor: float) -> tuple[complex | None, float]:
        """Centre and signed angle of an arc; straight where its radius is nothing.

        The sense is clockwise where `clockwise` is absent. Source: IPC-2581A schema, `PolyStepCurveType`.
        """
        centre = point(element, "centerX", "centerY", factor)
        radius, other = abs(start - centre), abs(end - centre)
        if abs(radius - other) > ROUGH_ARC_MM:
            if abs(radius - other) > MOST_OFF * max(radius, other):
                apart = f"{radius:.4g} mm from its start and {other:.4g} mm from its end"
                wrong(element, f"{local(element)} has its centre {apart}")
            self.remarks.count(
                "{n} arc{s} with ends at unequal distances from the centre {are} drawn about the nearest one that fits",
                line=line(element),
            )
            centre = _fitting(start, end, centre)
        if radius == 0.0 or other == 0.0:
            return None, 0.0
        angle = sweep(start, end, centre, clockwise=truth(element, "clockwise", default=True))
        self.spend(element, surplus(chords_of(abs(start - centre), angle)))
        return centre, angle


def _fitting(start: complex, end: complex, centre: complex) -> complex:
    """The point nearest to an arc's centre that is as far from its start as from its end."""
    chord = end - start
    away = centre - (start + end) / 2
    along = (away * chord.conjugate()).real / abs(chord) ** 2
    return centre - along * chord
