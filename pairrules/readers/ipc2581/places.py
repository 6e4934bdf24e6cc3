"""Things by their place on the board, found again within a small distance."""

from __future__ import annotations

import math
from typing import Generic, TypeVar

from pairrules.errors import BoardError

NEAR_MM = 0.005
"""Centres this near are one place: exporters round to a micrometre or to a hundred-thousandth of an inch."""

MOST_AT_ONE_PLACE = 2000
"""A pad stack has a pad a layer; thousands at one place would each be held against each."""

_CELL_MM = 0.02

Thing = TypeVar("Thing")


class Crowds:
    """Counts things by place while they are read, so that a crowd is refused before all of it has been read."""

    def __init__(self) -> None:
        self._counts: dict[tuple[int, int], int] = {}

    def crowded(self, at: complex) -> bool:
        """Count a thing. Returns: whether more than `MOST_AT_ONE_PLACE` lie here."""
        key = (math.floor(at.real / _CELL_MM), math.floor(at.imag / _CELL_MM))
        count = self._counts[key] = self._counts.get(key, 0) + 1
        return count > MOST_AT_ONE_PLACE


def crowd_at(at: complex) -> str:
    """What is wrong where a crowd lies."""
    return f"more than {MOST_AT_ONE_PLACE} pads or holes lie at ({at.real:.3f}, {at.imag:.3f}) mm"


class Places(Generic[Thing]):
    """A store of things by place, in the order put in."""

    def __init__(self) -> None:
        self._cells: dict[tuple[int, int], list[tuple[complex, Thing]]] = {}

    def put(self, at: complex, thing: Thing) -> None:
        """Store a thing."""
        key = (math.floor(at.real / _CELL_MM), math.floor(at.imag / _CELL_MM))
        cell = self._cells.setdefault(key, [])
        cell.append((at, thing))
        if len(cell) > MOST_AT_ONE_PLACE:
            raise BoardError(crowd_at(at), remedy="export the file again")

    def near(self, at: complex, within: float = NEAR_MM) -> list[Thing]:
        """The things within a distance [mm] of a place, at most a cell wide."""
        lows = (math.floor((at.real - within) / _CELL_MM), math.floor((at.imag - within) / _CELL_MM))
        highs = (math.floor((at.real + within) / _CELL_MM), math.floor((at.imag + within) / _CELL_MM))
        found: list[Thing] = []
        for column in range(lows[0], highs[0] + 1):
            for row in range(lows[1], highs[1] + 1):
                found += [thing for place, thing in self._cells.get((column, row), ()) if abs(place - at) <= within]
        return found
