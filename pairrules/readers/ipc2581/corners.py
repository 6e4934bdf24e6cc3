"""The corners of an outline all at once, for the thousands of outlines that nothing is wrong with."""

from __future__ import annotations

from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from pairrules.readers.ipc2581.elements import FARTHEST_MM
from pairrules.readers.ipc2581.transform import Plane

if TYPE_CHECKING:
    from lxml.etree import _Element as Element

_BEGIN, _SEGMENT, _CURVE, _OTHER = range(4)
_KINDS = {"PolyBegin": _BEGIN, "PolyStepSegment": _SEGMENT, "PolyStepCurve": _CURVE}


@lru_cache(maxsize=256)
def _kind(tag: object) -> int:
    return _KINDS.get(tag.rpartition("}")[2], _OTHER) if isinstance(tag, str) else _OTHER


def corners(element: Element, factor: float) -> tuple[Plane, list[tuple[int, Element]]] | None:
    """The corners [mm] of a `Polygon` or `Cutout`, and the place and element of each that an arc leads to.

    Returns: `None` where the element holds anything but steps in their order, or a number that is none or too great:
    to be read step by step, with the line of what is wrong.
    """
    x: list[str | None] = []
    y: list[str | None] = []
    curves: list[tuple[int, Element]] = []
    for inner in element:
        kind = _kind(inner.tag)
        if kind != _SEGMENT:
            if kind == _OTHER or (kind == _BEGIN) == bool(x):
                return None
            if kind == _CURVE:
                curves.append((len(x), inner))
        x.append(inner.get("x"))
        y.append(inner.get("y"))
    try:
        # Joined, since a look for each would cost more than the reading: `float` takes 1_0, the file may not.
        if not x or "_" in "".join(x) or "_" in "".join(y):  # type: ignore[arg-type]
            return None
        at = np.array([list(map(float, x)), list(map(float, y))]) * factor  # type: ignore[arg-type]
    except (TypeError, ValueError):
        return None
    if not (np.abs(at) < FARTHEST_MM).all():
        return None
    return at[0] + 1j * at[1], curves
