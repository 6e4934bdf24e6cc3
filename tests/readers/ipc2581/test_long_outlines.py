"""Long outlines are taken in all at once; they must give what reading them step by step gives."""

from __future__ import annotations

import math

import numpy as np
import pytest

from pairrules.errors import BoardError
from pairrules.readers.ipc2581 import file_content
from tests.readers.ipc2581.documents import document, feature, read


def _ring(tag: str, radius: float, corners: int, *, more: str = "") -> str:
    turns = [2 * math.pi * i / corners for i in range(1, corners + 1)]
    steps = "".join(
        f'<PolyStepSegment x="{5 + radius * math.cos(t)!r}" y="{5 + radius * math.sin(t)!r}"/>' for t in turns
    )
    return f'<{tag}><PolyBegin x="{5 + radius!r}" y="5"/>{steps}{more}</{tag}>'


def _round(tag: str, radius: float, arcs: int) -> str:
    turns = [2 * math.pi * i / arcs for i in range(1, arcs + 1)]
    steps = "".join(
        f'<PolyStepCurve x="{5 + radius * math.cos(t)!r}" y="{5 + radius * math.sin(t)!r}" centerX="5" centerY="5" '
        'clockwise="false"/>'
        for t in turns
    )
    return f'<{tag}><PolyBegin x="{5 + radius!r}" y="5"/>{steps}</{tag}>'


@pytest.mark.parametrize("units", ["MILLIMETER", "INCH"])
def test_the_same_as_step_by_step(units: str, monkeypatch: pytest.MonkeyPatch) -> None:
    drawn = feature(f"<Contour>{_ring('Polygon', 4, 40)}{_ring('Cutout', 1, 30)}{_round('Cutout', 2, 12)}</Contour>")
    quick = read(document(drawn, units=units)).areas
    monkeypatch.setattr(file_content, "_FEW", 10**9)
    slow = read(document(drawn, units=units)).areas
    assert len(quick) == len(slow) == 1
    assert np.array_equal(quick[0].outline, slow[0].outline)
    assert [len(hole) for hole in quick[0].holes] == [len(hole) for hole in slow[0].holes]
    assert len(quick[0].holes[0]) == 30
    assert all(np.array_equal(a, b) for a, b in zip(quick[0].holes, slow[0].holes, strict=True))


def test_a_style_among_the_corners_still_counts() -> None:
    void = '<FillDesc fillProperty="VOID"/>'
    plane = feature(f"<Contour>{_ring('Polygon', 4, 40)}</Contour>")
    hollow = feature(f"<Contour>{_ring('Polygon', 1, 40, more=void)}</Contour>")
    (area,) = read(document(plane + hollow)).areas
    assert len(area.holes) == 1


@pytest.mark.parametrize(
    ("written", "told"),
    [
        ('y="1_0"', 'PolyStepSegment has y="1_0", which is no number'),
        ('y="inf"', 'PolyStepSegment has y="inf", which is no number'),
        ('y="9e9"', 'PolyStepSegment has y="9e9", which is beyond any board'),
        ('z="1"', "PolyStepSegment has no y"),
    ],
)
def test_what_is_wrong_is_told_with_its_line(written: str, told: str) -> None:
    outline = _ring("Polygon", 4, 40, more=f'\n\n<PolyStepSegment x="5" {written}/>')
    with pytest.raises(BoardError) as caught:
        read(document(feature(f"<Contour>{outline}</Contour>")))
    assert str(caught.value) == f"board.xml: line 10: {told}; correct it there or export the file again"


def test_an_outline_that_begins_twice_is_refused() -> None:
    outline = _ring("Polygon", 4, 40, more='<PolyBegin x="0" y="0"/>')
    with pytest.raises(BoardError, match="Polygon has a PolyBegin out of its order"):
        read(document(feature(f"<Contour>{outline}</Contour>")))
