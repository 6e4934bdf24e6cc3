"""What a cross-section is made of: dielectric layers and patches, planes at 0 V, conductors. Millimetres throughout.

x runs across the board, y upward. Layers are slabs infinite in x; patches are painted over them; where neither is,
there is air. Planes have no thickness and lie at 0 V. Conductors win over dielectrics.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

Point = tuple[float, float]
Role = Literal["signal", "grounded", "floating"]
ROLES: tuple[Role, ...] = ("signal", "grounded", "floating")


@dataclass(frozen=True, slots=True, kw_only=True)
class Layer:
    """A dielectric slab y0 < y < y1 [mm], infinite in x; of two that overlap the later wins."""

    y0: float
    y1: float
    er: float
    loss_tangent: float = 0.0

    def __post_init__(self) -> None:
        _finite("y0, y1", self.y0, self.y1)
        _dielectric(self.er, self.loss_tangent)
        if not self.y0 < self.y1:
            raise ValueError(f"y0 = {self.y0:g} is not below y1 = {self.y1:g}")


@dataclass(frozen=True, slots=True, kw_only=True)
class Patch:
    """A dielectric polygon [mm] painted over the layers and over earlier patches, such as solder mask."""

    polygon: tuple[Point, ...]
    er: float
    loss_tangent: float = 0.0

    def __post_init__(self) -> None:
        _polygon(self.polygon)
        _dielectric(self.er, self.loss_tangent)


@dataclass(frozen=True, slots=True, kw_only=True)
class Plane:
    """A plane of no thickness at height y [mm], at 0 V.

    intervals: `None` for a plane infinite to both sides, else the stretches (from, to) [mm] that carry copper; −inf and
    inf where a stretch has no end.
    """

    y: float
    intervals: tuple[tuple[float, float], ...] | None = None

    def __post_init__(self) -> None:
        _finite("y", self.y)
        if self.intervals is None:
            return
        before = -math.inf
        for number, (start, end) in enumerate(self.intervals):
            if math.isnan(start) or math.isnan(end) or not start < end:
                raise ValueError(f"x[{number}] does not run from a smaller to a greater x")
            if number and start < before:
                raise ValueError(f"x[{number}] starts before the stretch left of it ends")
            before = end

    @property
    def infinite(self) -> bool:
        """Whether the plane is whole: no end and no slot."""
        return self.intervals is None or self.intervals == ((-math.inf, math.inf),)


@dataclass(frozen=True, slots=True, kw_only=True)
class Conductor:
    """A conductor: a `polygon` [mm], or a `strip` of no thickness (x0, x1, y) [mm]; exactly one of the two."""

    name: str
    role: Role
    polygon: tuple[Point, ...] | None = None
    strip: tuple[float, float, float] | None = None

    def __post_init__(self) -> None:
        if self.role not in ROLES:
            raise ValueError(f"role {self.role!r} is none of {', '.join(ROLES)}")
        if (self.polygon is None) == (self.strip is None):
            raise ValueError("a conductor has either a polygon or a strip")
        if self.polygon is not None:
            _polygon(self.polygon)
        if self.strip is not None:
            _finite("strip", *self.strip)
            if not self.strip[0] < self.strip[1]:
                raise ValueError(f"strip runs from {self.strip[0]:g} to {self.strip[1]:g}, not to a greater x")

    @property
    def y_range(self) -> tuple[float, float]:
        """Lowest and highest y [mm]."""
        if self.strip is not None:
            return self.strip[2], self.strip[2]
        heights = [y for _, y in self.polygon or ()]
        return min(heights), max(heights)

    @property
    def x_range(self) -> tuple[float, float]:
        """Least and greatest x [mm]."""
        if self.strip is not None:
            return self.strip[0], self.strip[1]
        across = [x for x, _ in self.polygon or ()]
        return min(across), max(across)

    @property
    def area_mm2(self) -> float:
        """Area of copper [mm²]; 0 for a strip of no thickness."""
        return abs(signed_area(self.polygon)) if self.polygon is not None else 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class CrossSection:
    """One cross-section; lengths in mm. The first signal conductor is plus, the second minus."""

    conductors: tuple[Conductor, ...]
    layers: tuple[Layer, ...] = ()
    patches: tuple[Patch, ...] = ()
    planes: tuple[Plane, ...] = ()
    id: str = ""

    def __post_init__(self) -> None:
        if not self.conductors:
            raise ValueError("a section needs at least one conductor")
        names = [conductor.name for conductor in self.conductors]
        doubled = sorted({name for name in names if names.count(name) > 1})
        if doubled:
            raise ValueError(f"conductor name {doubled[0]!r} stands more than once")

    @property
    def signals(self) -> tuple[int, ...]:
        """Places of the signal conductors in `conductors`."""
        return tuple(place for place, conductor in enumerate(self.conductors) if conductor.role == "signal")


def signed_area(polygon: tuple[Point, ...]) -> float:
    """Area of a polygon, positive where its corners run counter-clockwise (Gauss's area formula)."""
    x0, y0 = polygon[0]
    total = 0.0
    for (xa, ya), (xb, yb) in zip(polygon, (*polygon[1:], polygon[0]), strict=True):
        total += (xa - x0) * (yb - y0) - (xb - x0) * (ya - y0)
    return total / 2.0


def _finite(what: str, *values: float) -> None:
    if not all(math.isfinite(value) for value in values):
        raise ValueError(f"{what} must be finite")


def _dielectric(er: float, loss_tangent: float) -> None:
    if not (math.isfinite(er) and er >= 1.0):
        raise ValueError(f"er = {er:g} is no relative permittivity; give 1 or more")
    if not (math.isfinite(loss_tangent) and 0.0 <= loss_tangent < 1.0):
        raise ValueError(f"loss_tangent = {loss_tangent:g} is not within 0 and 1")


def _polygon(polygon: tuple[Point, ...]) -> None:
    if len(polygon) < 3:
        raise ValueError(f"a polygon of {len(polygon)} corners encloses nothing; give three or more")
    _finite("polygon", *(value for point in polygon for value in point))
    span = max(max(p[axis] for p in polygon) - min(p[axis] for p in polygon) for axis in (0, 1))
    if abs(signed_area(polygon)) <= 1e-12 * span * span:
        raise ValueError("the polygon encloses no area")
