"""A drawing made in code, for the tests of pictures."""

from __future__ import annotations

import math
from dataclasses import replace

from pairrules.drawing import (
    Drawing,
    DrawnCopper,
    DrawnOpening,
    DrawnPad,
    DrawnPart,
    DrawnPiece,
    DrawnPlace,
    DrawnShape,
    DrawnVia,
    PairDrawing,
    Point,
)
from pairrules.result import PairResult, Result
from tests.reports.results import finding, pair, result


def box(x0: float, y0: float, x1: float, y1: float) -> DrawnShape:
    return DrawnShape(outline=((x0, y0), (x1, y0), (x1, y1), (x0, y1)))


def piece(start: Point, end: Point, *, centre: Point | None = None, sweep: float = 0.0, layer: int = 0) -> DrawnPiece:
    length = math.dist(start, end) if centre is None else abs(sweep) * math.dist(start, centre)
    return DrawnPiece(
        kind="track",
        start=start,
        end=end,
        centre=centre,
        sweep_rad=sweep,
        width_mm=0.2,
        layer=layer,
        length_mm=length,
        along_mm=0.0,
    )


def drawing(name: str) -> PairDrawing:
    """Plus straight from (0, 0) to (10, 0), minus a millimetre above it with a quarter turn at its end."""
    return PairDrawing(
        window=(-1.0, -1.0, 12.0, 4.0),
        plus=(piece((0.0, 0.0), (10.0, 0.0)),),
        minus=(
            piece((0.0, 1.0), (9.0, 1.0)),
            piece((9.0, 1.0), (10.0, 2.0), centre=(9.0, 2.0), sweep=math.pi / 2),
        ),
        copper=(
            DrawnCopper(layer=0, net=name, role="plus", shapes=(box(0.0, -0.1, 10.0, 0.1),)),
            DrawnCopper(layer=0, net=name, role="minus", shapes=(box(0.0, 0.9, 9.0, 1.1),)),
            DrawnCopper(layer=0, net=name, role="neighbour", shapes=(box(0.0, 3.0, 12.0, 3.2),)),
        ),
        openings=(DrawnOpening(layer=1, of=(0,), shapes=(box(4.0, -1.0, 5.0, 4.0),)),),
        unknown_layers=(),
        vias=(DrawnVia(at=(10.0, 0.0), first=0, last=1, pad_mm=0.6, drill_mm=0.3, net=name, role="plus", used=True),),
        parts=(
            DrawnPart(
                ref=name,
                value=name,
                role="source",
                side="top",
                outline=((-0.5, -0.5), (0.5, -0.5), (0.5, 1.5), (-0.5, 1.5)),
                pads=(
                    DrawnPad(
                        pin="1", net=name, leg="plus", layer=0, at=(0.0, 0.0), shapes=(box(-0.4, -0.2, 0.4, 0.2),)
                    ),
                ),
            ),
        ),
        places=(DrawnPlace(number=1, layer=0, at=(5.0, 0.0)),),
    )


def drawn(name: str = "IN") -> tuple[Result, PairResult]:
    """A result with one pair of that name, and the pair."""
    one = pair(name, verdict="flag", findings=(finding(message=f"{name} is longer"),), plus=name, minus=name)
    one = replace(one, drawing=drawing(name))
    board = Drawing(layers=(name, f"{name}2"), outline=(), extent=(-1.0, -1.0, 12.0, 4.0), units="mm")
    return replace(result(one, file=name), drawing=board), one
