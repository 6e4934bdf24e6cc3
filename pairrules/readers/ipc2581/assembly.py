"""From what was read to a `Board`: the step chosen, polarity obeyed, pads and holes joined, names turned to indices."""

from __future__ import annotations

import math

import numpy as np

from pairrules.board import Area, Board, Pads, PadShape, Tracks, Vias
from pairrules.board.columns import Floats
from pairrules.board.crossing_rings import crossing_rings
from pairrules.board.knots import MOST_CROSSINGS, knotted
from pairrules.errors import BoardError
from pairrules.readers.ipc2581 import mirrors, polarity
from pairrules.readers.ipc2581.completeness import complete
from pairrules.readers.ipc2581.copper import Copper, FillRow
from pairrules.readers.ipc2581.drawing import Fill, Item
from pairrules.readers.ipc2581.elements import FARTHEST_MM, shown
from pairrules.readers.ipc2581.file_content import FileContent, Step
from pairrules.readers.ipc2581.layers import build_stackup
from pairrules.readers.ipc2581.nets import declared_pairs, name_unnamed
from pairrules.readers.ipc2581.parts import part_list
from pairrules.readers.ipc2581.pins_and_vias import JoinedPad, JoinedVia, join, place_pins
from pairrules.readers.ipc2581.primitives import signed_area
from pairrules.readers.ipc2581.remarks import Remarks
from pairrules.readers.ipc2581.transform import Plane

_FARTHEST_MM = FARTHEST_MM * math.sqrt(2)
_TOLD = 6
LEAST_MM2 = 1e-9
"""An area below this, a square of 30 nanometres, is none."""


def assemble(content: FileContent, wanted: str) -> Board:
    """The board. Raises: BoardError, without the file's name, where there is no board copper or no single board."""
    step = choose_step(content, wanted)
    remarks = Remarks({**content.remarks.counts}, {**content.remarks.lines})
    stackup = build_stackup(content.table, remarks)
    names = stackup.copper
    whole = complete(content, step, names, remarks)
    for sentence, count in step.remarks.counts.items():
        remarks.count(sentence, count, line=step.remarks.lines.get(sentence, 0))
    copper = step.copper
    _refuse_knots(copper, step)
    name_unnamed(copper, step.nets)
    mirrors.settle(copper, step.parts, remarks)
    place_pins(copper, step.parts, step.nets, content.table, content.most_pieces)
    negatives = polarity.negative_layers(copper, content.table.copper, remarks)
    polarity.invert(copper, negatives, step.profile, remarks)
    polarity.erase(copper, remarks)
    pads, vias = join(copper, names, remarks)
    nets = _net_names(step, copper, pads, vias)
    net_index = {net: i for i, net in enumerate(nets)}
    layer_index = {name: i for i, name in enumerate(names)}
    _within_ten_metres(copper, step)
    parts = part_list(step.parts, content.values, [pad.row.ref for pad in pads if pad.row.ref], content.table)
    # Of a big board rows and columns together would be the most that is ever in memory: rows go as columns come.
    copper.pads, copper.holes = [], []
    tracks = _tracks(copper, net_index, layer_index)
    copper.tracks = []
    return Board(
        name=step.name,
        format="IPC-2581",
        revision=content.revision,
        units=content.units,
        stackup=stackup,
        nets=nets,
        parts=parts,
        pads=_pads(pads, net_index, {part.ref: i for i, part in enumerate(parts)}),
        tracks=tracks,
        vias=_vias(vias, net_index),
        areas=_areas(copper.areas, net_index, layer_index, remarks),
        pairs=declared_pairs(step.nets, step.parts, set(nets), remarks),
        net_kinds=tuple(step.nets.kinds.get(net, "") for net in nets),
        net_lines=tuple(copper.net_lines.get(net, 0) for net in nets),
        outline=None if step.profile is None else _points(step.profile),
        missing=remarks.sentences(),
        complete=whole,
    )


