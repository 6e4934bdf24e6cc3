"""Parts: components with their placement, packages with their pins, values from the bill of materials."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from pairrules.board import Part
from pairrules.readers.ipc2581.elements import child, children, local, word
from pairrules.readers.ipc2581.features import STYLES, Shapes
from pairrules.readers.ipc2581.layers import LayerTable
from pairrules.readers.ipc2581.primitives import Primitive
from pairrules.readers.ipc2581.remarks import Remarks
from pairrules.readers.ipc2581.transform import Transform, location, xform

if TYPE_CHECKING:
    from pairrules.readers.ipc2581.element import Element

_MEASURES = ("VALUE", "RESISTANCE", "CAPACITANCE", "INDUCTANCE")


@dataclass(frozen=True, slots=True)
class PackagePin:
    """A pin of a package, about the package's origin. through: it goes through the board."""

    by: Transform
    shape: Primitive | None
    through: bool


@dataclass(frozen=True, slots=True)
class Component:
    """A placed part. layer: the one it is mounted on."""

    ref: str
    package: str
    value: str
    layer: str
    by: Transform


@dataclass(slots=True)
class Parts:
    """Components and packages of one step."""

    components: dict[str, Component] = field(default_factory=dict)
    packages: dict[str, dict[str, PackagePin]] = field(default_factory=dict)
    polarities: dict[tuple[str, str], str] = field(default_factory=dict)

    def pin_of(self, ref: str, pin: str) -> tuple[Component, PackagePin] | None:
        """The pin in its package and the part that holds it; `None` where the file does not give both."""
        component = self.components.get(ref)
        found = None if component is None else self.packages.get(component.package, {}).get(pin)
        return None if component is None or found is None else (component, found)


def read_package(element: Element, parts: Parts, shapes: Shapes, factor: float) -> None:
    """A `Package`: its pins under number and, where that is free, under name."""
    pins: dict[str, PackagePin] = {}
    names: dict[str, PackagePin] = {}
    package = word(element, "name")
    for tag, inner in children(element):
        if tag != "Pin":
            continue
        by, shape = Transform(), None
        for name, part in children(inner):
            if name == "Xform":
                by = xform(part, factor).then(by)
            elif name == "Location":
                by = by.then(Transform(shift=location(part, factor)))
            elif name not in STYLES:
                shape = shapes.as_pad(part, factor)
        pin = PackagePin(by, shape, word(inner, "type").upper() == "THRU")
        pins[word(inner, "number")] = pin
        names.setdefault(word(inner, "name"), pin)
        polarity = word(inner, "pinPolarity").upper()
        if polarity:
            parts.polarities[package, word(inner, "number")] = polarity
    for name, pin in names.items():
        if name:
            pins.setdefault(name, pin)
    parts.packages[package] = pins


def read_component(element: Element, parts: Parts, remarks: Remarks, factor: float) -> None:
    """A `Component`: reference, package, value where its attributes give one, placement."""
    ref = word(element, "refDes")
    value, by = "", Transform()
    for tag, inner in children(element):
        if tag == "NonstandardAttribute" and word(inner, "name").upper() == "VALUE":
            value = value or word(inner, "value")
        elif tag == "Xform":
            by = xform(inner, factor).then(by)
        elif tag == "Location":
            by = by.then(Transform(shift=location(inner, factor)))
    if ref in parts.components:
        remarks.count("{n} component{s} with a reference used before {are} left out")
        return
    parts.components[ref] = Component(ref, word(element, "packageRef"), value, word(element, "layerRef"), by)


def read_bom_item(element: Element, values: dict[str, str]) -> None:
    """A `BomItem`: the value of each part it lists, by the text characteristic VALUE or else a measured one."""
    refs = [word(inner, "name") for tag, inner in children(element) if tag == "RefDes"]
    told = child(element, "Characteristics")
    if told is None:
        return
    found: dict[str, str] = {}
    for _, inner in children(told):
        kind = local(inner).lower()  # Textual, Measured, Enumerated: the attributes carry the kind in their names
        name = word(inner, f"{kind}CharacteristicName").upper()
        value = word(inner, f"{kind}CharacteristicValue")
        if name in _MEASURES and value:
            found.setdefault(name, (value + " " + word(inner, "engineeringUnitOfMeasure")).strip())
    value = next((found[name] for name in _MEASURES if name in found), "")
    if value:
        for ref in refs:
            values.setdefault(ref, value)


def part_list(parts: Parts, values: dict[str, str], others: list[str], table: LayerTable) -> tuple[Part, ...]:
    """Every part, components in the file's order, then those only named by pads. others: references of pads."""
    listed = []
    for component in parts.components.values():
        layer = table.layers.get(component.layer)
        side = {"TOP": "top", "BOTTOM": "bottom"}.get("" if layer is None else layer.side, "")
        value = component.value or values.get(component.ref, "")
        listed.append(Part(ref=component.ref, value=value, package=component.package, side=side))
    known = set(parts.components)
    listed += [Part(ref=ref, value=values.get(ref, "")) for ref in dict.fromkeys(others) if ref not in known]
    return tuple(listed)
