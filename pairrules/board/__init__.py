"""The board as read from a file: frozen records, millimetres, y upward, angles counter-clockwise in radians."""

from pairrules.board.areas import Area
from pairrules.board.board import Board, DeclaredPair
from pairrules.board.pads import Pads, PadShape, Part
from pairrules.board.stackup import Layer, Stackup
from pairrules.board.tracks import Tracks
from pairrules.board.vias import Vias

__all__ = ["Area", "Board", "DeclaredPair", "Layer", "PadShape", "Pads", "Part", "Stackup", "Tracks", "Vias"]
