"""The plain JSON board, version 1 (`pairrules schema board` prints its description), to a `Board`.

Every fault names the path to the value and what was expected there. Members that the format does not know are no
fault: they are counted and told in `Board.missing`.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field, replace

import numpy as np

from pairrules.board.areas import Area
from pairrules.board.board import Board, DeclaredPair
from pairrules.board.columns import Floats
from pairrules.board.crossing_rings import crossing_rings
from pairrules.board.knots import MOST_CROSSINGS, knotted
from pairrules.board.pads import Pads, PadShape, Part
from pairrules.board.tracks import Tracks
from pairrules.board.units import LENGTH_MM
from pairrules.board.vias import Vias
from pairrules.errors import BoardError
from pairrules.readers.json_paths import Piece, Point, Ruler
from pairrules.readers.json_stackup import ALL_LAYERS, read_stackup, stackup_gaps
from pairrules.readers.json_tree import Document, Members, Path, or_list, parse, printable, show, written
from pairrules.readers.long_file import Sliced
from pairrules.readers.reader import Reader

VERSION = 1
UNITS = ("mm", "um", "mil", "in")
PAD_SHAPES = ("rect", "circle", "oval", "round_rect", "polygon")
SIDES = ("top", "bottom")
NET_KINDS = ("ground", "power", "signal")
_KINDS_TOLD = 20

_BOARD = frozenset({
    "pairrules_board", "name", "units", "outline", "stackup", "parts", "tracks", "vias", "areas", "pairs", "nets",
})  # fmt: skip
_PART = frozenset({"ref", "value", "package", "side", "pins"})
_PIN = frozenset({"pin", "net", "at", "layer", "drill", "pad"})
_PAD = frozenset({"shape", "size", "rotation", "mirror", "radius", "points"})
_TRACK = frozenset({"net", "layer", "width", "points"})
_VIA = frozenset({"net", "at", "from", "to", "drill", "pad", "antipad"})
_AREA = frozenset({"net", "layer", "outline", "holes"})
_PAIR = frozenset({"name", "plus", "minus", "class", "source", "load"})
_NET = frozenset({"name", "kind"})


def recognises(data: Sliced) -> bool:
    """Whether the first sign after an optional byte order mark is an opening brace."""
    return data[:4096].removeprefix(b"\xef\xbb\xbf").lstrip(b" \t\r\n").startswith(b"{")


def read(data: bytes, name: str, step: str = "") -> Board:
    """The board in UTF-8 JSON text.

    Parameters
    ----------
    data: the file's bytes. name: the file's name for messages.
    step: the wanted board's name; "" takes the one there is.

    Raises
    ------
    BoardError: where the text is no JSON or no board of version 1.
    """
    document = Document(name)
    tree = document.members(parse(data, name), None, _BOARD, "the board")
    version = tree.need("pairrules_board", f"give {VERSION}, the version of the plain JSON board")
    if type(version) is not float or version != VERSION:
        raise document.fault((None, "pairrules_board"), version, f"give {VERSION}, the only version there is")
    board_name = tree.text_or_empty("name")
    if step and step != board_name:
        found = f"holds one board, {show(board_name)}, not {show(step)}"
        raise BoardError(found, file=printable(name), remedy="leave the board's name out")
    unit = tree.choice("units", UNITS)
    return _Reading(document, tree, Ruler(document=document, scale=LENGTH_MM[unit], unit=unit)).board(board_name)


@dataclass(slots=True)
class _Reading:
    """One board while it is being read. Nets are numbered as they are met and put in order at the end."""

    document: Document
    tree: Members
    ruler: Ruler
    layers: dict[str, int] = field(default_factory=dict)
    nets: dict[str, int] = field(default_factory=dict)
    missing: list[str] = field(default_factory=list)

    def board(self, name: str) -> Board:
        stackup = read_stackup(self.tree, self.ruler)
        self.missing += stackup_gaps(stackup)
        self.layers = {layer: index for index, layer in enumerate(stackup.copper)}
        outline = self.tree.get("outline")
        edge = None if outline is None else self.ruler.ring(outline, (None, "outline"))
        if edge is not None:
            self._refuse_knots([(edge, (None, "outline"))])
        parts, pads = self._parts()
        tracks, vias, areas = self._tracks(), self._vias(), self._areas()
        kinds = self._kinds()
        pairs = self._pairs(frozenset(self.nets), frozenset(part.ref for part in parts))
        names = tuple(sorted(self.nets))
        # One row more than there are nets, so that index −1 (no net) finds −1.
        order = np.full(len(names) + 1, -1, dtype=np.int64)
        for place, net in enumerate(names):
            order[self.nets[net]] = place
        self._tell_of_unknown()
        return Board(
            name=name,
            format="plain JSON",
            revision=str(VERSION),
            units=self.ruler.unit,
            stackup=stackup,
            nets=names,
            net_kinds=tuple(kinds.get(net, "") for net in names),
            parts=parts,
            pads=replace(pads, net=order[pads.net]),
            tracks=replace(tracks, net=order[tracks.net]),
            vias=replace(vias, net=order[vias.net]),
            areas=tuple(replace(area, net=int(order[area.net])) for area in areas),
            pairs=pairs,
            outline=edge,
            missing=tuple(self.missing),
        )

    def _layer(self, members: Members, key: str, *, all_too: bool = False) -> int:
        written_name = members.get(key)
        if isinstance(written_name, str) and written_name in self.layers:
            return self.layers[written_name]
        if all_too and written_name == ALL_LAYERS:
            return -1
        names = tuple(self.layers) + ((ALL_LAYERS,) if all_too else ())
        remedy = f"give a copper layer of the stackup: {or_list(names)}"
        name = members.text(key, remedy)
        if name not in self.layers:
            raise self.document.fault((members.path, key), name, remedy)
        return self.layers[name]

    def _net(self, value: object, path: Path) -> int:
        """Number of a net by its name; −1 for `null`."""
        if value is None:
            return -1
        name = self.document.text(value, path, "give the net's name in quotes, or null where it has none")
        return self.nets.setdefault(name, len(self.nets))

    def _parts(self) -> tuple[tuple[Part, ...], Pads]:
        refs: set[str] = set()
        parts: list[Part] = []
        pins = _Pins()
        for path, entry in self.tree.entries("parts", "parts"):
            members = self.document.members(entry, path, _PART, "ref and pins")
            ref = members.text("ref")
            if ref in refs:
                raise self.document.fault((path, "ref"), ref, "choose another; another part has this ref")
            refs.add(ref)
            side = "" if members.get("side") is None else members.choice("side", SIDES)
            parts.append(
                Part(ref=ref, value=members.text_or_empty("value"), package=members.text_or_empty("package"), side=side)
            )
            for place, pin in members.entries("pins", "pins"):
                self._pin(self.document.members(pin, place, _PIN, "pin, net, at and layer"), len(parts) - 1, pins)
        return tuple(parts), pins.pads()

    def _pin(self, members: Members, part: int, pins: _Pins) -> None:
        at = self.ruler.point(members.need("at", "give the pin's place as [x, y]"), (members.path, "at"))
        layer = self._layer(members, "layer", all_too=True)
        drill = self.ruler.length(members, "drill")
        if layer == -1 and drill is None:
            raise self.document.absent(
                (members.path, "drill"), 'a pin on layer "all" is a plated hole; give its diameter'
            )
        shape, rotation, mirror = None, 0.0, False
        if members.get("pad") is not None:
            shape, rotation, mirror = self._pad(
                self.document.members(members.get("pad"), (members.path, "pad"), _PAD, "shape and size")
            )
        pins.net.append(self._net(members.get("net"), (members.path, "net")))
        pins.pin.append(members.text("pin", "give the pin's name in quotes"))
        pins.part.append(part)
        pins.at.append(at)
        pins.layer.append(layer)
        pins.drill.append(math.nan if drill is None else drill)
        pins.shape.append(-1 if shape is None else pins.shapes.setdefault(shape, len(pins.shapes)))
        pins.rotation.append(rotation)
        pins.mirror.append(mirror)

    def _pad(self, members: Members) -> tuple[PadShape, float, bool]:
        kind = members.choice("shape", PAD_SHAPES)
        turn = members.number("rotation", least=-360.0, most=360.0, remedy="give degrees from -360 to 360")
        path = members.path
        radius = 0.0
        points: tuple[Point, ...] = ()
        if kind == "polygon":
            ring = self.ruler.ring(members.need("points", "give the pad's outline about its centre"), (path, "points"))
            self._refuse_knots([(ring, (path, "points"))])
            points = tuple((float(x), float(y)) for x, y in ring)
            size = (float(np.ptp(ring[:, 0])), float(np.ptp(ring[:, 1])))
        else:
            size = self._size(members.need("size", "give width and height as [w, h]"), (path, "size"), kind)
        if kind == "round_rect":
            members.need("radius", "give the corners' radius")
            radius = self.ruler.length(members, "radius", zero=True) or 0.0
            if radius > min(size) / 2:
                raise self.document.fault((path, "radius"), members.get("radius"), "give at most half the smaller side")
        return (
            PadShape(kind=kind, size=size, radius=radius, points=points),
            math.radians(turn or 0.0),
            members.flag("mirror"),
        )

    def _size(self, value: object, path: Path, kind: str) -> tuple[float, float]:
        if kind == "circle" and type(value) is float:
            value = [value, value]
        if type(value) is not list or len(value) != 2:
            raise self.document.fault(path, value, "give width and height as [w, h]")
        width, height = self.ruler.size(value[0], (path, 0)), self.ruler.size(value[1], (path, 1))
        if kind == "circle" and width != height:
            raise self.document.fault((path, 1), value[1], f'give {show(value[0])} as well, or the shape "oval"')
        return width, height

    def _tracks(self) -> Tracks:
        pieces: list[Piece] = []
        counts: list[int] = []
        width: list[float] = []
        layer: list[int] = []
        net: list[int] = []
        for path, entry in self.tree.entries("tracks", "tracks"):
            members = self.document.members(entry, path, _TRACK, "net, layer, width and points")
            net.append(self._net(members.get("net"), (path, "net")))
            layer.append(self._layer(members, "layer"))
            width.append(self.ruler.width(members.need("width", "give the track's width"), (path, "width")))
            before = len(pieces)
            pieces += self.ruler.pieces(members.need("points", "give two points or more"), (path, "points"))
            counts.append(len(pieces) - before)
        start, end, centre, sweep = zip(*pieces, strict=True) if pieces else ((), (), (), ())
        return Tracks(
            start=np.array(start),
            end=np.array(end),
            centre=np.array(centre),
            sweep=np.array(sweep),
            width=np.repeat(width, counts),
            layer=np.repeat(layer, counts),
            net=np.repeat(net, counts),
        )

    def _vias(self) -> Vias:
        at: list[Point] = []
        ends: list[tuple[int, int]] = []
        sizes: list[tuple[float, float, float]] = []
        net: list[int] = []
        for path, entry in self.tree.entries("vias", "vias"):
            members = self.document.members(entry, path, _VIA, "net, at, from, to and drill")
            net.append(self._net(members.get("net"), (path, "net")))
            at.append(self.ruler.point(members.need("at", "give the via's place as [x, y]"), (path, "at")))
            first, last = self._layer(members, "from"), self._layer(members, "to")
            ends.append((min(first, last), max(first, last)))
            drill = self.ruler.size(members.need("drill", "give the hole's diameter"), (path, "drill"))
            pad, antipad = self.ruler.length(members, "pad"), self.ruler.length(members, "antipad")
            sizes.append((drill, math.nan if pad is None else pad, math.nan if antipad is None else antipad))
        spans = np.array(ends, dtype=np.int64).reshape(-1, 2)
        diameters = np.array(sizes, dtype=np.float64).reshape(-1, 3)
        return Vias(
            at=np.array(at),
            first=spans[:, 0],
            last=spans[:, 1],
            drill=diameters[:, 0],
            pad=diameters[:, 1],
            antipad=diameters[:, 2],
            net=np.array(net),
        )

    def _areas(self) -> list[Area]:
        areas: list[Area] = []
        paths: list[Path] = []
        for path, entry in self.tree.entries("areas", "areas"):
            members = self.document.members(entry, path, _AREA, "net, layer and outline")
            net, layer = self._net(members.get("net"), (path, "net")), self._layer(members, "layer")
            outline = self.ruler.ring(members.need("outline", "give three points or more"), (path, "outline"))
            paths.append(path)
            holes = tuple(self.ruler.ring(hole, place) for place, hole in members.entries("holes", "outlines"))
            areas.append(Area(net=net, layer=layer, outline=outline, holes=holes))
        self._refuse_knots([(row.outline, path) for row, path in zip(areas, paths, strict=True)])
        self._refuse_knots([(hole, path) for row, path in zip(areas, paths, strict=True) for hole in row.holes])
        for place, _, _ in crossing_rings([area.outline for area in areas]):
            self.document.note(
                "crosses or touches itself and is read by what its lines enclose", (paths[place], "outline")
            )
        return areas

    def _refuse_knots(self, rings: list[tuple[Floats, Path]]) -> None:
        place = knotted([ring for ring, _ in rings])
        if place >= 0:
            found = f"has an outline that crosses itself more than {MOST_CROSSINGS} times"
            raise self.document.misfit(rings[place][1], found, "draw it around its copper")

    def _kinds(self) -> dict[str, str]:
        kinds: dict[str, str] = {}
        for path, entry in self.tree.entries("nets", "nets"):
            members = self.document.members(entry, path, _NET, "name and kind")
            name = members.text("name")
            if name in kinds:
                raise self.document.fault((path, "name"), name, "keep one of the two entries of this net")
            kinds[name] = "" if members.get("kind") is None else members.choice("kind", NET_KINDS)
            self.nets.setdefault(name, len(self.nets))
        return kinds

    def _pairs(self, drawn: frozenset[str], refs: frozenset[str]) -> tuple[DeclaredPair, ...]:
        pairs: list[DeclaredPair] = []
        for path, entry in self.tree.entries("pairs", "pairs"):
            members = self.document.members(entry, path, _PAIR, "plus and minus")
            legs = {key: members.text(key, "give the net's name in quotes") for key in ("plus", "minus")}
            if legs["plus"] == legs["minus"]:
                raise self.document.fault((path, "minus"), legs["minus"], "give another net than plus")
            for key, net in legs.items():
                if net not in drawn:
                    self.nets.setdefault(net, len(self.nets))
                    self.missing.append(
                        f"{written((path, key))} is {show(net)}, a net without a pin or copper in the file"
                    )
            ends = {key: members.text_or_empty(key) for key in ("source", "load")}
            for key, ref in ends.items():
                if ref and ref not in refs:
                    raise self.document.fault((path, key), ref, "give the ref of a part in the file")
            pairs.append(
                DeclaredPair(name=members.text_or_empty("name"), klass=members.text_or_empty("class"), **legs, **ends)
            )
        return tuple(pairs)

    def _tell_of_unknown(self) -> None:
        kinds = sorted(self.document.unknown.items())
        for kind, count in kinds[:_KINDS_TOLD]:
            times = "" if count == 1 else f" ({count} times)"
            self.missing.append(f"{kind}{times} is not understood and was left out")
        if len(kinds) > _KINDS_TOLD:
            rest = len(kinds) - _KINDS_TOLD
            self.missing.append(f"members of {rest} more names are not understood and were left out")
        self.missing += self.document.noted()
        if self.document.cleaned:
            texts = "text" if self.document.cleaned == 1 else "texts"
            self.missing.append(f"unprintable characters were taken out of {self.document.cleaned} {texts}")


@dataclass(slots=True)
class _Pins:
    """Columns of the pads while they grow."""

    at: list[Point] = field(default_factory=list)
    layer: list[int] = field(default_factory=list)
    net: list[int] = field(default_factory=list)
    part: list[int] = field(default_factory=list)
    pin: list[str] = field(default_factory=list)
    shape: list[int] = field(default_factory=list)
    rotation: list[float] = field(default_factory=list)
    mirror: list[bool] = field(default_factory=list)
    drill: list[float] = field(default_factory=list)
    shapes: dict[PadShape, int] = field(default_factory=dict)

    def pads(self) -> Pads:
        return Pads(
            at=np.array(self.at),
            layer=np.array(self.layer),
            net=np.array(self.net),
            part=np.array(self.part),
            pin=tuple(self.pin),
            shape=np.array(self.shape),
            rotation=np.array(self.rotation),
            mirror=np.array(self.mirror),
            drill=np.array(self.drill),
            shapes=tuple(self.shapes),
        )


READER = Reader(summary="Plain JSON board", recognises=recognises, read=read)
