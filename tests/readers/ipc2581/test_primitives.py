"""The area of every standard primitive against its closed form (elementary geometry), and the pad it makes.

Arcs are chords within half a micrometre of the circle, so that a disc of radius r lacks at most 2π r · 0.0005 mm².
"""

from __future__ import annotations

import math

import pytest
from shapely.geometry import Polygon

from tests.readers.ipc2581.documents import box, document, feature, line, pad, read

PI = math.pi
R3 = math.sqrt(3)

AREAS = {
    "circle": ('<Circle diameter="2"/>', PI),
    "rect centre": ('<RectCenter width="3" height="2"/>', 6),
    "rect corner": ('<RectCorner lowerLeftX="1" lowerLeftY="1" upperRightX="4" upperRightY="3"/>', 6),
    "rect round": ('<RectRound width="3" height="2" radius="0.5"/>', 6 - (4 - PI) * 0.25),
    "rect round, one corner": (
        '<RectRound width="3" height="2" radius="0.5" upperLeft="true"/>',
        6 - (4 - PI) * 0.25 / 4,
    ),
    "rect round, three": (
        '<RectRound width="3" height="2" radius="0.5" upperLeft="false"/>',
        6 - (4 - PI) * 0.25 * 3 / 4,
    ),
    "rect chamfered": ('<RectCham width="3" height="2" chamfer="0.5"/>', 6 - 4 * 0.125),
    "rect chamfered, two": (
        '<RectCham width="3" height="2" chamfer="0.5" upperRight="true" lowerLeft="1"/>',
        6 - 2 * 0.125,
    ),
    "oval": ('<Oval width="3" height="2"/>', 2 + PI),
    "oval upright": ('<Oval width="2" height="3"/>', 2 + PI),
    "ellipse": ('<Ellipse width="3" height="2"/>', PI * 1.5),
    "diamond": ('<Diamond width="3" height="2"/>', 3),
    "triangle": ('<Triangle base="3" height="2"/>', 3),
    # Corner to corner 2: six triangles of side 1; eight of legs 1 with 45 degrees between them.
    "hexagon": ('<Hexagon length="2"/>', 6 * R3 / 4),
    "octagon": ('<Octagon length="2"/>', 8 * math.sin(PI / 4) / 2),
    "butterfly round": ('<Butterfly shape="ROUND" diameter="2"/>', PI / 2),
    "butterfly square": ('<Butterfly shape="SQUARE" side="2"/>', 2),
    "donut": ('<Donut shape="ROUND" outerDiameter="3" innerDiameter="2"/>', PI * (2.25 - 1)),
    "donut square": ('<Donut shape="SQUARE" outerDiameter="3" innerDiameter="2"/>', 5),
    "donut hexagon": ('<Donut shape="HEXAGON" outerDiameter="4" innerDiameter="2"/>', 6 * R3 / 4 * 3),
    "donut octagon": ('<Donut shape="OCTAGON" outerDiameter="4" innerDiameter="2"/>', 8 * math.sin(PI / 4) / 2 * 3),
    # A square ring from 2 to 4, cut by four spokes of 0.5 at right angles to its sides.
    "thermal square": (
        '<Thermal shape="SQUARE" outerDiameter="4" innerDiameter="2" spokeCount="4" gap="0.5" spokeStartAngle="0"/>',
        12 - 4 * 0.5 * 1,
    ),
    "thermal, no spokes": (
        '<Thermal shape="ROUND" outerDiameter="4" innerDiameter="2" spokeCount="0" gap="0.5" spokeStartAngle="0"/>',
        3 * PI,
    ),
    # One ring from 2 to 2.5, one from 1 to 1.5 in radius.
    "moire": ('<Moire diameter="5" ringWidth="0.5" ringGap="0.5" ringNumber="2"/>', PI * (6.25 - 4 + 2.25 - 1)),
    # A cross of two lines of 4 by 1, no rings.
    "moire cross": (
        '<Moire diameter="5" ringWidth="1" ringGap="1" ringNumber="0" lineWidth="1" lineLength="4" lineAngle="30"/>',
        7,
    ),
    "contour": (f"<Contour>{box(0, 0, 3, 2)}{box(1, 0.5, 2, 1.5, tag='Cutout')}</Contour>", 5),
}


def area(drawn: str) -> float:
    areas = read(document(feature(drawn))).areas
    return sum(Polygon(a.outline, list(a.holes)).area for a in areas)


@pytest.mark.parametrize("name", AREAS)
def test_area(name: str) -> None:
    drawn, expected = AREAS[name]
    assert area(drawn) == pytest.approx(expected, abs=2 * PI * 4.5 * 0.0005)


