"""Big IPC-2581 boards for the benchmarks: pairs in cells on a grid, background nets, planes with a void at every via.

The same seed gives the same bytes. Cells are drawn once as a few templates and written layer by layer as text, so that
memory stays small whatever the size. Density is the same for any number of pairs; about 150 kB of file go to a pair.

    python -m tests.bench.big_board --pairs 400 --output big.xml
"""

from __future__ import annotations

import argparse
import math
import random
from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import pairwise
from pathlib import Path
from typing import Any, TextIO

from fixtures.pair_drawing import Line, Point, detour, pair

LAYERS = ("TOP", "GND1", "IN1", "GND2", "IN2", "PWR", "GND3", "BOTTOM")
PLANES = {"GND1": "GND", "GND2": "GND", "PWR": "VCC", "GND3": "GND"}
SIGNAL = tuple(name for name in LAYERS if name not in PLANES)
WIDE, HIGH = 24.0, 9.0
"""One cell [mm]: the pair runs along its lower part, background nets along the upper one."""

TEMPLATES = 24
VIA, DRILL, ANTIPAD = 0.45, 0.2, 0.8
VOID_CORNERS = 24
_WIDTHS = {"TOP": (0.11, 0.125, 0.14), "IN1": (0.1, 0.115), "IN2": (0.1, 0.115), "BOTTOM": (0.11, 0.125)}


@dataclass
class Cell:
    """One cell about its own origin; a net is `(role, number)`, numbered within the cell."""

    tracks: list[tuple[str, str, float, Line]] = field(default_factory=list)
    vias: list[tuple[str, Point]] = field(default_factory=list)
    pads: list[tuple[str, str, str, Point, str]] = field(default_factory=list)
    """Net, part, pin, place, shape; all on top."""
    strips: list[tuple[str, tuple[float, float, float, float]]] = field(default_factory=list)


