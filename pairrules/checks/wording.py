"""How findings write amounts, layers and places: lengths in mm, coordinates in the units of the board file."""

from __future__ import annotations

from pairrules.board.board import Board
from pairrules.board.coordinates import coordinates
from pairrules.result import Place

TOLERANCE = 1e-6
"""A limit met exactly is met: differences below a nanometre (or 1 µm²/1000) are rounding of sums, not copper."""

TIE_DIGITS = 6
"""Decimals of a length [mm] by which the worst place is chosen: of places that rounding alone tells apart the first
along the pair is told, wherever the board lies and whatever its units."""

_FEWEST, _MOST = 2, 6


def amounts(measured: float, limit: float, unit: str) -> tuple[str, str]:
    """Both numbers with their unit, with enough decimals to tell them apart and to show the limit whole."""
    digits = decimals(limit)
    while digits < _MOST and f"{measured:.{digits}f}" == f"{limit:.{digits}f}":
        digits += 1
    return f"{measured:.{digits}f} {unit}", f"{limit:.{digits}f} {unit}"


def decimals(limit: float) -> int:
    """How many decimals show a limit whole: two, up to four where it has them (5 mil is 0.127 mm)."""
    for digits in range(_FEWEST, 4):
        if abs(round(limit, digits) - limit) < TOLERANCE:
            return digits
    return 4


def layer_name(board: Board, layer: int) -> str:
    """Name of a copper layer by index; "" for none in particular."""
    return board.copper[layer] if 0 <= layer < len(board.copper) else ""


def place(board: Board, layer: int, x_mm: float, y_mm: float) -> Place:
    """A place of the result. Parameters: layer: index into `Board.copper`, −1 for none. x_mm, y_mm: [mm]."""
    return Place(layer=layer_name(board, layer), x_mm=float(x_mm), y_mm=float(y_mm))


def spot(board: Board, where: Place) -> str:
    """A place in words: "TOP (12.0, 30.5) mm"."""
    return f"{where.layer} {coordinates(where.x_mm, where.y_mm, board.units)}".strip()
