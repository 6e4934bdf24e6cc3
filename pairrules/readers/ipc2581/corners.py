"""The corners of an outline all at once, for the thousands of outlines that nothing is wrong with."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import msgspec
import numpy as np

from pairrules.readers.ipc2581.element import Element
from pairrules.readers.ipc2581.elements import FARTHEST_MM

if TYPE_CHECKING:
    from pairrules.readers.ipc2581.transform import Plane

_NUMBERS = msgspec.json.Decoder(list[float])


def corners(element: Element, factor: float, *, styled: bool = False) -> tuple[Plane, list[tuple[int, Element]]] | None:
    """The corners [mm] of a line or outline, and the place and element of each that an arc leads to.

    styled: whether the name of a line style may stand among them.
    Returns: `None` where the element holds anything but steps in their order, or a number that is none or too great:
    to be read step by step, with the line of what is wrong.
    """
    steps = element.steps
    tags = [step[0] for step in steps]
    if tags[:1] != ["PolyBegin"] or tags.count("PolyBegin") > 1:
        return None
    if element.inner and not (styled and all(inner.tag == "LineDescRef" for inner in element.inner)):
        return None
    try:
        written = [step[1]["x"] for step in steps]
        written += [step[1]["y"] for step in steps]
    except KeyError:
        return None
    numbers = _read(written)
    if not numbers or not -FARTHEST_MM < min(numbers) * factor <= max(numbers) * factor < FARTHEST_MM:
        return None
    at = np.empty(len(steps), dtype=np.complex128)
    at.real, at.imag = numbers[: len(steps)], numbers[len(steps) :]
    at *= factor
    at += 0.0  # a negative nothing is nothing
    if "PolyStepCurve" not in tags:
        return at, []
    return at, [(place, Element(*steps[place])) for place, tag in enumerate(tags) if tag == "PolyStepCurve"]


def _read(written: list[str]) -> list[float] | None:
    """The numbers, `None` where one of them is none.

    A reader of JSON takes them all at once, a few times as fast as one by one; numbers that JSON would write otherwise
    (+1, .5, 1.) are read one by one.
    """
    joined = ",".join(written)
    try:
        numbers = _NUMBERS.decode(f"[{joined}]")
    except (msgspec.MsgspecError, UnicodeEncodeError):
        numbers = []
    if len(numbers) == len(written):  # a comma within one would make two of it
        return numbers
    try:
        numbers = list(map(float, written))
    except ValueError:
        return None
    # `float` takes 1_0, the file may not; the sum of what is no number at all is none.
    return None if "_" in joined or math.isnan(sum(numbers)) else numbers