def write_board(path: Path, *, pairs: int, seed: int = 1, background: int = 12) -> None:
    """Write a board.

    Parameters: pairs: how many. background: other nets a cell, each on one signal layer between two vias.
    """
    drawn = random.Random(seed)
    cells = [_cell(drawn, background) for _ in range(TEMPLATES)]
    order = [drawn.randrange(TEMPLATES) for _ in range(pairs)]
    columns = max(1, round(math.sqrt(pairs * HIGH / WIDE)))
    placed = [(i, cells[which], i % columns * WIDE, i // columns * HIGH) for i, which in enumerate(order)]
    size = (columns * WIDE, -(-pairs // columns) * HIGH)
    with path.open("w", encoding="utf-8", newline="\n") as out:
        _document(out, placed, size)


Placed = list[tuple[int, Cell, float, float]]


def _cell(drawn: random.Random, background: int) -> Cell:
    cell = Cell()
    pitch_by = {layer: drawn.choice(_WIDTHS[layer]) for layer in SIGNAL}
    gap = drawn.choice((0.13, 0.15, 0.18))
    middle = 2.0
    stations: list[tuple[str, float]] = [("U", 1.0)]
    if drawn.random() < 0.3:
        stations.append(("C", 5.0))
    if drawn.random() < 0.5:
        stations += [("down", 8.5), ("up", 16.5)]
    stations.append(("J", WIDE - 1.0))
    layer, nets = "TOP", 0
    below = drawn.choice(SIGNAL[1:])
    for (kind, x0), (follows, x1) in pairwise(stations):
        if kind == "C":
            nets += 1
        layer = {"down": below, "up": "TOP"}.get(kind, layer)
        width = pitch_by[layer]
        start, end = _ends(kind, x0, middle, leaves=True), _ends(follows, x1, middle, leaves=False)
        bulges = follows == "J" and drawn.random() < 0.4
        radius = 0.0 if bulges else drawn.choice((0.0, 0.6))
        plus, minus = pair(_centre(drawn, x0, x1, middle), width + gap, start=start, end=end, radius=radius)
        if bulges:
            minus = detour(minus, (x1 - 2.5, middle), out=-0.25, half=drawn.choice((0.2, 0.4)))
        for leg, line in (("P", plus), ("N", minus)):
            cell.tracks.append((f"{leg}{nets}", layer, width, line))
    nets = 0
    for kind, x in stations:
        for leg, side in (("P", 1), ("N", -1)):
            _station(cell, kind, x, middle, leg, side, nets)
        nets += kind == "C"
    _background(cell, drawn, background)
    return cell


def _ends(kind: str, x: float, y: float, *, leaves: bool) -> tuple[Point, Point]:
    if kind in {"U", "J"}:
        return (x, y + 0.325), (x, y - 0.325)
    away = (0.25 if leaves else -0.25) if kind == "C" else 0.0
    return (x + away, y + 0.4), (x + away, y - 0.4)


def _centre(drawn: random.Random, x0: float, x1: float, y: float) -> list[Point]:
    """Straight, or with a jog sideways at 45 degrees."""
    first, last = x0 + 1.0, x1 - 1.0
    tail = 3.6 if x1 > WIDE - 2.0 else 1.2  # a detour needs its straight
    if last - first < tail + 3.6:
        return [(first, y), (last, y)]
    out = round(drawn.uniform(0.3, 0.9) * drawn.choice((-1, 1)), 3)
    begin = round(first + drawn.uniform(0.6, 1.2), 3)
    end = round(last - tail, 3)
    step = abs(out)
    return [(first, y), (begin, y), (begin + step, y + out), (end - step, y + out), (end, y), (last, y)]


def _station(cell: Cell, kind: str, x: float, y: float, leg: str, side: int, nets: int) -> None:
    pin = "1" if leg == "P" else "2"
    if kind in {"U", "J"}:
        cell.pads.append((f"{leg}{nets}", f"{kind}_", pin, (x, y + side * 0.325), "pin"))
    elif kind == "C":
        for terminal, away, net in (("1", -0.25, nets), ("2", 0.25, nets + 1)):
            cell.pads.append((f"{leg}{net}", f"C{pin}_", terminal, (x + away, y + side * 0.4), "chip"))
    else:
        cell.vias.append((f"{leg}{nets}", (x, y + side * 0.4)))
        cell.vias.append(("GND", (x + (-0.9 if kind == "down" else 0.9), y + side * 1.4)))


def _background(cell: Cell, drawn: random.Random, count: int) -> None:
    lanes = max(1, -(-count // 2))
    pitch = 3.9 / lanes
    for net in range(count):
        layer, y = SIGNAL[net % len(SIGNAL)], 4.6 + pitch * (net // 2)
        first, last = (1.0, 11.5) if net % 2 == 0 else (12.5, WIDE - 1.0)
        line: Line = [[first, y]]
        x = first
        while x < last - 1.2:
            x = round(x + drawn.uniform(0.6, 1.0), 3)
            line.append([x, round(y + drawn.uniform(-0.08, 0.08), 3)])
        line.append([last, y])
        cell.tracks.append((f"B{net}", layer, 0.1, line))
        cell.vias += [(f"B{net}", (first, y)), (f"B{net}", (last, y))]
        if net % 4 < 2:
            inner = last if net % 2 == 0 else first
            cell.pads.append((f"B{net}", f"R{net // 2}_", "1" if net % 2 == 0 else "2", (inner, y), "chip"))
    for layer in ("TOP", "BOTTOM"):
        cell.strips.append((layer, (0.4, 3.6, WIDE - 0.4, 4.0)))
    cell.vias += [("GND", (0.6 + 2.2 * i, 3.8)) for i in range(11)]


# -- writing ----------------------------------------------------------------------------------------------------------


def _document(out: TextIO, placed: Placed, size: Point) -> None:
    say = out.write
    say('<?xml version="1.0" encoding="UTF-8"?>\n<IPC-2581 xmlns="http://webstds.ipc.org/2581" revision="C">\n')
    say('<Content roleRef="Owner"><FunctionMode mode="USERDEF"/><StepRef name="board"/>\n')
    for layer in LAYERS:
        say(f'<LayerRef name="{layer}"/>')
    say('<LayerRef name="DRILL"/>\n<DictionaryLineDesc units="MILLIMETER">')
    widths = sorted({width for _, cell, _, _ in placed for _, _, width, _ in cell.tracks})
    for width in widths:
        say(f'<EntryLineDesc id="w{width:.4f}"><LineDesc lineEnd="ROUND" lineWidth="{width:.4f}"/></EntryLineDesc>')
    say('</DictionaryLineDesc>\n<DictionaryStandard units="MILLIMETER">')
    shapes = (("via", f'<Circle diameter="{VIA}"/>'), ("pin", '<RectCenter width="0.6" height="0.35"/>'))
    for name, shape in (*shapes, ("chip", '<RectCenter width="0.3" height="0.4"/>')):
        say(f'<EntryStandard id="{name}">{shape}</EntryStandard>')
    say("</DictionaryStandard></Content>\n")
    say('<Ecad name="Design"><CadHeader units="MILLIMETER">')
    say('<Spec name="core"><Dielectric type="DIELECTRIC_CONSTANT"><Property value="4.1"/></Dielectric>')
    say('<Dielectric type="LOSS_TANGENT"><Property value="0.015"/></Dielectric></Spec></CadHeader>\n<CadData>\n')
    _layers(say)
    say('<Step name="board">\n<Profile>')
    _polygon(say, "Polygon", [(0.0, 0.0), (size[0], 0.0), size, (0.0, size[1])])
    say("</Profile>\n")
    _parts(say, placed)
    for layer in LAYERS:
        say(f'<LayerFeature layerRef="{layer}">\n')
        if layer in PLANES:
            _plane(say, PLANES[layer], placed, size)
        _features(say, layer, placed)
        say("</LayerFeature>\n")
    say('<LayerFeature layerRef="DRILL">\n')
    for number, x0, y0, cell in _walk(placed):
        for net, (x, y) in cell.vias:
            say(f'<Set net="{_net(net, number)}"><Hole name="H" diameter="{DRILL}" platingStatus="VIA" plusTol="0"')
            say(f' minusTol="0" x="{x0 + x:.4f}" y="{y0 + y:.4f}"/></Set>\n')
    say("</LayerFeature>\n</Step></CadData></Ecad></IPC-2581>\n")


def _layers(say: Any) -> None:
    for layer in LAYERS:
        side = {"TOP": "TOP", "BOTTOM": "BOTTOM"}.get(layer, "INTERNAL")
        function = "PLANE" if layer in PLANES else "CONDUCTOR"
        say(f'<Layer name="{layer}" layerFunction="{function}" side="{side}" polarity="POSITIVE"/>\n')
    for below, _ in enumerate(LAYERS[:-1], 1):
        say(f'<Layer name="D{below}" layerFunction="DIELCORE" side="INTERNAL" polarity="POSITIVE"/>\n')
    say('<Layer name="DRILL" layerFunction="DRILL" side="ALL" polarity="POSITIVE">')
    say(f'<Span fromLayer="{LAYERS[0]}" toLayer="{LAYERS[-1]}"/></Layer>\n')
    say('<Stackup name="stack" overallThickness="1.0"><StackupGroup name="group" thickness="1.0">')
    for place, layer in enumerate(LAYERS):
        say(f'<StackupLayer layerOrGroupRef="{layer}" thickness="0.018" sequence="{2 * place + 1}"/>')
        if place + 1 < len(LAYERS):
            say(f'<StackupLayer layerOrGroupRef="D{place + 1}" thickness="0.12" sequence="{2 * place + 2}">')
            say('<SpecRef id="core"/></StackupLayer>')
    say("</StackupGroup></Stackup>\n")


def _parts(say: Any, placed: Placed) -> None:
    pins: list[tuple[str, str, str]] = []
    for number, x0, y0, cell in _walk(placed):
        for part in dict.fromkeys(part for _, part, *_ in cell.pads):
            say(f'<Component refDes="{part}{number}" part="{part[0]}" layerRef="TOP" mountType="SMT">')
            say(f'<Location x="{x0:.4f}" y="{y0:.4f}"/></Component>\n')
        pins += [(_net(net, number), f"{part}{number}", pin) for net, part, pin, _, _ in cell.pads]
    for net, part, pin in pins:
        say(f'<LogicalNet name="{net}"><PinRef componentRef="{part}" pin="{pin}"/></LogicalNet>\n')


def _features(say: Any, layer: str, placed: Placed) -> None:
    for number, x0, y0, cell in _walk(placed):
        for net, on, width, line in cell.tracks:
            if on == layer:
                say(f'<Set net="{_net(net, number)}"><Features><Polyline>')
                _steps(say, line, x0, y0)
                say(f'<LineDescRef id="w{width:.4f}"/></Polyline></Features></Set>\n')
        for on, (left, low, right, high) in cell.strips:
            if on == layer:
                say('<Set net="GND"><Features><Contour>')
                corners = [(x0 + x, y0 + y) for x, y in ((left, low), (right, low), (right, high), (left, high))]
                _polygon(say, "Polygon", corners)
                say("</Contour></Features></Set>\n")
        for net, part, pin, (x, y), shape in cell.pads if layer == "TOP" else ():
            say(f'<Set net="{_net(net, number)}"><Pad><Location x="{x0 + x:.4f}" y="{y0 + y:.4f}"/>')
            say(f'<StandardPrimitiveRef id="{shape}"/>')
            say(f'<PinRef componentRef="{part}{number}" pin="{pin}"/></Pad></Set>\n')
        for net, (x, y) in cell.vias:
            say(f'<Set net="{_net(net, number)}" padUsage="VIA"><Pad><Location x="{x0 + x:.4f}" y="{y0 + y:.4f}"/>')
            say('<StandardPrimitiveRef id="via"/></Pad></Set>\n')


def _plane(say: Any, net: str, placed: Placed, size: Point) -> None:
    say(f'<Set net="{net}"><Features><Contour>')
    edge = 0.3
    low, right, high = edge, size[0] - edge, size[1] - edge
    _polygon(say, "Polygon", [(low, low), (right, low), (right, high), (low, high)])
    for _, x0, y0, cell in _walk(placed):
        for place, (own, (x, y)) in enumerate(cell.vias):
            if own != net:
                _void(say, (x0 + x, y0 + y), arcs=place % 4 == 0)
    say("</Contour></Features></Set>\n")


def _void(say: Any, at: Point, *, arcs: bool) -> None:
    radius = ANTIPAD / 2
    if arcs:
        say(f'<Cutout><PolyBegin x="{at[0] + radius:.4f}" y="{at[1]:.4f}"/>')
        for x in (at[0] - radius, at[0] + radius):
            say(f'<PolyStepCurve x="{x:.4f}" y="{at[1]:.4f}" centerX="{at[0]:.4f}" centerY="{at[1]:.4f}"')
            say(' clockwise="false"/>')
        say("</Cutout>\n")
        return
    turns = [2 * math.pi * i / VOID_CORNERS for i in range(VOID_CORNERS)]
    _polygon(say, "Cutout", [(at[0] + radius * math.cos(t), at[1] + radius * math.sin(t)) for t in turns])


def _polygon(say: Any, tag: str, corners: list[Point]) -> None:
    say(f'<{tag}><PolyBegin x="{corners[0][0]:.4f}" y="{corners[0][1]:.4f}"/>\n')
    for x, y in (*corners[1:], corners[0]):
        say(f'<PolyStepSegment x="{x:.4f}" y="{y:.4f}"/>\n')
    say(f"</{tag}>\n")


def _steps(say: Any, line: Line, x0: float, y0: float) -> None:
    say(f'<PolyBegin x="{x0 + line[0][0]:.4f}" y="{y0 + line[0][1]:.4f}"/>\n')
    for point in line[1:]:
        if isinstance(point, dict):
            (x, y), (a, b) = point["arc_to"], point["centre"]
            turn = str(point["clockwise"]).lower()
            say(f'<PolyStepCurve x="{x0 + x:.4f}" y="{y0 + y:.4f}" centerX="{x0 + a:.4f}" centerY="{y0 + b:.4f}"')
            say(f' clockwise="{turn}"/>\n')
        else:
            say(f'<PolyStepSegment x="{x0 + point[0]:.4f}" y="{y0 + point[1]:.4f}"/>\n')


def _walk(placed: Placed) -> Iterator[tuple[int, float, float, Cell]]:
    for number, cell, x0, y0 in placed:
        yield number, x0, y0, cell


def _net(net: str, number: int) -> str:
    """`P0` of cell 7 is LINK7_P, `P1` (behind a part in series) LINK7_C_P, `B3` BACK7_3; reference nets stay."""
    if net in {"GND", "VCC"}:
        return net
    if net[0] == "B":
        return f"BACK{number}_{net[1:]}"
    return f"LINK{number}{'_C' * int(net[1:])}_{net[0]}"


def main() -> None:
    """Write a board from the command line."""
    parser = argparse.ArgumentParser(description="Write a big IPC-2581 board.")
    parser.add_argument("--pairs", type=int, default=400)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--background", type=int, default=12, help="other nets a pair")
    parser.add_argument("--output", type=Path, required=True)
    given = parser.parse_args()
    write_board(given.output, pairs=given.pairs, seed=given.seed, background=given.background)


if __name__ == "__main__":
    main()
