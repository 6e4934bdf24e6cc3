"""`LayerFeature/Set` and `PadStack`: from the elements of a layer to rows of copper."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

from pairrules.readers.ipc2581.copper import Copper, HoleRow, PadRow, StackDefinition
from pairrules.readers.ipc2581.drawing import Item, erasing, placed
from pairrules.readers.ipc2581.elements import NO_NET, child, children, line, size, word, wrong
from pairrules.readers.ipc2581.features import STYLES, Line, Shapes
from pairrules.readers.ipc2581.layers import DRILLED, FileLayer, LayerTable
from pairrules.readers.ipc2581.places import crowd_at
from pairrules.readers.ipc2581.remarks import Remarks
from pairrules.readers.ipc2581.transform import IDENTITY, Transform, location

if TYPE_CHECKING:
    from pairrules.readers.ipc2581.element import Element

FIDUCIALS = {"BadBoardMark", "GlobalFiducial", "GoodPanelMark", "LocalFiducial", "Fiducial"}
_SILENT = {*STYLES, "SpecRef", "LineDescGroup", "ColorGroup"}


def net_name(element: Element, name: str = "net", default: str = "") -> str:
    """A net's name; "" where the element names none or a word that stands for none."""
    net = word(element, name, default)
    return "" if net.casefold() in NO_NET else net