def test_spokes_of_a_round_thermal() -> None:
    """A spoke of width g from radius a to b covers ∫ of the ring within ±g/2 of its axis."""
    a, b, g = 1.0, 2.0, 0.5

    def segment(r: float) -> float:  # area of a disc within |y| < g/2 and x > 0
        return g / 2 * math.sqrt(r * r - g * g / 4) + r * r * math.asin(g / 2 / r)

    drawn = '<Thermal shape="ROUND" outerDiameter="4" innerDiameter="2" spokeCount="4" gap="0.5" spokeStartAngle="45"/>'
    assert area(drawn) == pytest.approx(PI * (b * b - a * a) - 4 * (segment(b) - segment(a)), abs=0.01)


@pytest.mark.parametrize(
    ("drawn", "kind", "size", "radius"),
    [
        ('<Circle diameter="2"/>', "circle", (2, 2), 0),
        ('<RectCenter width="3" height="2"/>', "rect", (3, 2), 0),
        ('<RectCorner lowerLeftX="-1" lowerLeftY="-2" upperRightX="1" upperRightY="2"/>', "rect", (2, 4), 0),
        ('<RectRound width="3" height="2" radius="0.5"/>', "round_rect", (3, 2), 0.5),
        ('<Oval width="3" height="2"/>', "oval", (3, 2), 0),
        ('<Donut shape="ROUND" outerDiameter="3" innerDiameter="2"/>', "circle", (3, 3), 0),
        ('<Butterfly shape="SQUARE" side="2"/>', "rect", (2, 2), 0),
        ('<Triangle base="3" height="2"/>', "polygon", (3, 2), 0),
        ('<Diamond width="3" height="2"/>', "polygon", (3, 2), 0),
        ('<Hexagon length="2"/>', "polygon", (2, R3), 0),
        (f"<Contour>{box(0, 0, 3, 2)}</Contour>", "polygon", (3, 2), 0),
    ],
)
def test_pad(drawn: str, kind: str, size: tuple[float, float], radius: float) -> None:
    pads = read(document(pad(drawn))).pads
    shape = pads.shapes[pads.shape[0]]
    assert (shape.kind, shape.radius) == (kind, radius)
    assert shape.size == pytest.approx(size)


def test_a_pad_drawn_by_lines_is_their_outline() -> None:
    drawn = (
        '<UserSpecial><Line startX="-1" startY="0" endX="1" endY="0"><LineDesc lineEnd="ROUND" lineWidth="1"/></Line>'
        "</UserSpecial>"
    )
    pads = read(document(pad(drawn))).pads
    shape = pads.shapes[pads.shape[0]]
    assert Polygon(shape.points).area == pytest.approx(2 + PI / 4, rel=0.001)


def test_shapes_are_kept_once() -> None:
    pads = read(
        document(pad('<Circle diameter="2"/>') + pad('<Circle diameter="2"/>') + pad('<Circle diameter="1"/>'))
    ).pads
    assert len(pads.shapes) == 2
    assert pads.shape.tolist() == [0, 0, 1]


@pytest.mark.parametrize(
    ("filling", "copper"), [("FILL", 4.0), ("HATCH", 4.0), ("MESH", 4.0), ("HOLLOW", 0.0), ("VOID", 0.0)]
)
def test_what_is_not_filled_is_no_copper(filling: str, copper: float) -> None:
    drawn = f'<RectCenter width="2" height="2"><FillDesc fillProperty="{filling}"/></RectCenter>'
    board = read(document(feature(line((5, 5), (6, 5))) + feature(drawn)))
    assert sum(Polygon(a.outline).area for a in board.areas) == pytest.approx(copper)


def test_a_hollow_shape_with_a_line_is_its_outline() -> None:
    drawn = (
        '<RectCenter width="2" height="2"><LineDesc lineEnd="ROUND" lineWidth="0.1"/><FillDesc fillProperty="HOLLOW"/>'
        "</RectCenter>"
    )
    board = read(document(feature(drawn)))
    assert board.areas == ()
    assert len(board.tracks) == 4
    assert board.tracks.width.tolist() == pytest.approx([0.1] * 4)


def test_a_filling_by_name_holds_for_the_polygon_too() -> None:
    fillings = (
        '<DictionaryFillDesc units="MILLIMETER"><EntryFillDesc id="none"><FillDesc fillProperty="HOLLOW"/>'
        "</EntryFillDesc></DictionaryFillDesc>"
    )
    outline = box(0, 0, 2, 2).replace("</Polygon>", '<FillDescRef id="none"/></Polygon>')
    board = read(
        document(feature(f"<Contour>{outline}</Contour>") + feature('<Circle diameter="1"/>'), dictionaries=fillings)
    )
    assert len(board.areas) == 1
    assert "1 hollow shape without line width is no copper and is left out" in board.missing
