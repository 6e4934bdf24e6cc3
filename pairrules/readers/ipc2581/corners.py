"""The corners of an outline all at once, for the thousands of outlines that nothing is wrong with."""

from __future__ import annotations

import math
import re
from functools import lru_cache
from typing import TYPE_CHECKING

import msgspec
import numpy as np

from pairrules.readers.ipc2581.elements import FARTHEST_MM
from pairrules.readers.ipc2581.transform import Plane

if TYPE_CHECKING:
    from lxml.etree import _Element as Element

_BEGIN, _SEGMENT, _CURVE, _STYLE, _OTHER = range(5)
_KINDS = {"PolyBegin": _BEGIN, "PolyStepSegment": _SEGMENT, "PolyStepCurve": _CURVE, "LineDescRef": _STYLE}

_FEW = 8
"""Elements from which on their text is faster than they."""

_FIRST = b"<PolyBegin x="
_STEP = re.compile(rb"/>\s*<PolyStepSegment x=")
_LAST = re.compile(rb"/>\s*</[\w.:-]+>")
_NUMBERS = msgspec.json.Decoder(list[float])


@lru_cache(maxsize=256)
def _kind(tag: object) -> int:
    return _KINDS.get(tag.rpartition("}")[2], _OTHER) if isinstance(tag, str) else _OTHER


def corners(element: Element, factor: float, *, styled: bool = False) -> tuple[Plane, list[tuple[int, Element]]] | None:
    """The corners [mm] of a line or outline, and the place and element of each that an arc leads to.

    styled: whether the name of a line style may stand among them.
    Returns: `None` where the element holds anything but steps in their order, or a number that is none or too great:
    to be read step by step, with the line of what is wrong.
    """
    curves: list[tuple[int, Element]] = []
    numbers = (_written_out(element) if len(element) > _FEW else None) or _one_by_one(element, curves, styled=styled)
    if not numbers or not -FARTHEST_MM < min(numbers) * factor <= max(numbers) * factor < FARTHEST_MM:
        return None
    at = np.array(numbers)
    at *= factor
    at += 0.0  # a negative nothing is nothing
    return at.view(np.complex128), curves


def _written_out(element: Element) -> list[float] | None:
    """The numbers of an outline of straight steps, x and y in turn, from its own text, cut at the quotation marks.

    Making text again of what the parser read, and cutting that, takes a third of the time of asking each element.
    """
    from lxml import etree

    text = etree.tostring(element, with_tail=False)
    first = text.find(_FIRST)
    if first < 0 or text.count(b"<", 0, first) != 1:
        return None
    cut = text[first:].split(b'"')
    if len(cut) % 4 != 1 or any(between != b" y=" for between in set(cut[2::4])):
        return None
    if not _LAST.fullmatch(cut[-1]) or not all(map(_STEP.fullmatch, set(cut[4:-1:4]))):
        return None
    try:
        numbers = _NUMBERS.decode(b"[" + b",".join(cut[1::2]) + b"]")
    except msgspec.MsgspecError:
        return None
    return numbers if len(numbers) == len(cut) // 2 else None


def _one_by_one(element: Element, curves: list[tuple[int, Element]], *, styled: bool) -> list[float] | None:
    """The same of any steps, from their elements. curves: gets the place and element of each round one."""
    found: list[str | None] = []
    for inner in element:
        kind = _kind(inner.tag)
        if styled and kind == _STYLE:
            continue
        if kind >= _STYLE or (kind == _BEGIN) == bool(found):
            return None
        if kind == _CURVE:
            curves.append((len(found) // 2, inner))
        found.append(inner.get("x"))
        found.append(inner.get("y"))
    try:
        # Joined, since a look for each would cost more than the reading: `float` takes 1_0, the file may not.
        if "_" in "".join(found):  # type: ignore[arg-type]
            return None
        numbers = list(map(float, found))  # type: ignore[arg-type]
    except (TypeError, ValueError):
        return None
    return numbers if all(map(math.isfinite, numbers)) else None
