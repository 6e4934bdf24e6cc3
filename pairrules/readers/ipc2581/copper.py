"""Copper as collected from one step while the file is read: rows of numbers, in the order of the document."""

from __future__ import annotations

from dataclasses import dataclass, field

from pairrules.board import PadShape
from pairrules.readers.ipc2581.drawing import Fill, Item, Stroke, placed
from pairrules.readers.ipc2581.places import Crowds
from pairrules.readers.ipc2581.primitives import Primitive
from pairrules.readers.ipc2581.transform import Transform


@dataclass(slots=True)
class TrackRow:
    """A straight or round piece of line [mm, rad]. centre: `None` where straight."""

    start: complex
    end: complex
    centre: complex | None
    sweep: float
    width: float
    layer: str
    net: str
    order: int

    def stroke(self) -> Stroke:
        """The same piece as a stroke."""
        return Stroke((self.start, self.end), (self.centre,), (self.sweep,), self.width)


@dataclass(slots=True)
class FillRow:
    """An area. erase: it removes copper drawn before it on its layer."""

    fill: Fill
    layer: str
    net: str
    order: int


@dataclass(slots=True)
class Erasure:
    """What a negative feature removes from its layer."""

    item: Item
    layer: str
    order: int


@dataclass(slots=True)
class PadRow:
    """A pad on one layer.

    way: how it is turned, mirrored and scaled, without a shift; pads of one way may share it.
    stack: name of its pad stack definition. via: marked as a via's pad. plane: marked as an opening in a plane.
    """

    at: complex
    way: Transform
    layer: str
    net: str
    ref: str
    pin: str
    shape: Primitive | None
    stack: str
    via: bool
    order: int
    plane: bool = False

    @property
    def by(self) -> Transform:
        """The pad's placement."""
        return Transform(self.way.turn, self.way.flip, self.at)

    @property
    def outline(self) -> PadShape | None:
        """The pad's shape at its scale; `None` where it is unknown, or without extent as exporters write no pad."""
        pad = None if self.shape is None else self.shape.scaled_pad(self.way.scale)
        return None if pad is None or min(pad.size) <= 0 else pad

    @property
    def smallest_mm(self) -> float | None:
        """The lesser side, of a circle the diameter; `None` where the shape is unknown."""
        pad = self.outline
        return None if pad is None else min(pad.size)

    @property
    def clearance(self) -> bool:
        """Whether it is an opening in a plane: marked as one, or a thermal relief."""
        return self.plane or (self.shape is not None and self.shape.thermal)

    def items(self) -> tuple[Item, ...]:
        """What the pad draws on the board."""
        return () if self.shape is None else placed(self.shape.items, self.by)


@dataclass(slots=True)
class HoleRow:
    """A hole. diameter: [mm]. span: layer names, "" where not said. stack: name of its pad stack definition."""

    at: complex
    diameter: float
    plating: str
    net: str
    span: tuple[str, str]
    stack: str
    order: int


@dataclass(slots=True)
class StackDefinition:
    """A `PadStackDef`: regular shapes by layer, the greatest regular and antipad diameter [mm]."""

    shapes: dict[str, Primitive] = field(default_factory=dict)
    pad_mm: float | None = None
    antipad_mm: float | None = None


@dataclass(slots=True)
class Copper:
    """Everything drawn and drilled in one step."""

    tracks: list[TrackRow] = field(default_factory=list)
    areas: list[FillRow] = field(default_factory=list)
    erasures: list[Erasure] = field(default_factory=list)
    pads: list[PadRow] = field(default_factory=list)
    holes: list[HoleRow] = field(default_factory=list)
    stacks: dict[str, StackDefinition] = field(default_factory=dict)
    drawn_layers: set[str] = field(default_factory=set)
    undeclared: set[str] = field(default_factory=set)
    net_lines: dict[str, int] = field(default_factory=dict)
    crowds: Crowds = field(default_factory=Crowds)
    order: int = 0

    def next(self) -> int:
        """The place of the next feature in the document."""
        self.order += 1
        return self.order

    def __bool__(self) -> bool:
        """Whether anything is drawn or drilled."""
        return bool(self.tracks or self.areas or self.pads or self.holes)

    def draw(self, items: tuple[Item, ...], layer: str, net: str) -> int:
        """Take in strokes and fills on a layer. Returns: pieces without length that were left out."""
        order = self.next()
        dropped = 0
        for item in items:
            if item.erase:
                self.erasures.append(Erasure(item, layer, order))
            elif isinstance(item, Stroke):
                dropped += self._stroke(item, layer, net, order)
            else:
                self.areas.append(FillRow(item, layer, net, order))
        return dropped

    def _stroke(self, item: Stroke, layer: str, net: str, order: int) -> int:
        dropped = 0
        start = item.points[0]
        for end, centre, sweep in zip(item.points[1:], item.centres, item.sweeps, strict=True):
            if centre is None and start == end:
                dropped += 1
            else:
                self.tracks.append(TrackRow(start, end, centre, sweep, item.width, layer, net, order))
            start = end
        return dropped
