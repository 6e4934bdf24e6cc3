"""Walks the file once, record by record, and keeps of it what a board needs; what has been read is freed.

The corners of a long outline are taken in as soon as it closes, so that memory holds neither a whole plane's steps nor
an object a corner.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from pairrules.readers.ipc2581.copper import Copper
from pairrules.readers.ipc2581.elements import child, clean, local, units, word, wrong
from pairrules.readers.ipc2581.features import MOST_PIECES, Shapes, most_pieces
from pairrules.readers.ipc2581.layer_features import SetReader, net_name
from pairrules.readers.ipc2581.layers import LayerTable, read_layer, read_spec, read_stackup
from pairrules.readers.ipc2581.nets import Nets, note_partner, read_logical_net, read_phy_net
from pairrules.readers.ipc2581.parsing import follow
from pairrules.readers.ipc2581.parts import Parts, read_bom_item, read_component, read_package
from pairrules.readers.ipc2581.remarks import Remarks
from pairrules.readers.ipc2581.transform import Plane
from pairrules.readers.long_file import Sliced

if TYPE_CHECKING:
    from pairrules.readers.ipc2581.element import Element

ROOT = "IPC-2581"

_OUTLINES = {"Cutout", "Polygon"}
_FEW = 8
"""Outlines of no more corners are read with their record; but for voids, of which a plane has ten thousands."""


@dataclass(slots=True)
class Step:
    """One board or panel of the file."""

    name: str
    remarks: Remarks = field(default_factory=Remarks)
    copper: Copper = field(default_factory=Copper)
    parts: Parts = field(default_factory=Parts)
    nets: Nets = field(default_factory=Nets)
    profile: Plane | None = None
    repeats: list[str] = field(default_factory=list)


@dataclass(slots=True)
class FileContent:
    """What was read: header, layers, dictionaries, bill, steps."""

    revision: str = ""
    units: str = ""
    factor: float = 0.0
    modes: list[str] = field(default_factory=list)
    listed: list[str] = field(default_factory=list)
    remarks: Remarks = field(default_factory=Remarks)
    table: LayerTable = field(default_factory=LayerTable)
    values: dict[str, str] = field(default_factory=dict)
    steps: dict[str, Step] = field(default_factory=dict)
    most_pieces: int = MOST_PIECES
    shapes: Shapes = field(init=False)

    def __post_init__(self) -> None:
        self.shapes = Shapes(self.remarks, most=self.most_pieces)

    def asked_too_early(self) -> bool:
        """Whether something was left out for want of what stands later in the file."""
        wanted = {name for step in self.steps.values() for name in step.copper.undeclared}
        return bool(wanted & self.table.layers.keys()) or self.shapes.asked_too_early()


def read_content(data: Sliced) -> FileContent:
    """Read the file. Raises: BoardError, without the file's name, where it is malformed or says what cannot be.

    A file that names layers, line styles or shapes before it says what they are is read once more, with them known.
    """
    content = _read_once(data, FileContent(most_pieces=most_pieces(len(data))))
    if not content.asked_too_early():
        return content
    again = FileContent(most_pieces=content.most_pieces, table=LayerTable(layers=dict(content.table.layers)))
    again.shapes.know(content.shapes)
    return _read_once(data, again)


def _read_once(data: Sliced, content: FileContent) -> FileContent:
    follow(data, _Walk(content))
    return content


class _Walk:
    """Where in the file the walk is, and what to do with each element there."""

    def __init__(self, content: FileContent) -> None:
        self.content = content
        self.dictionary = 0.0
        self.step: Step | None = None
        self.sets: SetReader | None = None
        self.layer = ""
        self.route_net = ""
        self.seen_root = False
        self.records: dict[str, Callable[[Element], None]] = {
            "EntryLineDesc": self._entry,
            "EntryFillDesc": self._entry,
            "EntryStandard": self._entry,
            "EntryUser": self._entry,
            "BomItem": lambda element: read_bom_item(element, content.values),
            "Spec": self._spec,
            "Layer": self._layer,
            "Stackup": self._stackup,
            "Profile": self._profile,
            "Package": self._package,
            "Component": self._component,
            "LogicalNet": self._logical_net,
            "PhyNet": self._phy_net,
            "PadStack": self._pad_stack,
            "PadStackDef": self._pad_stack_definition,
            "Set": self._set,
        }
        self.openings: dict[str, Callable[[Element], None]] = {
            "CadHeader": self._header,
            "FunctionMode": lambda element: content.modes.append(word(element, "mode").upper()),
            "Step": self._open_step,
            "StepRepeat": self._repeat,
            "LayerRef": lambda element: content.listed.append(word(element, "name")),
            "NetShort": lambda _: self._net_short(),
            "LayerFeature": self._open_layer,
            "Route": self._open_route,
        }

    # -- walking ------------------------------------------------------------------------------------------------------

    def starts(self, element: Element) -> bool:
        """An element opens. Returns: whether it is a record, to be handed over whole when it closes."""
        name = element.tag
        if not self.seen_root:
            self._root(element, name)
            return False
        if name in self.records:
            return True
        opening = self.openings.get(name)
        if opening is not None:
            opening(element)
        elif name.startswith("Dictionary") and element.get("units") is not None:
            self.dictionary = units(element)
        return False

    def take(self, element: Element) -> None:
        """A record has closed."""
        self.records[local(element)](element)
        self.content.shapes.outlines.clear()

    def outline(self, record: Element, holder: Element, element: Element) -> None:
        """An outline within a record has closed: keep its corners and drop its steps, unless it is drawn as a line."""
        long = element.tag == "Cutout" or (element.tag in _OUTLINES and len(element.steps) > _FEW)
        if long and holder.tag != "Outline":
            factor = self.dictionary if local(record).startswith("Entry") else self.content.factor
            if factor:
                self.content.shapes.keep_outline(element, factor)

    def ends(self, name: str) -> None:
        """An element that is no record has closed."""
        if name == "Step":
            self.step = self.sets = None
        elif name == "LayerFeature":
            self.layer = ""
        elif name == "Route":
            self.route_net = ""

    def _root(self, element: Element, name: str) -> None:
        self.seen_root = True
        if name != ROOT:
            wrong(element, f"the root element is {clean(name)}, not {ROOT}", "give an IPC-2581 file")
        self.content.revision = word(element, "revision")

    # -- header -------------------------------------------------------------------------------------------------------

    def _entry(self, element: Element) -> None:
        kind = local(element)
        if kind != "EntryFillDesc" and not self.dictionary:
            wrong(element, f"the dictionary of this {kind} has no units", "write MILLIMETER, MICRON or INCH")
        self.content.shapes.entry(element, self.dictionary)

    def _header(self, element: Element) -> None:
        self.content.factor = units(element)
        self.content.units = word(element, "units").upper()

    def _need_units(self, element: Element) -> float:
        if not self.content.factor:
            wrong(element, f"{local(element)} stands before any CadHeader with units")
        return self.content.factor

    def _spec(self, element: Element) -> None:
        self.content.table.specs[word(element, "name")] = read_spec(
            element, self._need_units(element), self.content.remarks
        )

    def _layer(self, element: Element) -> None:
        layer = read_layer(element)
        self.content.table.layers.setdefault(layer.name, layer)

    def _stackup(self, element: Element) -> None:
        table = self.content.table
        groups = read_stackup(element, self._need_units(element), self.content.remarks)
        if table.groups is not None:
            if groups != table.groups and not table.several:
                table.several = True
                self.content.remarks.count(
                    "the file has several stackups, and which holds where is not read: thicknesses and permittivities "
                    "are unknown unless the settings give them"
                )
            return
        table.groups = groups
        table.group_names = {word(group, "name") for group in element if local(group) == "StackupGroup"}

    # -- step ---------------------------------------------------------------------------------------------------------

    def _open_step(self, element: Element) -> None:
        name = word(element, "name")
        factor = self._need_units(element)
        if name in self.content.steps:
            wrong(element, f'step "{name}" stands twice in the file')
        self.step = Step(name)
        self.content.steps[name] = self.step
        self.content.shapes.remarks = self.step.remarks
        content, step = self.content, self.step
        self.sets = SetReader(step.copper, content.shapes, content.table, step.remarks, factor)

    def _repeat(self, element: Element) -> None:
        if self.step is not None:
            self.step.repeats.append(word(element, "stepRef"))

    def _net_short(self) -> None:
        if self.step is not None:
            self.step.remarks.count("{n} joint{s} of nets {are} declared; the nets are kept apart")

    def _open_layer(self, element: Element) -> None:
        self.layer = word(element, "layerRef")
        if self.step is not None:
            self.step.copper.drawn_layers.add(self.layer)

    def _open_route(self, element: Element) -> None:
        self.route_net = net_name(element)

    def _profile(self, element: Element) -> None:
        polygon = child(element, "Polygon")
        if self.step is None or polygon is None:
            return
        outline = self.content.shapes.outline(polygon, self.content.factor)
        if len(outline) > 2:
            self.step.profile = outline
        else:
            self.step.remarks.count("the board's outline has fewer than three corners and is left out")

    def _package(self, element: Element) -> None:
        if self.step is not None:
            read_package(element, self.step.parts, self.content.shapes, self.content.factor)

    def _component(self, element: Element) -> None:
        if self.step is not None:
            read_component(element, self.step.parts, self.step.remarks, self.content.factor)

    def _logical_net(self, element: Element) -> None:
        if self.step is not None:
            read_logical_net(element, self.step.nets)

    def _phy_net(self, element: Element) -> None:
        if self.step is not None:
            read_phy_net(element, self.step.nets, self.content.factor)

    def _pad_stack(self, element: Element) -> None:
        if self.sets is not None:
            self.sets.pad_stack(element)

    def _pad_stack_definition(self, element: Element) -> None:
        if self.sets is not None:
            self.sets.stack_definition(element)

    def _set(self, element: Element) -> None:
        if self.sets is None or self.step is None:
            return
        net = net_name(element, default=self.route_net)
        note_partner(element, net, self.step.nets)
        self.sets.read(element, self.layer, net)
