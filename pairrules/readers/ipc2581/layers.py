"""Layers and stackup: which layers carry copper, in which order they lie, how thick and of what they are."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from pairrules.board import Layer, Stackup
from pairrules.readers.ipc2581.elements import child, children, number, size, word
from pairrules.readers.ipc2581.remarks import Remarks

if TYPE_CHECKING:
    from pairrules.readers.ipc2581.element import Element

COPPER = {"CONDUCTOR", "SIGNAL", "PLANE", "MIXED", "CONDFILM", "CONDFOIL"}
"""Layer functions that carry copper. Source: IPC-2581A schema, `layerFunctionType`."""
DRILLED = {"DRILL", "ROUT"}
_COATED = {"SOLDERMASK", "COATINGNONCOND"}

_POSSIBLE = {"permittivity": (1.0, 1e6), "loss_tangent": (0.0, 0.9), "thickness_mm": (1e-6, 100.0)}
"""Figures a material can have; beyond them the file is wrong. Nothing polarises less than vacuum, a nanometre is less
than any layer, ten centimetres more than any board (common practice, no source)."""

_UNIT_MM = {
    "MM": 1.0,
    "MILLIMETER": 1.0,
    "MICRON": 0.001,
    "UM": 0.001,
    "INCH": 25.4,
    "IN": 25.4,
    "MIL": 0.0254,
    "MILS": 0.0254,
}


@dataclass(frozen=True, slots=True)
class FileLayer:
    """A `Layer` element. span: names of the first and last layer a drill layer goes through, "" where not said."""

    name: str
    function: str
    side: str
    negative: bool
    span: tuple[str, str]
    specs: tuple[str, ...]

    @property
    def copper(self) -> bool:
        """Whether copper is drawn on it."""
        return self.function in COPPER


@dataclass(frozen=True, slots=True)
class Material:
    """What a `Spec` or a stackup layer says of a material; `None` where it does not."""

    permittivity: float | None = None
    loss_tangent: float | None = None
    thickness_mm: float | None = None
    conductor: bool = False

    def over(self, other: Material) -> Material:
        """The same, filled up from another where it says nothing."""
        return Material(
            _first(self.permittivity, other.permittivity),
            _first(self.loss_tangent, other.loss_tangent),
            _first(self.thickness_mm, other.thickness_mm),
            self.conductor or other.conductor,
        )


@dataclass(frozen=True, slots=True)
class StackedLayer:
    """A `StackupLayer` element."""

    name: str
    thickness_mm: float | None
    material: Material
    described: str
    sequence: float
    specs: tuple[str, ...]


@dataclass(slots=True)
class LayerTable:
    """All layers of the file and its first stackup. several: there are others, unlike it, for other zones."""

    layers: dict[str, FileLayer] = field(default_factory=dict)
    specs: dict[str, Material] = field(default_factory=dict)
    groups: list[list[StackedLayer]] | None = None
    group_names: set[str] = field(default_factory=set)
    several: bool = False

    @property
    def rows(self) -> list[StackedLayer]:
        """The rows of the stackup, group after group."""
        return [layer for group in self.groups or [] for layer in group]

    @property
    def copper(self) -> list[FileLayer]:
        """Copper layers as the file names them, in its order."""
        return [layer for layer in self.layers.values() if layer.copper]


def read_layer(element: Element) -> FileLayer:
    """A `Layer` element."""
    span = child(element, "Span")
    return FileLayer(
        name=word(element, "name"),
        function=word(element, "layerFunction").upper(),
        side=word(element, "side").upper(),
        negative=word(element, "polarity").upper() == "NEGATIVE",
        span=("", "") if span is None else (word(span, "fromLayer"), word(span, "toLayer")),
        specs=_spec_names(element),
    )


def read_spec(element: Element, factor: float, remarks: Remarks) -> Material:
    """Permittivity, loss tangent and thickness of a `Spec` (revisions B and later).

    A length without a unit is in the header's, `factor` millimetres each.
    """
    found: dict[str, float] = {}
    conductor = False
    for tag, inner in children(element):
        kind = word(inner, "type").upper()
        conductor = conductor or tag == "Conductor"
        wanted = {
            ("Dielectric", "DIELECTRIC_CONSTANT"): "permittivity",
            ("Dielectric", "LOSS_TANGENT"): "loss_tangent",
            ("Dielectric", "THICKNESS"): "thickness_mm",
            ("Conductor", "FINISHED_HEIGHT"): "thickness_mm",
            ("General", "THICKNESS"): "thickness_mm",
        }.get((tag, kind))
        if wanted is None or wanted in found:
            continue
        value = _property(inner, factor if wanted == "thickness_mm" else None)
        if value is not None and _possible(wanted, value, remarks):
            found[wanted] = value
    return Material(**found, conductor=conductor)


def _property(element: Element, factor: float | None) -> float | None:
    """The first number among `Property` children; a length where a factor is given."""
    for tag, inner in children(element):
        if tag != "Property":
            continue
        if inner.get("value") is None:
            try:
                value = float(word(inner, "text"))
            except ValueError:
                continue
            if not math.isfinite(value):
                continue
        else:
            value = number(inner, "value")
        if factor is not None:
            value *= _UNIT_MM.get(word(inner, "unit").upper(), factor)
        return value
    return None


def _possible(what: str, value: float, remarks: Remarks) -> bool:
    """Whether a material can have such a figure; where it cannot, it is unknown."""
    low, high = _POSSIBLE[what]
    if low <= value <= high:
        return True
    remarks.count(f"{{n}} {what.removesuffix('_mm').replace('_', ' ')} that no material has {{are}} left out")
    return False


def read_stackup(element: Element, factor: float, remarks: Remarks) -> list[list[StackedLayer]]:
    """The groups of a `Stackup` element, each in sequence order where it gives one."""
    groups: list[list[StackedLayer]] = []
    for tag, group in children(element):
        if tag != "StackupGroup":
            continue
        stacked = [_stacked(inner, factor, remarks) for name, inner in children(group) if name == "StackupLayer"]
        if all(math.isfinite(layer.sequence) for layer in stacked):
            stacked.sort(key=lambda layer: layer.sequence)
        groups.append(stacked)
    return groups


def _stacked(element: Element, factor: float, remarks: Remarks) -> StackedLayer:
    thickness = size(element, "thickness", factor, 0.0)
    permittivity = loss = None
    for tag, inner in children(element):
        name = word(inner, "name").lower()
        if tag == "DoubleAttribute" and name == "layer_dielectric":
            value = number(inner, "value")
            permittivity = value if _possible("permittivity", value, remarks) else None
        elif tag == "NonstandardAttribute" and name == "loss_tangent":
            value = number(inner, "value")
            loss = value if _possible("loss_tangent", value, remarks) else None
    known = thickness > 0 and _possible("thickness_mm", thickness, remarks)  # exporters write 0 where they do not know
    return StackedLayer(
        name=word(element, "layerOrGroupRef"),
        thickness_mm=thickness if known else None,
        material=Material(permittivity, loss),
        described=word(element, "materialType").lower(),
        sequence=number(element, "sequence", math.nan),
        specs=_spec_names(element),
    )


def _spec_names(element: Element) -> tuple[str, ...]:
    return tuple(word(inner, "id") for tag, inner in children(element) if tag == "SpecRef")


def _first(value: float | None, other: float | None) -> float | None:
    return other if value is None else value


def build_stackup(table: LayerTable, remarks: Remarks) -> Stackup:
    """The stack from top to bottom: by the file's stackup where it has one, else its copper layers alone.

    Without a stackup the file's order holds, layers of side TOP first and of side BOTTOM last.
    """
    if not table.rows:
        remarks.count("the file has no stackup: barrel lengths and impedances are unknown")
        return Stackup(layers=tuple(Layer(name=layer.name, kind="copper") for layer in _by_side(table.copper)))
    stacked = table.rows
    layers: list[Layer] = []
    names: set[str] = set()
    inner = inner_rows(table)
    for place, row in enumerate(stacked):
        layer = _stack_row(row, table, remarks, inside=place in inner)
        if layer is not None and layer.name not in names:
            layers.append(layer)
            names.add(layer.name)
    if table.several:
        layers = [Layer(name=layer.name, kind=layer.kind) for layer in layers]
    copper = [layer.name for layer in layers if layer.kind == "copper"]
    if copper and table.layers[copper[0]].side == "BOTTOM" and table.layers[copper[-1]].side == "TOP":
        layers.reverse()
    for forgotten in (layer for layer in _by_side(table.copper) if layer.name not in copper):
        remarks.count(f"copper layer {forgotten.name} is not in the file's stackup; its height is unknown")
        layers.insert(0 if forgotten.side == "TOP" else len(layers), Layer(name=forgotten.name, kind="copper"))
    _remark_on_gaps(layers, remarks)
    return Stackup(layers=tuple(layers))


def _by_side(layers: list[FileLayer]) -> list[FileLayer]:
    return sorted(layers, key=lambda layer: {"TOP": 0, "BOTTOM": 2}.get(layer.side, 1))


def inner_rows(table: LayerTable) -> range:
    """Places in the stackup between its outermost copper layers."""
    copper = {layer.name for layer in table.copper}
    places = [place for place, row in enumerate(table.rows) if row.name in copper]
    return range(places[0], places[-1] + 1) if places else range(0)


def _stack_row(row: StackedLayer, table: LayerTable, remarks: Remarks, *, inside: bool) -> Layer | None:
    """A row of the stackup as a layer; `None` where it is no copper and nothing that stands between copper.

    inside: it lies between copper layers, where all that is no copper keeps them apart, whatever the file calls it.
    """
    declared = table.layers.get(row.name)
    function = "" if declared is None else declared.function
    kept_apart = inside and row.name != "" and row.name not in table.group_names
    if function in COPPER:
        kind = "copper"
    elif kept_apart or function.startswith("DIEL") or function in _COATED:
        kind = "dielectric"
    else:
        return None
    material = row.material
    if material.permittivity is not None:
        remarks.count("layer_dielectric, which revision A does not define, is read as the relative permittivity")
    for name in (*row.specs, *(() if declared is None else declared.specs)):
        material = material.over(table.specs.get(name, Material()))
    told = kind == "dielectric"
    return Layer(
        name=row.name,
        kind=kind,
        thickness_mm=_first(row.thickness_mm, material.thickness_mm),
        permittivity=material.permittivity if told else None,
        loss_tangent=material.loss_tangent if told else None,
    )


def _remark_on_gaps(layers: list[Layer], remarks: Remarks) -> None:
    places = [i for i, layer in enumerate(layers) if layer.kind == "copper"]
    inner = layers[places[0] : places[-1] + 1] if places else []
    for what, names in (
        ("thickness", [layer.name for layer in inner if layer.thickness_mm is None]),
        ("permittivity", [layer.name for layer in inner if layer.kind == "dielectric" and layer.permittivity is None]),
    ):
        if names:
            remarks.count(f"the stackup gives no {what} for {', '.join(names)}")


def undeclared_stack_names(table: LayerTable) -> list[str]:
    """Rows of the stackup that name no declared layer and no group: layers left out of the file."""
    return [row.name for row in table.rows if row.name not in table.layers and row.name not in table.group_names]
