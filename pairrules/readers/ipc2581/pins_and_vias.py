"""Pads and holes put together: which hole is a pin's, which is a via, which pads are a via's own."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

from pairrules.errors import BoardError
from pairrules.readers.ipc2581.copper import Copper, HoleRow, PadRow
from pairrules.readers.ipc2581.layers import FileLayer, LayerTable
from pairrules.readers.ipc2581.nets import Nets
from pairrules.readers.ipc2581.parts import Parts
from pairrules.readers.ipc2581.places import Places
from pairrules.readers.ipc2581.remarks import Remarks
from pairrules.readers.ipc2581.transform import Transform

ALL_LAYERS = -1


@dataclass(frozen=True, slots=True)
class JoinedPad:
    """A pad as the board holds it. layer: index of the copper layer, −1 for all. drill: [mm], NaN where none."""

    row: PadRow
    layer: int
    drill: float


@dataclass(frozen=True, slots=True)
class JoinedVia:
    """A via as the board holds it; lengths NaN where unknown [mm]."""

    at: complex
    first: int
    last: int
    drill: float
    pad: float
    antipad: float
    net: str


def place_pins(copper: Copper, parts: Parts, nets: Nets, table: LayerTable, most: int) -> None:
    """Give pins to pads that name none, and pads to pins that have none, by package and placement of their part.

    most: pins the board may have; many parts of one huge package would keep a small file busy without end.
    """
    known = {(pad.ref, pad.pin) for pad in copper.pads if pad.pin}
    loose: Places[PadRow] = Places()
    asked = sum(len(parts.packages.get(component.package, {})) for component in parts.components.values())
    if asked > most:
        raise BoardError(f"the parts have more than {most} pins", remedy="export the file again")
    for pad in copper.pads:
        if not pad.pin and not pad.via:
            loose.put(pad.at, pad)
    for component in parts.components.values():
        for pin, package_pin in parts.packages.get(component.package, {}).items():
            if (component.ref, pin) in known:
                continue
            by = package_pin.by.then(component.by)
            net = nets.pins.get((component.ref, pin), "")
            found = [
                pad
                for pad in loose.near(by.shift)
                if not pad.pin
                and (package_pin.through or pad.layer == component.layer)
                and (not net or pad.net in {"", net})
            ]
            for pad in found:
                pad.ref, pad.pin, pad.net = component.ref, pin, pad.net or net
            if not found and net and _is_copper(table, component.layer):
                order = copper.next()
                way = Transform(by.turn, by.flip)
                copper.pads.append(
                    PadRow(by.shift, way, component.layer, net, component.ref, pin, package_pin.shape, "", False, order)
                )


def _is_copper(table: LayerTable, name: str) -> bool:
    layer: FileLayer | None = table.layers.get(name)
    return layer is not None and layer.copper


def join(copper: Copper, names: tuple[str, ...], remarks: Remarks) -> tuple[list[JoinedPad], list[JoinedVia]]:
    """Pads and vias of the board. names: the copper layers, top first."""
    index = {name: i for i, name in enumerate(names)}
    rows = copper.pads
    places: Places[int] = Places()
    for place, pad in enumerate(rows):
        places.put(pad.at, place)
    taken = bytearray(len(rows))
    joined: list[tuple[int, JoinedPad]] = []
    vias: list[tuple[int, JoinedVia]] = []
    seen: set[tuple[float, float, int, int, str]] = set()
    drilled = _drilled_out(copper.holes, index)
    shortened = 0
    for hole in copper.holes:
        if hole.plating == "NONPLATED":
            continue
        whole = _span(hole, index, len(names))
        first, last = _what_remains(whole, drilled.near(hole.at))
        shortened += (first, last) != whole
        if first > last:
            continue
        key = (round(hole.at.real, 3), round(hole.at.imag, 3), first, last, hole.net)
        if key in seen:
            continue
        seen.add(key)
        drill = hole.diameter if hole.diameter > 0 else math.nan
        here = [place for place in places.near(hole.at) if not taken[place]]
        here = [place for place in here if _same_net(rows[place], hole) and first <= index[rows[place].layer] <= last]
        pins = [rows[place] for place in here if rows[place].pin]
        if pins and hole.plating == "PLATED" and (first, last) == (0, len(names) - 1):
            owners = sorted({(pad.ref, pad.pin) for pad in pins})
            for place in here:
                taken[place] = True
            for owner in owners:
                own = [pad for pad in pins if (pad.ref, pad.pin) == owner]
                top = min(own, key=lambda pad: (index[pad.layer], pad.order))
                named = replace(top, net=top.net or hole.net)
                joined.append((top.order, JoinedPad(named, ALL_LAYERS, drill)))
            continue
        bare = [place for place in here if not rows[place].pin]
        for place in bare:
            taken[place] = True
        vias.append((hole.order, _via(hole, [rows[place] for place in bare], copper, (first, last), drill)))
    remarks.count("{n} plated hole{s} {are} shortened by back-drilling", shortened)
    left = [pad for pad, gone in zip(rows, taken, strict=True) if not gone]
    joined += [(pad.order, JoinedPad(pad, index[pad.layer], math.nan)) for pad in left if not pad.via]
    vias += _vias_without_holes([pad for pad in left if pad.via], index, copper, remarks)
    joined.sort(key=lambda row: row[0])
    vias.sort(key=lambda row: row[0])
    return [pad for _, pad in joined], [via for _, via in vias]


def _drilled_out(holes: list[HoleRow], index: dict[str, int]) -> Places[tuple[int, int]]:
    """Where holes without plating go through some of the layers only: drilled after plating, they take the barrel away.

    From memory of the standard and of the trade: back-drilling is a drill layer of its own whose span ends inside.
    """
    found: Places[tuple[int, int]] = Places()
    for hole in holes:
        ends = [index[name] for name in hole.span if name in index]
        if hole.plating == "NONPLATED" and len(ends) == 2 and abs(ends[0] - ends[1]) < len(index) - 1:
            found.put(hole.at, (min(ends), max(ends)))
    return found


def _what_remains(span: tuple[int, int], drilled: list[tuple[int, int]]) -> tuple[int, int]:
    """First and last layer that a barrel still joins; the last before the first where nothing remains."""
    first, last = span
    for low, high in drilled:
        if low <= first:
            first = max(first, high + 1)
        elif high >= last:
            last = min(last, low - 1)
    return first, last


def _same_net(pad: PadRow, hole: HoleRow) -> bool:
    return not hole.net or not pad.net or pad.net == hole.net


def _span(hole: HoleRow, index: dict[str, int], count: int) -> tuple[int, int]:
    """The layers a hole joins; an end that is not said, or not in the file, is the board's outer layer."""
    first = index.get(hole.span[0], 0)
    last = index.get(hole.span[1], count - 1)
    return min(first, last), max(first, last)


