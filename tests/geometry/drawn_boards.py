"""Boards of a few shapes for the tests of geometry, built in code."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from pairrules.board import Area, Board, Layer, Pads, PadShape, Part, Stackup, Tracks, Vias

NETS = ("GAUGE_N", "GAUGE_P", "GND", "HEATER", "PUMP")
GAUGE_N, GAUGE_P, GND, HEATER, PUMP = range(5)


def track(
    net: int,
    start: tuple[float, float],
    end: tuple[float, float],
    *,
    layer: int = 0,
    width: float = 0.2,
    centre: tuple[float, float] = (math.nan, math.nan),
    sweep: float = 0.0,
) -> tuple[object, ...]:
    return start, end, centre, sweep, width, layer, net


def box(
    net: int, layer: int, x0: float, y0: float, x1: float, y1: float, *holes: Sequence[tuple[float, float]]
) -> Area:
    outline = np.array([(x0, y0), (x1, y0), (x1, y1), (x0, y1)], dtype=np.float64)
    return Area(net=net, layer=layer, outline=outline, holes=tuple(np.array(h, dtype=np.float64) for h in holes))


def board(
    *,
    copper: tuple[str, ...] = ("TOP", "INNER", "BOTTOM"),
    areas: Sequence[Area] = (),
    tracks: Sequence[tuple[object, ...]] = (),
    pads: Sequence[tuple[int, int, tuple[float, float], PadShape | None]] = (),
    vias: Sequence[tuple[int, tuple[float, float], int, int, float]] = (),
    complete: bool = True,
) -> Board:
    """A board; pads as (net, layer, at, shape), vias as (net, at, first, last, pad diameter)."""
    columns = list(zip(*tracks, strict=True)) or [()] * 7
    shapes = [shape for *_, shape in pads if shape is not None]
    return Board(
        name="tide gauge",
        format="plain JSON",
        revision="1",
        units="mm",
        stackup=Stackup(layers=tuple(Layer(name=name, kind="copper") for name in copper)),
        nets=NETS,
        parts=(Part(ref="U1"),),
        pads=Pads(
            at=np.array([at for _, _, at, _ in pads], dtype=np.float64),
            layer=np.array([layer for _, layer, _, _ in pads], dtype=np.int64),
            net=np.array([net for net, *_ in pads], dtype=np.int64),
            part=np.zeros(len(pads), dtype=np.int64),
            pin=tuple(str(n) for n in range(len(pads))),
            shape=np.array([-1 if s is None else shapes.index(s) for *_, s in pads], dtype=np.int64),
            rotation=np.zeros(len(pads)),
            mirror=np.zeros(len(pads), dtype=np.bool_),
            drill=np.full(len(pads), np.nan),
            shapes=tuple(shapes),
        ),
        tracks=Tracks(
            **dict(zip(("start", "end", "centre", "sweep", "width", "layer", "net"), columns, strict=True))  # type: ignore[arg-type]
        ),
        vias=Vias(
            at=np.array([at for _, at, *_ in vias], dtype=np.float64),
            first=np.array([first for _, _, first, _, _ in vias], dtype=np.int64),
            last=np.array([last for _, _, _, last, _ in vias], dtype=np.int64),
            drill=np.full(len(vias), np.nan),
            pad=np.array([pad for *_, pad in vias], dtype=np.float64),
            antipad=np.full(len(vias), np.nan),
            net=np.array([net for net, *_ in vias], dtype=np.int64),
        ),
        areas=tuple(areas),
        complete=complete,
    )
