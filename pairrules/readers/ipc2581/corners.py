"""The corners of an outline all at once, for the thousands of outlines that nothing is wrong with."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from pairrules.readers.ipc2581.element import Element
from pairrules.readers.ipc2581.elements import FARTHEST_MM

if TYPE_CHECKING:
    from pairrules.readers.ipc2581.transform import Plane


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
        x, y = [step[1]["x"] for step in steps], [step[1]["y"] for step in steps]
        # Joined, since a look for each would cost more than the reading: `float` takes 1_0, the file may not.
        if "_" in "".join(x) or "_" in "".join(y):
            return None
        across, up = list(map(float, x)), list(map(float, y))
    except (KeyError, ValueError):
        return None
    for numbers in (across, up):
        # What is no number at all is neither least nor greatest, but makes the sum none.
        if not -FARTHEST_MM < min(numbers) * factor <= max(numbers) * factor < FARTHEST_MM or math.isnan(sum(numbers)):
            return None
    at = np.empty(len(steps), dtype=np.complex128)
    at.real, at.imag = across, up
    at *= factor
    at += 0.0  # a negative nothing is nothing
    curves = [(place, Element(*steps[place])) for place, tag in enumerate(tags) if tag == "PolyStepCurve"]
    return at, curves
