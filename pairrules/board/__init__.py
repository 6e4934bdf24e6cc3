"""The board as read from a file: frozen records, millimetres, y upward, angles counter-clockwise in radians.

The records are looked up when first used, so that units and coordinates cost no numerical library.
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from pairrules.board.areas import Area as Area
    from pairrules.board.board import Board as Board
    from pairrules.board.board import DeclaredPair as DeclaredPair
    from pairrules.board.pads import Pads as Pads
    from pairrules.board.pads import PadShape as PadShape
    from pairrules.board.pads import Part as Part
    from pairrules.board.stackup import Layer as Layer
    from pairrules.board.stackup import Stackup as Stackup
    from pairrules.board.tracks import Tracks as Tracks
    from pairrules.board.vias import Vias as Vias

_HOMES = {
    "Area": "areas",
    "Board": "board",
    "DeclaredPair": "board",
    "Layer": "stackup",
    "PadShape": "pads",
    "Pads": "pads",
    "Part": "pads",
    "Stackup": "stackup",
    "Tracks": "tracks",
    "Vias": "vias",
}
__all__ = list(_HOMES)


def __getattr__(name: str) -> Any:
    if name in _HOMES:
        return getattr(importlib.import_module(f"{__name__}.{_HOMES[name]}"), name)
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
