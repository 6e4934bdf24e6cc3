"""What features draw: strokes (lines with a width) and fills (outlines with holes), placed on the plane [mm]."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import Any

import numpy as np
import shapely
from shapely.geometry import LineString, MultiPolygon, Polygon

from pairrules.board import arcs
from pairrules.readers.ipc2581.transform import IDENTITY, Plane, Transform

_FEW_CORNERS = 200
_CORNERS_A_PIECE = 8


def surplus(corners: int) -> int:
    """Pieces that an outline or arc of many corners counts for beside itself.

    An arc of some metres' radius comes to thousands of corners, a circle of 8 mm to two hundred.
    """
    return max(0, corners - _FEW_CORNERS) // _CORNERS_A_PIECE


@dataclass(frozen=True, slots=True)
class Stroke:
    """A polyline of straight and round pieces.

    Parameters
    ----------
    points: n + 1 corners. centres: n arc centres, `None` where the piece is straight.
    sweeps: n signed angles [rad], 0 where straight. width: [mm]. erase: it removes copper drawn before it.
    """

    points: tuple[complex, ...]
    centres: tuple[complex | None, ...]
    sweeps: tuple[float, ...]
    width: float
    erase: bool = False

    @property
    def pieces(self) -> int:
        """Pieces of track it comes to."""
        round_ones = zip(self.points, self.centres, self.sweeps, strict=False)
        chords = (arcs.chords_of(abs(at - centre), turn) for at, centre, turn in round_ones if centre is not None)
        return len(self.sweeps) + sum(map(surplus, chords))

    def placed(self, by: Transform) -> Stroke:
        """The stroke after a placement; a mirror turns the arcs' sense."""
        return Stroke(
            tuple(by(point) for point in self.points),
            tuple(None if centre is None else by(centre) for centre in self.centres),
            tuple(-sweep for sweep in self.sweeps) if by.flip else self.sweeps,
            self.width * by.scale,
            self.erase,
        )

    def flattened(self) -> list[tuple[float, float]]:
        """Corners with arcs as chords."""
        flat = [(self.points[0].real, self.points[0].imag)]
        for start, end, centre, sweep in zip(self.points, self.points[1:], self.centres, self.sweeps, strict=False):
            if centre is not None:
                rounded = arcs.flatten((start.real, start.imag), (centre.real, centre.imag), sweep)
                flat += [(float(x), float(y)) for x, y in rounded[:-1]]
            flat.append((end.real, end.imag))
        return flat

    def region(self) -> Any:
        """The covered area, ends round, as a shapely geometry."""
        flat = self.flattened()
        if all(point == flat[0] for point in flat):
            return shapely.Point(flat[0]).buffer(self.width / 2, quad_segs=32)
        return LineString(flat).buffer(self.width / 2, quad_segs=32)


@dataclass(frozen=True, slots=True)
class Fill:
    """An outline with holes, arcs flattened. erase: it removes copper drawn before it. hatched: it is not solid."""

    outline: Plane
    holes: tuple[Plane, ...] = ()
    erase: bool = False
    hatched: bool = False

    @property
    def pieces(self) -> int:
        """Areas it comes to."""
        return 1 + sum(surplus(len(edge)) for edge in (self.outline, *self.holes))

    def placed(self, by: Transform) -> Fill:
        """The fill after a placement."""
        return Fill(by(self.outline), tuple(by(hole) for hole in self.holes), self.erase, self.hatched)

    def region(self) -> Any:
        """The covered area as a valid shapely geometry; holes take copper away wherever they lie."""
        drawn = Polygon(_pairs(self.outline), [_pairs(hole) for hole in self.holes])
        if drawn.is_valid:
            return drawn
        holes = shapely.union_all([shapely.make_valid(Polygon(_pairs(hole))) for hole in self.holes])
        return shapely.make_valid(Polygon(_pairs(self.outline))).difference(holes)


Item = Stroke | Fill


def placed(items: Iterable[Item], by: Transform) -> tuple[Item, ...]:
    """Every item after a placement."""
    return tuple(items) if by == IDENTITY else tuple(item.placed(by) for item in items)


def erasing(items: Iterable[Item]) -> tuple[Item, ...]:
    """The same items as removals."""
    return tuple(replace(item, erase=True) for item in items)


def fills(region: Any) -> tuple[Fill, ...]:
    """The polygons of a shapely geometry; lines and points that cutting leaves behind carry no copper."""
    if isinstance(region, Polygon):
        pieces = [region]
    elif isinstance(region, MultiPolygon):
        pieces = list(region.geoms)
    else:
        parts = getattr(region, "geoms", ())
        return tuple(fill for part in parts for fill in fills(part))
    return tuple(
        Fill(_ring(piece.exterior.coords), tuple(_ring(hole.coords) for hole in piece.interiors))
        for piece in pieces
        if piece.area > 0
    )


def ring(points: Sequence[complex] | Plane, centres: Sequence[complex | None], sweeps: Sequence[float]) -> Plane:
    """A closed outline as corners, arcs flattened, the closing corner left out."""
    corners = np.asarray(points, dtype=np.complex128)
    if any(sweeps):
        ends = corners.tolist()
        pieces = [corners[:1]]
        for place, centre in enumerate(centres):
            if centre is None:
                pieces.append(corners[place + 1 : place + 2])
                continue
            start = ends[place]
            rounded = arcs.flatten((start.real, start.imag), (centre.real, centre.imag), sweeps[place])
            bend = rounded.view(np.complex128)[:, 0]
            bend[-1] = ends[place + 1]
            pieces.append(bend)
        corners = np.concatenate(pieces)
    if len(corners) > 1 and abs(complex(corners[0]) - complex(corners[-1])) < 1e-9:
        return corners[:-1].copy()  # a view would keep alive all that it was cut from
    return corners


def sweep(start: complex, end: complex, centre: complex, *, clockwise: bool) -> float:
    """Signed angle [rad] of an arc."""
    ends = ((start.real, start.imag), (end.real, end.imag), (centre.real, centre.imag))
    return arcs.sweep(*ends, clockwise=clockwise)


@lru_cache(maxsize=64)
def disc(diameter: float) -> Plane:
    """A circle about the origin as corners, not to be written into: the few sizes of a board's circles share them."""
    radius = diameter / 2
    turned = arcs.flatten((radius, 0.0), (0.0, 0.0), 2 * math.pi)
    circle = np.asarray(turned[:, 0] + 1j * turned[:, 1])
    circle.flags.writeable = False
    return circle


def _pairs(points: Plane) -> Any:
    return np.column_stack([points.real, points.imag])


def _ring(coords: Any) -> Plane:
    corners = np.asarray(coords, dtype=np.float64)[:-1]
    return np.asarray(corners[:, 0] + 1j * corners[:, 1])
