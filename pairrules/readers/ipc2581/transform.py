"""Placement of a feature: scaled, mirrored, turned, moved, in that order.

The plane is the complex plane. The order of a combined `Xform` is from memory of the standard (positive rotation is
counter-clockwise seen from the top, also for mirrored features): the feature is scaled and mirrored (x changes sign)
about its own origin, then turned, then moved by xOffset and yOffset, then by its Location.
"""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, overload

import numpy as np
import numpy.typing as npt

from pairrules.readers.ipc2581.elements import length, number, point, truth, wrong

if TYPE_CHECKING:
    from pairrules.readers.ipc2581.element import Element

Plane = npt.NDArray[np.complex128]


@dataclass(frozen=True, slots=True)
class Transform:
    """z → turn · m(z) + shift, where m(z) = −conj(z) if flipped (x changes sign), else z.

    Parameters: turn: scale · e^(jθ). shift: [mm].
    """

    turn: complex = 1 + 0j
    flip: bool = False
    shift: complex = 0j

    @overload
    def __call__(self, z: complex) -> complex: ...
    @overload
    def __call__(self, z: Plane) -> Plane: ...
    def __call__(self, z: complex | Plane) -> complex | Plane:
        """Where a point, or an array of points, comes to lie."""
        return self.turn * (-z.conjugate() if self.flip else z) + self.shift

    def then(self, outer: Transform) -> Transform:
        """The placement, and the outer one after it."""
        turn = outer.turn * (self.turn.conjugate() if outer.flip else self.turn)
        return Transform(turn, self.flip != outer.flip, outer(self.shift))

    @property
    def scale(self) -> float:
        """How much lengths grow."""
        return abs(self.turn)

    @property
    def angle(self) -> float:
        """Turn [rad], 0 ≤ angle < 2π, after the mirror."""
        angle = cmath.phase(self.turn) % (2 * math.pi)
        return 0.0 if math.isclose(angle, 2 * math.pi, rel_tol=1e-12) else angle


IDENTITY = Transform()


def xform(element: Element | None, factor: float) -> Transform:
    """The placement an `Xform` element describes; none where the element is absent."""
    if element is None:
        return IDENTITY
    degrees = number(element, "rotation", 0.0) % 360
    scale = number(element, "scale", 1.0)
    if scale <= 0:
        wrong(element, f'Xform has scale="{element.get("scale")}"; a scale is greater than 0')
    quarters = {0.0: 1 + 0j, 90.0: 1j, 180.0: -1 + 0j, 270.0: -1j}  # exact, so that turned coordinates stay exact
    turn = quarters.get(degrees) or cmath.exp(1j * math.radians(degrees))
    shift = complex(length(element, "xOffset", factor, 0.0), length(element, "yOffset", factor, 0.0))
    return Transform(turn * scale, truth(element, "mirror"), shift)


def location(element: Element, factor: float) -> complex:
    """The point [mm] of a `Location` element."""
    return point(element, "x", "y", factor)