def _within_ten_metres(copper: Copper, step: Step) -> None:
    """Refuse what lies or reaches beyond any board after all placements and scales.

    Each number of the file was within ten metres; placed one upon another, they need not be.
    """
    widths = np.array([row.width for row in copper.tracks], dtype=np.float64)
    extents: dict[tuple[int, float], float] = {}  # the few shapes at their few scales: pads by the hundred thousand
    for row in copper.pads:
        key = (id(row.shape), row.way.scale)
        if key not in extents:
            extents[key] = max(row.outline.size if row.outline else (0.0,))
    beyond = [extents[id(row.shape), row.way.scale] for row in copper.pads]
    drawn = [
        (_complex([row.start for row in copper.tracks]), widths),
        (_complex([row.end for row in copper.tracks]), widths),
        (_complex([row.centre or 0j for row in copper.tracks]), widths),
        (_complex([row.at for row in copper.pads]), np.array(beyond, dtype=np.float64)),
        (_complex([row.at for row in copper.holes]), np.zeros(len(copper.holes))),
        *((row.fill.outline, np.zeros(1)) for row in copper.areas),
    ]
    if not all((np.abs(at) + more <= _FARTHEST_MM).all() for at, more in drawn):
        raise BoardError(
            f'step "{step.name}" draws copper more than ten metres away',
            remedy="correct its placements and scales or export the file again",
        )


def _refuse_knots(copper: Copper, step: Step) -> None:
    """Refuse outlines that cross themselves too often, of areas, of what is cut out, of pads and of the board."""
    drawn: list[tuple[Item, str]] = [(row.fill, f"on {row.layer}") for row in copper.areas]
    drawn += [(row.item, f"on {row.layer}") for row in copper.erasures]
    shapes = {id(row.shape): (row.shape, f"of a pad on {row.layer}") for row in copper.pads if row.shape is not None}
    drawn += [(item, where) for shape, where in shapes.values() for item in shape.items]
    drawn += [] if step.profile is None else [(Fill(step.profile), "of the board's profile")]
    rings = [(ring, where) for item, where in drawn if isinstance(item, Fill) for ring in (item.outline, *item.holes)]
    place = knotted([_points(ring) for ring, _ in rings])
    if place >= 0:
        ring, where = rings[place]
        found = f"an outline {where} at ({ring[0].real:.3f}, {ring[0].imag:.3f}) mm crosses itself"
        raise BoardError(f"{found} more than {MOST_CROSSINGS} times", remedy="draw it around its copper")


def choose_step(content: FileContent, wanted: str) -> Step:
    """The step to check: the one asked for, else the only one with copper, panels that repeat others left aside."""
    held = {name: step for name, step in content.steps.items() if step.copper}
    if wanted:
        if wanted in content.steps and wanted not in held:
            raise BoardError(f'step "{wanted}" holds no board copper', remedy=_choices(held))
        if wanted not in held:
            raise BoardError(f'the file has no step "{wanted}"', remedy=_choices(held))
        return held[wanted]
    boards = {name: step for name, step in held.items() if not step.repeats} or held
    if len(boards) > 1:
        names = _some(boards)
        raise BoardError(f"the file holds {len(boards)} boards: {names}", remedy="say which one with --step NAME")
    if not boards or not content.table.copper:
        modes = f" (it was written for {', '.join(content.modes)})" if any(content.modes) else ""
        raise BoardError(f"the file holds no board copper{modes}", remedy="export the board with its copper layers")
    return next(iter(boards.values()))


def _choices(held: dict[str, Step]) -> str:
    return f"choose one of: {_some(held)}" if held else "export the board with its copper layers"


def _some(names: dict[str, Step]) -> str:
    """The first of the names, since a file may hold thousands."""
    told = [shown(name) for name in list(names)[:_TOLD]]
    return ", ".join(told) + (f" and {len(names) - _TOLD} more" if len(names) > _TOLD else "")


def _net_names(step: Step, copper: Copper, pads: list[JoinedPad], vias: list[JoinedVia]) -> tuple[str, ...]:
    names = set(step.nets.names)
    names.update(row.net for row in copper.tracks)
    names.update(row.net for row in copper.areas)
    names.update(pad.row.net for pad in pads)
    names.update(via.net for via in vias)
    names.discard("")
    return tuple(sorted(names))


