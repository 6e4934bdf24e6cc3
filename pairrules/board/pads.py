"""Parts and their pads. Pads are columns; the few different shapes are kept once each."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.board.columns import Bools, Floats, Ints, freeze


@dataclass(frozen=True, slots=True, kw_only=True)
class Part:
    """A part placed on the board. `value` and `package` are "" and `side` is "" where the file does not say.

    Parameters
    ----------
    ref: reference designator, unique on the board.
    value: as written ("100k", "0.1uF").
    side: "top", "bottom" or "".
    """

    ref: str
    value: str = ""
    package: str = ""
    side: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class PadShape:
    """The outline of a pad about its own centre, before rotation and mirror.

    Parameters
    ----------
    kind: "rect", "circle", "oval", "round_rect" or "polygon".
    size: width and height [mm]; of a circle the diameter twice; of a polygon its bounding size.
    radius: corner radius of a "round_rect" [mm].
    points: outline of a "polygon" [mm], not closed; empty otherwise.
    """

    kind: str
    size: tuple[float, float]
    radius: float = 0.0
    points: tuple[tuple[float, float], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Pads:
    """Pads as columns of k rows, one row a pin's copper on one layer.

    A pin in a plated hole is one row with `layer` −1 (it touches every copper layer).

    Parameters
    ----------
    at: (k, 2) [mm] pad centre.
    layer: (k,) index into `Board.copper`, −1 for all.
    net: (k,) index into `Board.nets`, −1 for none.
    part: (k,) index into `Board.parts`, −1 where the pad belongs to no part (a fiducial, a loose pad).
    pin: k pin names, "" where none.
    shape: (k,) index into `shapes`, −1 where the file gives no shape.
    rotation: (k,) [rad] counter-clockwise. mirror: (k,) flipped in x before it is rotated.
    drill: (k,) [mm]; NaN where the pad has no hole.
    """

    at: Floats
    layer: Ints
    net: Ints
    part: Ints
    pin: tuple[str, ...]
    shape: Ints
    rotation: Floats
    mirror: Bools
    drill: Floats
    shapes: tuple[PadShape, ...]

    def __post_init__(self) -> None:
        freeze(
            self,
            {
                "at": (np.float64, (2,)),
                "layer": (np.int64, ()),
                "net": (np.int64, ()),
                "part": (np.int64, ()),
                "shape": (np.int64, ()),
                "rotation": (np.float64, ()),
                "mirror": (np.bool_, ()),
                "drill": (np.float64, ()),
            },
        )
        if len(self.pin) != len(self.net):
            raise ValueError(f"Pads.pin has {len(self.pin)} rows, {len(self.net)} are needed")

    def __len__(self) -> int:
        return len(self.net)