@dataclass(slots=True)
class SetReader:
    """Reads the sets of one step. factor: millimetres in the header's unit."""

    copper: Copper
    shapes: Shapes
    table: LayerTable
    remarks: Remarks
    factor: float
    ways: dict[tuple[complex, bool], Transform] = field(default_factory=dict)

    def read(self, element: Element, layer_name: str, net: str) -> None:
        """A `Set` on a layer. net: its own, or that of the `Route` around it (revision A); "" where none."""
        layer = self.table.layers.get(layer_name)
        if layer is None:
            self.copper.undeclared.add(layer_name)
            self.remarks.count(
                f"{{n}} set{{s}} on layer {layer_name}, which the file does not declare, {{are}} left out"
            )
            return
        if not layer.copper and layer.function not in DRILLED:
            return
        erase = word(element, "polarity").upper() == "NEGATIVE"
        for tag, inner in children(element):
            if layer.copper and (tag == "Pad" or tag in FIDUCIALS):
                self._pad(inner, element, layer_name, net, erase=erase)
            elif tag == "Hole":
                self._hole(inner, element, layer, net)
            elif tag in {"Slot", "SlotCavity"}:
                self._slot(inner, element, layer, net)
            elif not layer.copper:
                continue
            elif tag == "Features":
                self._features(inner, layer_name, net, self.shapes.line(element, self.factor), erase=erase)
            elif tag not in _SILENT and not tag.endswith("Attribute"):
                self.remarks.unknown(tag, "layer features")

    def _stand(self, net: str, element: Element) -> None:
        """Note where a net's copper first stands."""
        if net and net not in self.copper.net_lines:
            self.copper.net_lines[net] = line(element)

    # -- features -----------------------------------------------------------------------------------------------------

    def _features(self, element: Element, layer: str, net: str, style: Line | None, *, erase: bool) -> None:
        turned = self.shapes.placement(child(element, "Xform"), self.factor)
        places: list[complex] = []
        drawn = []
        for tag, inner in children(element):
            if tag == "Location":
                places.append(location(inner, self.factor))
            elif tag not in STYLES:
                shape = self.shapes.shape(inner, self.factor, style)
                if shape is None:
                    self.remarks.unknown(tag, "layer features")
                else:
                    drawn.append(shape)
        if drawn:
            self._stand(net, element)
        # Counted before any is drawn: a shape and its places may be few lines, and what they draw may be no end.
        self.shapes.spend(element, sum(shape.pieces for shape in drawn) * max(1, len(places)))
        for place in places or [0j]:
            by = turned.then(Transform(shift=place))
            for shape in drawn:
                items = placed(shape.items, by)
                dropped = self.copper.draw(erasing(items) if erase else items, layer, net)
                if dropped:
                    self.remarks.count("{n} line piece{s} without length {are} left out", dropped, line=line(element))

    # -- pads ---------------------------------------------------------------------------------------------------------

    def _pad(self, element: Element, holder: Element, layer: str, net: str, *, erase: bool) -> None:
        stack = word(element, "padstackDefRef")
        usage = word(holder, "padUsage").upper()
        self.pad(element, layer, net, stack, erase=erase, usage=usage, ref=word(holder, "componentRef"))

    def pad(
        self, element: Element, layer: str, net: str, stack: str, *, erase: bool = False, usage: str = "", ref: str = ""
    ) -> None:
        """A `Pad`, fiducial or `LayerPad`: placement, shape and the pins it belongs to."""
        at, way, shape, pins = 0j, IDENTITY, None, []
        for tag, inner in children(element):
            if tag == "Xform":
                by = self.shapes.placement(inner, self.factor).then(Transform(way.turn, way.flip, at))
                at, way = by.shift, self._way(by)
            elif tag == "Location":
                at += location(inner, self.factor)
            elif tag == "PinRef":
                pins.append((word(inner, "componentRef", ref), word(inner, "pin")))
            elif tag not in _SILENT and not tag.endswith("Attribute"):
                shape = self.shapes.as_pad(inner, self.factor)
                if shape is None:
                    self.remarks.unknown(tag, "pads")
        if shape is None and stack in self.copper.stacks:
            shape = self.copper.stacks[stack].shapes.get(layer)
        self._stand(net, element)
        if erase:
            self.shapes.spend(element, shape.pieces if shape else 0)
            by = Transform(way.turn, way.flip, at)
            self.copper.draw(erasing(placed(shape.items if shape else (), by)), layer, net)
            return
        order = self.copper.next()
        via, plane = usage == "VIA", usage == "PLANE"
        for owner, pin in pins or [(ref, "")]:
            if self.copper.crowds.crowded(at):
                wrong(element, crowd_at(at))
            self.copper.pads.append(PadRow(at, way, layer, net, owner, pin, shape, stack, via, order, plane))

    def _way(self, by: Transform) -> Transform:
        """A placement without its shift, one for all pads that are turned alike."""
        return self.ways.setdefault((by.turn, by.flip), Transform(by.turn, by.flip))

    # -- holes --------------------------------------------------------------------------------------------------------

    def _hole(self, element: Element, holder: Element, layer: FileLayer, net: str) -> None:
        at = location(element, self.factor)
        self.hole(element, at, size(element, "diameter", self.factor), net, layer.span, word(holder, "geometry"))

    def hole(
        self, element: Element, at: complex, diameter: float, net: str, span: tuple[str, str], stack: str = ""
    ) -> None:
        """A hole; its own `Span`, where it has one, wins over its layer's."""
        own = child(element, "Span")
        if own is not None:
            span = (word(own, "fromLayer"), word(own, "toLayer"))
        self._stand(net, element)
        plating = word(element, "platingStatus").upper()
        self.copper.holes.append(HoleRow(at, diameter, plating, net, span, stack, self.copper.next()))

    def _slot(self, element: Element, holder: Element, layer: FileLayer, net: str) -> None:
        """A slot counts as a hole of its width at its middle: enough to join layers, and no more is asked of it."""
        by, places = Transform(), list[complex]()
        items: list[Item] = []
        for tag, inner in children(element):
            if tag == "Xform":
                by = self.shapes.placement(inner, self.factor)
            elif tag == "Location":
                places.append(location(inner, self.factor))
            elif tag in _SILENT | {"Span", "MaterialCut", "MaterialLeft", "Z_AxisDim"}:
                continue
            else:
                shape = self.shapes.shape(inner, self.factor)
                if shape is None:
                    self.remarks.unknown(tag, "slots")
                else:
                    self.shapes.spend(element, shape.pieces)
                    items += placed(shape.items, Transform())
        outline = self.shapes.outer_pad(element, (replace(item, erase=False) for item in items))
        if outline is None:
            self.remarks.count("{n} slot{s} without an outline {are} left out")
            return
        x, y = zip(*outline.points, strict=True)
        middle = complex(min(x) + max(x), min(y) + max(y)) / 2
        for place in places or [0j]:
            at = by.then(Transform(shift=place))(middle)
            self.hole(element, at, min(outline.size) * by.scale, net, layer.span, word(holder, "geometry"))

    # -- pad stacks ---------------------------------------------------------------------------------------------------

    def pad_stack(self, element: Element) -> None:
        """A `PadStack` (revision A): one hole and its pads, all of one net."""
        net = net_name(element)
        for tag, inner in children(element):
            if tag == "LayerHole":
                at = location(inner, self.factor)
                self.hole(inner, at, size(inner, "diameter", self.factor), net, ("", ""))
            elif tag == "LayerPad":
                name = word(inner, "layerRef")
                layer = self.table.layers.get(name)
                if layer is None:
                    self.remarks.count(
                        f"{{n}} pad{{s}} on layer {name}, which the file does not declare, {{are}} left out"
                    )
                elif layer.copper:
                    self.copper.drawn_layers.add(name)
                    self.pad(inner, name, net, "")
            elif not tag.endswith("Attribute"):
                self.remarks.unknown(tag, "pad stacks")

    def stack_definition(self, element: Element) -> None:
        """A `PadStackDef` (revisions B and later): shapes by layer and use."""
        found = StackDefinition()
        for tag, inner in children(element):
            if tag != "PadstackPadDef":
                continue
            shape = next(
                (
                    self.shapes.as_pad(drawn, self.factor)
                    for name, drawn in children(inner)
                    if name not in {"Location", *_SILENT}
                ),
                None,
            )
            if shape is None or shape.pad is None:
                continue
            use, across = word(inner, "padUse").upper(), min(shape.pad.size)
            if use == "REGULAR":
                found.shapes[word(inner, "layerRef")] = shape
                found.pad_mm = max(found.pad_mm or 0.0, across)
            elif use == "ANTIPAD":
                found.antipad_mm = max(found.antipad_mm or 0.0, across)
        self.copper.stacks[word(element, "name")] = found