def _points(plane: Plane) -> Floats:
    return np.ascontiguousarray(plane).view(np.float64).reshape(-1, 2)


def _complex(values: list[complex]) -> Plane:
    return np.array(values, dtype=np.complex128)


def _pairs(values: list[complex]) -> Floats:
    return _points(_complex(values))


def _tracks(copper: Copper, nets: dict[str, int], layers: dict[str, int]) -> Tracks:
    rows = copper.tracks
    nowhere = complex(np.nan, np.nan)
    return Tracks(
        start=_pairs([row.start for row in rows]),
        end=_pairs([row.end for row in rows]),
        centre=_pairs([nowhere if row.centre is None else row.centre for row in rows]),
        sweep=np.array([row.sweep for row in rows], dtype=np.float64),
        width=np.array([row.width for row in rows], dtype=np.float64),
        layer=np.array([layers[row.layer] for row in rows], dtype=np.int64),
        net=np.array([nets.get(row.net, -1) for row in rows], dtype=np.int64),
    )


def _pads(pads: list[JoinedPad], nets: dict[str, int], parts: dict[str, int]) -> Pads:
    """Pads as columns. A scaled shape is drawn at its scale."""
    shapes: dict[PadShape, int] = {}
    rows: list[int] = []
    for pad in pads:
        shape = pad.row.outline
        rows.append(-1 if shape is None else shapes.setdefault(shape, len(shapes)))
    return Pads(
        at=_pairs([pad.row.at for pad in pads]),
        layer=np.array([pad.layer for pad in pads], dtype=np.int64),
        net=np.array([nets.get(pad.row.net, -1) for pad in pads], dtype=np.int64),
        part=np.array([parts.get(pad.row.ref, -1) for pad in pads], dtype=np.int64),
        pin=tuple(pad.row.pin for pad in pads),
        shape=np.array(rows, dtype=np.int64),
        rotation=np.array([pad.row.way.angle for pad in pads], dtype=np.float64),
        mirror=np.array([pad.row.way.flip for pad in pads], dtype=np.bool_),
        drill=np.array([pad.drill for pad in pads], dtype=np.float64),
        shapes=tuple(shapes),
    )


def _vias(vias: list[JoinedVia], nets: dict[str, int]) -> Vias:
    return Vias(
        at=_pairs([via.at for via in vias]),
        first=np.array([via.first for via in vias], dtype=np.int64),
        last=np.array([via.last for via in vias], dtype=np.int64),
        drill=np.array([via.drill for via in vias], dtype=np.float64),
        pad=np.array([via.pad for via in vias], dtype=np.float64),
        antipad=np.array([via.antipad for via in vias], dtype=np.float64),
        net=np.array([nets.get(via.net, -1) for via in vias], dtype=np.int64),
    )


def _areas(rows: list[FillRow], nets: dict[str, int], layers: dict[str, int], remarks: Remarks) -> tuple[Area, ...]:
    """Areas, each taken out of its rows as it is made."""
    areas: list[Area] = []
    rows.reverse()
    while rows:
        row = rows.pop()
        # Loops of a line that crosses itself may cancel in the signed area, and enclose copper all the same.
        flat = len(row.fill.outline) < 3 or abs(signed_area(row.fill.outline)) < LEAST_MM2
        if flat and (len(row.fill.outline) < 3 or row.fill.region().area < LEAST_MM2):
            remarks.count("{n} area{s} without extent {are} left out")
            continue
        holes = tuple(_points(hole) for hole in row.fill.holes if len(hole) > 2)
        areas.append(
            Area(
                net=nets.get(row.net, -1),
                layer=layers[row.layer],
                outline=_points(row.fill.outline),
                holes=holes,
                hatched=row.fill.hatched,
            )
        )
    crossing = crossing_rings([area.outline for area in areas])
    if crossing:
        place, x, y = crossing[0]
        name = next(name for name, index in layers.items() if index == areas[place].layer)
        where = f"on {name} at ({x:.3f}, {y:.3f}) mm"
        remarks.count(
            f"{{n}} outline{{s}} whose lines cross or touch {{are}} read by what they enclose, the first {where}",
            len(crossing),
        )
    return tuple(areas)
