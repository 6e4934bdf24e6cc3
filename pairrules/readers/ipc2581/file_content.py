"""Walks the file once, record by record, and keeps of it what a board needs; what has been read is freed.

Only elements that matter are handed over by the parser; the corners of a long outline are taken in as soon as it
closes, so that memory holds neither a whole plane's elements nor an object a corner.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, cast

from pairrules.errors import BoardError
from pairrules.readers.ipc2581.copper import Copper
from pairrules.readers.ipc2581.elements import child, clean, local, units, word, wrong
from pairrules.readers.ipc2581.features import MOST_PIECES, Shapes, most_pieces
from pairrules.readers.ipc2581.layer_features import SetReader, net_name
from pairrules.readers.ipc2581.layers import LayerTable, read_layer, read_spec, read_stackup
from pairrules.readers.ipc2581.nets import Nets, note_partner, read_logical_net, read_phy_net
from pairrules.readers.ipc2581.parts import Parts, read_bom_item, read_component, read_package
from pairrules.readers.ipc2581.prolog import root_name
from pairrules.readers.ipc2581.remarks import Remarks
from pairrules.readers.ipc2581.transform import Plane
from pairrules.readers.long_file import Sliced

if TYPE_CHECKING:
    from lxml.etree import _Element as Element

ROOT = "IPC-2581"

_BROKEN = {
    4: "the XML is empty",
    5: "the XML goes on after its end",
    76: "an element is closed by the end tag of another",
    77: "the XML breaks off before its end",
    110: "the name of an element or attribute is too long",
    114: "elements are nested too deep, or a text is too long",
}
"""Our words for the parser's commonest codes; its own change with its version. Source: libxml2, `xmlParserErrors`."""


_DICTIONARIES = {
    f"Dictionary{held}" for held in ("Color", "FillDesc", "Firmware", "Font", "LineDesc", "Standard", "User")
}
MOST_IN_RECORD = 300_000
"""Elements, attributes and texts one record may hold beside the corners of its outlines; each takes a tenth of a
kilobyte and more. A record is one net's copper on one layer, a package or a part: some thousands."""

_CHUNK = 32 * 1024
_BYTES_IN_TWO = 5
"""Bytes that an element and a text take at least (`x<a/>`); before so many more have come, none need be counted."""

_COUNT_EVERY = 256 * 1024
_OUTLINES = {"Cutout", "Polygon"}
_FEW = 8
"""Outlines of no more corners are read with their record."""

_LEFT_OUT = {
    *("Approval", "AvlItem", "BomHeader", "ChangeRec", "Datum", "DfxMeasurement", "DfxMeasurementList", "Enterprise"),
    *("EntryColor", "EntryFirmware", "EntryFont", "HistoryRecord", "LogisticHeader", "NonstandardAttribute", "Person"),
    *("Role", "StepRef", "BomRef", "AvlRef"),
}
"""Asked for only to be freed: a file may hold many of them."""


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
    from lxml import etree

    walk = _Walk(content)
    # The root is among them whatever it is called, to be judged before anything else.
    names = {*walk.records, *walk.openings, *_DICTIONARIES, *_OUTLINES, *_LEFT_OUT, _root_name(data)}
    parser = etree.XMLPullParser(
        events=("start", "end"),
        tag=[f"{{*}}{name}" for name in sorted(names)],
        resolve_entities=False,
        no_network=True,
        load_dtd=False,
        huge_tree=False,
        remove_comments=True,
        remove_pis=True,
        collect_ids=False,
    )
    fault: etree.XMLSyntaxError | None = None
    for start in range(0, len(data), _CHUNK):
        try:
            parser.feed(data[start : start + _CHUNK])
        except etree.XMLSyntaxError as error:
            fault = error
        walk.follow(cast("Iterable[tuple[str, Element]]", parser.read_events()))
        if fault is not None:
            break
        walk.prune(start)
    try:
        if fault is None:
            parser.close()
    except etree.XMLSyntaxError as error:
        fault = error
    if fault is not None:
        found = _BROKEN.get(getattr(fault, "code", 0), "the XML is not well formed")
        place = f"line {fault.lineno}" if fault.lineno else ""
        raise BoardError(found, place=place, remedy="export the file again") from None
    return walk.content


def _root_name(data: Sliced) -> str:
    name = root_name(data)
    return name if re.fullmatch(r"[\w.-]+", name) else ROOT


def _held(element: Element) -> float:
    """How many elements, texts and attributes stand in an element."""
    count = element.xpath("count(descendant::node()) + count(descendant::*/@*)")
    return count if isinstance(count, float) else 0.0


class _Walk:
    """Where in the file the walk is, and what to do with each element there."""

    def __init__(self, content: FileContent) -> None:
        self.content = content
        self.dictionary = 0.0
        self.step: Step | None = None
        self.sets: SetReader | None = None
        self.layer = ""
        self.route_net = ""
        self.root: Element | None = None
        self.record: Element | None = None
        self.take: Callable[[Element], None]
        self.count_at = 0
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

    def follow(self, events: Iterable[tuple[str, Element]]) -> None:
        """Elements open and close."""
        for event, element in events:
            if event == "start":
                if self.record is None and self.starts(element):
                    self.record = element
            elif element is self.record:
                self.take(element)
                self.content.shapes.outlines.clear()
                self.record = None
            elif self.record is None:
                self.ends(element)
            else:
                self.outline(self.record, element)

    def prune(self, place: int) -> None:
        """Drop what has closed, and refuse a record that would fill the memory.

        place: bytes read so far. But for an open record nothing is needed save open elements, each the last of its
        parent.
        """
        node = self.root
        while node is not None and node is not self.record and len(node):
            del node[:-1]
            node = node[-1]
        if self.record is not None and place >= self.count_at:
            held = _held(self.record)
            self.count_at = place + max(_COUNT_EVERY, int(_BYTES_IN_TWO * (MOST_IN_RECORD - held) / 2))
            if held > MOST_IN_RECORD:
                wrong(self.record, f"{local(self.record)} holds more than {MOST_IN_RECORD} elements and attributes")

    def starts(self, element: Element) -> bool:
        """An element opens. Returns: whether it is a record, to be handed over whole when it closes."""
        name = local(element)
        if self.root is None:
            self._root(element, name)
            return False
        taking = self.records.get(name)
        if taking is not None:
            self.take = taking
            return True
        opening = self.openings.get(name)
        if opening is not None:
            opening(element)
        elif name.startswith("Dictionary") and element.get("units") is not None:
            self.dictionary = units(element)
        return False

    def outline(self, record: Element, element: Element) -> None:
        """An outline within a record has closed: keep its corners and drop its elements."""
        if local(element) in _OUTLINES and len(element) > _FEW:
            factor = self.dictionary if local(record).startswith("Entry") else self.content.factor
            if factor:
                self.content.shapes.keep_outline(element, factor)

    def ends(self, element: Element) -> None:
        """An element that is no record has closed."""
        name = local(element)
        if name == "Step":
            self.step = self.sets = None
        elif name == "LayerFeature":
            self.layer = ""
        elif name == "Route":
            self.route_net = ""

    def _root(self, element: Element, name: str) -> None:
        self.root = element
        if name != ROOT:
            wrong(element, f"the root element is {clean(name)}, not {ROOT}", "give an IPC-2581 file")
        information = element.getroottree().docinfo
        if information.internalDTD is not None or information.externalDTD is not None:
            wrong(element, "the file has a DOCTYPE, which a board file does not need", "remove the DOCTYPE")
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
