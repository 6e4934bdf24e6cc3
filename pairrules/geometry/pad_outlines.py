"""The copper outline of a pad where it lies on the board."""

from __future__ import annotations

import math

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from pairrules.board.pads import Pads, PadShape

_QUARTER_SEGMENTS = 16
"""Chords a quarter circle: 0.12 % of the radius from the true circle, used for touching, never for lengths."""


def pad_outline(pads: Pads, row: int) -> BaseGeometry:
    """Polygon of pad `row` in board coordinates [mm]; the pad's centre alone where its shape is unknown."""
    x, y = pads.at[row]
    shape = pads.shapes[pads.shape[row]] if pads.shape[row] >= 0 else None
    if shape is None:
        size = pads.drill[row]
        return (
            shapely.Point(x, y)
            if math.isnan(size)
            else shapely.Point(x, y).buffer(size / 2, quad_segs=_QUARTER_SEGMENTS)
        )
    own = _about_centre(shape)
    cos, sin = math.cos(pads.rotation[row]), math.sin(pads.rotation[row])
    flip = -1.0 if pads.mirror[row] else 1.0
    turn = np.array([[cos * flip, -sin], [sin * flip, cos]])
    return shapely.transform(own, lambda points: points @ turn.T + (x, y))


def _about_centre(shape: PadShape) -> BaseGeometry:
    width, height = shape.size
    if shape.kind == "circle":
        return shapely.Point(0, 0).buffer(width / 2, quad_segs=_QUARTER_SEGMENTS)
    if shape.kind == "polygon":
        return shapely.make_valid(shapely.Polygon(shape.points))
    radius = {"rect": 0.0, "oval": min(width, height) / 2, "round_rect": min(shape.radius, width / 2, height / 2)}[
        shape.kind
    ]
    x, y = width / 2 - radius, height / 2 - radius
    core = shapely.box(-x, -y, x, y) if x > 0 and y > 0 else shapely.LineString([(-x, -y), (x, y)])
    return core.buffer(radius, quad_segs=_QUARTER_SEGMENTS) if radius > 0 else core
