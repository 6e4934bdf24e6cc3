"""Points and arcs of plain JSON boards: drawn lines as pieces, outlines as rings of points; lengths leave in mm."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from pairrules.board.arcs import chords_of, flatten, sweep
from pairrules.board.columns import Floats
from pairrules.readers.json_tree import Document, Members, Path

THINNEST_MM = 0.0001
"""Least width of a track: a tenth of a micrometre cannot be etched. Common practice, no source."""

FARTHEST_MM = 10_000.0
"""Greatest coordinate or size: beyond ten metres the units must be wrong. Common practice, no source."""

MOST_CHORDS = 400_000
"""Chords beyond the first `_FEW_CHORDS` of each arc, all together: a full circle of 8 mm comes to two hundred, one of
ten metres to seven thousand. Common practice, no source."""

_FEW_CHORDS = 200

_ARC_KEYS = frozenset({"arc_to", "centre", "clockwise"})
_ARC_SLACK_MM = 0.001
_ARC_SLACK_SHARE = 0.001

Point = tuple[float, float]
Piece = tuple[Point, Point, Point, float]
"""Start, end, centre and sweep [rad]; centre NaN and sweep 0 where straight."""

_STRAIGHT = (math.nan, math.nan)


@dataclass(frozen=True, slots=True, kw_only=True)
class Ruler:
    """Reads lengths of one file. scale: millimetres in one of its units. unit: its name."""

    document: Document
    scale: float
    unit: str

    def length(self, members: Members, key: str, *, zero: bool = False) -> float | None:
        """A size [mm], greater than zero (or zero, where allowed); `None` where left out."""
        value = members.get(key)
        return None if value is None else self.size(value, (members.path, key), zero=zero)

    def size(self, value: object, path: Path, *, zero: bool = False) -> float:
        """A size [mm] given as a number in the file's units."""
        if type(value) is not float:
            raise self.document.fault(path, value, "give a number in the file's units")
        size = value * self.scale
        if size > 0.0 or (zero and size == 0.0):
            if size > FARTHEST_MM:
                raise self.document.fault(path, value, f"give at most 10 m; the file's unit is {self.unit}")
            return size
        raise self.document.fault(path, value, f"give a number {'not below' if zero else 'above'} zero")

    def width(self, value: object, path: Path) -> float:
        """The width of a track [mm], `THINNEST_MM` at least."""
        width = self.size(value, path)
        if width < THINNEST_MM:
            raise self.document.fault(path, value, f"give at least {THINNEST_MM} mm; the file's unit is {self.unit}")
        return width

    def point(self, value: object, path: Path) -> Point:
        """A place [mm]."""
        # The type test comes first and is exact: a board holds hundreds of thousands of points.
        if type(value) is list and len(value) == 2:
            x, y = value
            if type(x) is float and type(y) is float:
                x *= self.scale
                y *= self.scale
                if -FARTHEST_MM <= x <= FARTHEST_MM and -FARTHEST_MM <= y <= FARTHEST_MM:
                    return x, y
                at = 1 if -FARTHEST_MM <= x <= FARTHEST_MM else 0
                raise self.document.fault(
                    (path, at), value[at], f"give a coordinate within 10 m; the file's unit is {self.unit}"
                )
            at = 1 if type(x) is float else 0
            raise self.document.fault((path, at), value[at], "give a number in the file's units")
        raise self.document.fault(path, value, "give a point as [x, y]")

    def pieces(self, value: object, path: Path, *, closed: bool = False) -> list[Piece]:
        """The straight and round pieces of a drawn line; pieces without length are left out."""
        if type(value) is not list or len(value) < 2:
            raise self.document.fault(path, value, "give a list of two points or more")
        here = first = self.point(value[0], (path, 0))
        pieces: list[Piece] = []
        for number in range(1, len(value)):
            entry = value[number]
            if type(entry) is dict:
                piece = self._arc(here, entry, (path, number))
                if piece[0] != piece[2]:
                    pieces.append(piece)
                else:
                    self.document.note("turns about its own start and is left out", (path, number))
                here = piece[1]
            else:
                there = self.point(entry, (path, number))
                if there != here:
                    pieces.append((here, there, _STRAIGHT, 0.0))
                elif not closed or number < len(value) - 1:
                    self.document.note("repeats the point before it and is left out", (path, number))
                here = there
        if closed and here != first:
            pieces.append((here, first, _STRAIGHT, 0.0))
        return pieces

    def ring(self, value: object, path: Path) -> Floats:
        """An outline (n, 2), arcs flattened, not closed."""
        if type(value) is not list:
            raise self.document.fault(path, value, "give a list of three points or more")
        parts: list[Floats] = []
        for start, _, centre, turn in self.pieces(value, path, closed=True) if len(value) > 1 else ():
            parts.append(np.array([start]))
            if turn != 0.0:
                parts.append(flatten(start, centre, turn)[:-1])
        points = np.concatenate(parts) if parts else np.empty((0, 2))
        if len(points) < 3:
            raise self.document.fault(path, value, "give an outline of three different points or more")
        return points

    def _arc(self, start: Point, entry: dict[str, object], path: Path) -> Piece:
        members = self.document.members(entry, path, _ARC_KEYS, "arc_to, centre and clockwise")
        end = self.point(members.need("arc_to", "give the arc's end as [x, y]"), (path, "arc_to"))
        centre = self.point(members.need("centre", "give the arc's centre as [x, y]"), (path, "centre"))
        clockwise = members.need("clockwise", "give true or false")
        if type(clockwise) is not bool:
            raise self.document.fault((path, "clockwise"), clockwise, "give true or false")
        near, far = math.dist(start, centre), math.dist(end, centre)
        if abs(near - far) > max(_ARC_SLACK_MM, _ARC_SLACK_SHARE * max(near, far)):
            radii = (
                f"{near / self.scale:.6g} {self.unit} at its start and {far / self.scale:.6g} {self.unit} at its end"
            )
            raise self.document.misfit(path, f"has a radius of {radii}", "give a centre as far from both")
        angle = sweep(start, end, centre, clockwise=clockwise)
        self.document.chords += max(0, chords_of(near, angle) - _FEW_CHORDS)
        if self.document.chords > MOST_CHORDS:
            found = f"is a round piece too many: those of great radius come to more than {MOST_CHORDS} chords"
            raise self.document.misfit(path, found, f"give arcs of a board's size; the file's unit is {self.unit}")
        return start, end, centre, angle
