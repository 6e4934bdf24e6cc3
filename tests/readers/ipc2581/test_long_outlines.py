"""Long outlines are taken in all at once; they must give what reading them step by step gives."""

from __future__ import annotations

import math
import re

import numpy as np
import pytest

from pairrules.errors import BoardError
from pairrules.readers.ipc2581 import parsing
from pairrules.readers.ipc2581.features import Shapes
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
    monkeypatch.setattr(Shapes, "keep_outline", lambda *_: None)
    slow = read(document(drawn, units=units)).areas
    assert len(quick) == len(slow) == 1
    assert np.array_equal(quick[0].outline, slow[0].outline)
    assert [len(hole) for hole in quick[0].holes] == [len(hole) for hole in slow[0].holes]
    assert len(quick[0].holes[0]) == 30
    assert all(np.array_equal(a, b) for a, b in zip(quick[0].holes, slow[0].holes, strict=True))


def test_voids_do_not_count_against_what_a_record_may_hold(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(parsing, "MOST_IN_RECORD", 400)
    voids = "".join(_round("Cutout", 0.01 * i, 2) for i in range(1, 301))
    (area,) = read(document(feature(f"<Contour>{_ring('Polygon', 4, 40)}{voids}</Contour>"))).areas
    assert len(area.holes) == 300


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


@pytest.mark.parametrize("corners", [6, 40])
def test_a_line_along_a_long_polygon_keeps_its_steps(corners: int) -> None:
    style = '<LineDesc lineEnd="ROUND" lineWidth="0.2"/>'
    board = read(document(feature(f"<Outline>{_ring('Polygon', 4, corners)}{style}</Outline>")))
    assert len(board.tracks) >= corners
    assert not board.areas


@pytest.mark.parametrize("corners", [5, 40])
def test_an_outline_without_a_beginning_is_refused(corners: int) -> None:
    outline = _ring("Polygon", 4, corners).replace("PolyBegin", "PolyStepSegment")
    with pytest.raises(BoardError, match="Polygon has a PolyStepSegment out of its order"):
        read(document(feature(f"<Contour>{outline}</Contour>")))


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("<PolyStepSegment", "\n   <PolyStepSegment"),
        ("<PolyStepSegment", "told <!-- a word --><PolyStepSegment"),
        ("<PolyStepSegment", '<PolyStepSegment comment="&quot;&#233;"'),
        ("<PolyStepSegment", '<PolyStepSegment z="1"'),
        ("<PolyBegin", '<PolyBegin z="1"'),
        ('y="5.0"', "y='5.0'"),
        ('x="9.0"', 'x="+9"'),
        ('x="9.0"', 'x=" 9 "'),
        ('x="9.0"', 'x="9."'),
        ('x="9.0"', 'x="0.9e1"'),
        ('x="9.0"', 'x="&#57;"'),
    ],
)
def test_other_ways_to_write_the_same(old: str, new: str) -> None:
    ring = _ring("Polygon", 4.0, 40).replace(' y="5"', ' y="5.0"')
    assert old in ring
    (plain,) = read(document(feature(f"<Contour>{ring}</Contour>"))).areas
    (other,) = read(document(feature(f"<Contour>{ring.replace(old, new)}</Contour>"))).areas
    assert np.array_equal(plain.outline, other.outline)


def test_another_prefix_and_order_of_coordinates() -> None:
    ring = _ring("Polygon", 4.0, 40)
    (plain,) = read(document(feature(f"<Contour>{ring}</Contour>"))).areas
    turned = re.sub(r'(x="[^"]*") (y="[^"]*")', r"\2 \1", ring)
    prefixed = re.sub(r"<(/?)(\w)", r"<\1i:\2", document(feature(f"<Contour>{ring}</Contour>")).decode())
    (swapped,) = read(document(feature(f"<Contour>{turned}</Contour>"))).areas
    (other,) = read(prefixed.replace("xmlns=", "xmlns:i=").encode()).areas
    assert np.array_equal(plain.outline, swapped.outline)
    assert np.array_equal(plain.outline, other.outline)