def _via(hole: HoleRow, pads: list[PadRow], copper: Copper, span: tuple[int, int], drill: float) -> JoinedVia:
    alike = {(id(pad.shape), id(pad.way)): pad for pad in pads}  # mostly one shape on all layers
    known = [size for pad in alike.values() if (size := pad.smallest_mm) is not None]
    names = {hole.stack, *(pad.stack for pad in pads)}
    stacks = [copper.stacks[name] for name in names if name in copper.stacks]
    regular = [stack.pad_mm for stack in stacks if stack.pad_mm is not None]
    antipads = [stack.antipad_mm for stack in stacks if stack.antipad_mm is not None]
    net = hole.net or next((pad.net for pad in pads if pad.net), "")
    pad = max(known or regular, default=math.nan)
    return JoinedVia(hole.at, *span, drill, pad, max(antipads, default=math.nan), net)


def _vias_without_holes(
    pads: list[PadRow], index: dict[str, int], copper: Copper, remarks: Remarks
) -> list[tuple[int, JoinedVia]]:
    """Pads marked as a via's where no hole is drilled: the via is there, its drill unknown."""
    groups: Places[list[PadRow]] = Places()
    found: list[list[PadRow]] = []
    for pad in pads:
        group = next((group for group in groups.near(pad.at) if group[0].net == pad.net), None)
        if group is None:
            group = []
            groups.put(pad.at, group)
            found.append(group)
        group.append(pad)
    vias = []
    for group in found:
        layers = [index[pad.layer] for pad in group]
        bare = HoleRow(group[0].at, math.nan, "VIA", group[0].net, ("", ""), "", group[0].order)
        vias.append((bare.order, _via(bare, group, copper, (min(layers), max(layers)), math.nan)))
    remarks.count("{n} via{s} {were} found by pads alone; no hole is drilled there in the file", len(vias))
    return vias
