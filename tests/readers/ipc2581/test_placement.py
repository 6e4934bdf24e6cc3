"""Placements at each place the standard allows, against coordinates worked out by hand."""

from __future__ import annotations

import math

import pytest

from tests.readers.ipc2581.documents import box, document, feature, line, pad, read

RECT = '<RectCenter width="2" height="1"/>'


def ends(data: bytes) -> list[tuple[float, ...]]:
    tracks = read(data).tracks
    return [(*s, *e) for s, e in zip(tracks.start.round(9).tolist(), tracks.end.round(9).tolist(), strict=True)]


@pytest.mark.parametrize(
    ("before", "expected"),
    [
        ("", (1, 0, 3, 1)),
        ('<Location x="10" y="5"/>', (11, 5, 13, 6)),
        ('<Xform rotation="90"/>', (0, 1, -1, 3)),
        ('<Xform mirror="true"/>', (-1, 0, -3, 1)),
        ('<Xform scale="2"/>', (2, 0, 6, 2)),
        ('<Xform xOffset="0.5" yOffset="-1"/>', (1.5, -1, 3.5, 0)),
        ('<Xform rotation="180"/><Location x="10" y="5"/>', (9, 5, 7, 4)),
        ('<Xform rotation="450"/>', (0, 1, -1, 3)),
        # Mirrored first, (-1, 0) and (-3, 1), then turned by 90 degrees.
        ('<Xform rotation="90" mirror="true"/>', (0, -1, -1, -3)),
        # Doubled, turned, then moved.
        ('<Xform rotation="90" scale="2" xOffset="1" yOffset="2"/><Location x="10" y="5"/>', (11, 9, 9, 13)),
    ],
)
def test_features_are_placed(before: str, expected: tuple[float, ...]) -> None:
    assert ends(document(feature(line((1, 0), (3, 1)), before=before))) == [expected]


def test_a_scaled_line_is_as_wide_as_it_is_long() -> None:
    board = read(document(feature(line((0, 0), (1, 0), width=0.2), before='<Xform scale="3"/>')))
    assert board.tracks.width.tolist() == pytest.approx([0.6])


def test_every_location_repeats_the_feature() -> None:
    places = '<Location x="0" y="0"/><Location x="5" y="0"/><Location x="5" y="5"/>'
    starts = read(document(feature(line((0, 1), (1, 1)), before=places))).tracks.start.tolist()
    assert starts == [[0, 1], [5, 1], [5, 6]]


def test_placements_in_user_shapes_come_before_those_of_the_feature() -> None:
    inner = f'<UserSpecial><Polyline><PolyBegin x="1" y="0"/><PolyStepSegment x="2" y="0"/><LineDesc lineEnd="ROUND" lineWidth="0.1"/><Xform rotation="90"/></Polyline></UserSpecial>'  # noqa: E501, F541
    before = '<Xform mirror="true"/><Location x="10" y="0"/>'
    # Turned by its own placement to (0, 1) - (0, 2); the mirror leaves x = 0; then moved.
    assert ends(document(feature(inner, before=before))) == [(10, 1, 10, 2)]


def test_user_shapes_are_found_by_name_and_in_their_dictionary_s_unit() -> None:
    entry = f'<EntryUser id="mark"><UserSpecial>{line((0, 0), (1000, 0), width=100)}</UserSpecial></EntryUser>'
    held = f'<DictionaryUser units="MICRON">{entry}</DictionaryUser>'
    drawn = feature('<UserPrimitiveRef id="mark"/>', before='<Xform rotation="90"/><Location x="4" y="4"/>')
    board = read(document(drawn, dictionaries=held))
    assert ends(document(drawn, dictionaries=held)) == [(4, 4, 4, 5)]
    assert board.tracks.width.tolist() == pytest.approx([0.1])


@pytest.mark.parametrize(
    ("before", "at", "rotation", "mirror"),
    [
        ('<Location x="3" y="4"/>', (3, 4), 0, False),
        ('<Xform rotation="90"/><Location x="3" y="4"/>', (3, 4), 90, False),
        ('<Xform rotation="30" mirror="true"/><Location x="3" y="4"/>', (3, 4), 30, True),
        ('<Xform rotation="360.000" mirror="true"/><Location x="3" y="4"/>', (3, 4), 0, True),
        ('<Location x="3" y="4"/><Xform rotation="90"/>', (3, 4), 90, False),
        ('<Xform xOffset="0.5" yOffset="0.25"/><Location x="3" y="4"/>', (3.5, 4.25), 0, False),
    ],
)
def test_pads_are_placed(before: str, at: tuple[float, float], rotation: float, *, mirror: bool) -> None:
    pads = read(document(pad(RECT, before=before))).pads
    assert pads.at[0] == pytest.approx(at)
    assert pads.rotation[0] == pytest.approx(math.radians(rotation))
    assert bool(pads.mirror[0]) is mirror


def test_a_scaled_pad_has_its_scaled_size() -> None:
    pads = read(document(pad(RECT, before='<Xform scale="1.5"/><Location x="0" y="0"/>'))).pads
    assert pads.shapes[pads.shape[0]].size == pytest.approx((3, 1.5))


def test_a_primitive_s_own_placement_shifts_the_pad_s_outline() -> None:
    held = (
        '<DictionaryStandard units="MILLIMETER"><EntryStandard id="s"><RectCenter width="2" height="1">'
        '<Xform rotation="90" xOffset="1"/></RectCenter></EntryStandard></DictionaryStandard>'
    )
    pads = read(document(pad('<StandardPrimitiveRef id="s"/>'), dictionaries=held)).pads
    x, y = zip(*pads.shapes[pads.shape[0]].points, strict=True)
    assert (min(x), max(x), min(y), max(y)) == pytest.approx((0.5, 1.5, -1, 1))


def test_arcs_turn_the_other_way_when_mirrored() -> None:
    arc = (
        '<Arc startX="1" startY="0" endX="0" endY="1" centerX="0" centerY="0" clockwise="false">'
        '<LineDesc lineEnd="ROUND" lineWidth="0.1"/></Arc>'
    )
    plain = read(document(feature(arc))).tracks
    mirrored = read(document(feature(arc, before='<Xform mirror="true"/>'))).tracks
    assert plain.sweep.tolist() == pytest.approx([math.pi / 2])
    assert mirrored.sweep.tolist() == pytest.approx([-math.pi / 2])
    assert mirrored.start[0] == pytest.approx((-1, 0))
    assert mirrored.centre[0] == pytest.approx((0, 0))


@pytest.mark.parametrize(
    ("clockwise", "sweep"),
    [('clockwise="true"', -math.pi / 2), ('clockwise="false"', 3 * math.pi / 2), ("", -math.pi / 2)],
)
def test_curved_steps_turn_as_told_and_clockwise_where_not(clockwise: str, sweep: float) -> None:
    drawn = (
        f'<Polyline><PolyBegin x="0" y="1"/><PolyStepCurve x="1" y="0" centerX="0" centerY="0" {clockwise}/>'
        '<LineDesc lineEnd="ROUND" lineWidth="0.1"/></Polyline>'
    )
    tracks = read(document(feature(drawn))).tracks
    assert tracks.sweep.tolist() == pytest.approx([sweep])


def test_an_arc_back_to_its_start_is_a_circle() -> None:
    arc = (
        '<Arc startX="1" startY="0" endX="1" endY="0" centerX="0" centerY="0" clockwise="true">'
        '<LineDesc lineEnd="ROUND" lineWidth="0.1"/></Arc>'
    )
    assert read(document(feature(arc))).tracks.sweep.tolist() == pytest.approx([-2 * math.pi])


def test_a_placed_contour_is_placed_with_its_cutouts() -> None:
    drawn = f"<Contour>{box(0, 0, 4, 2)}{box(1, 0.5, 2, 1, tag='Cutout')}</Contour>"
    (area,) = read(document(feature(drawn, before='<Xform rotation="90"/><Location x="10" y="0"/>'))).areas
    assert sorted(map(tuple, area.outline.round(9).tolist())) == [(8, 0), (8, 4), (10, 0), (10, 4)]
    assert sorted(map(tuple, area.holes[0].round(9).tolist())) == [(9, 1), (9, 2), (9.5, 1), (9.5, 2)]


def test_an_offset_together_with_a_turn_is_remarked_upon() -> None:
    board = read(document(feature(line((0, 0), (1, 0)), before='<Xform rotation="90" xOffset="1"/>')))
    assert "1 placement is read as turned first and then moved by the offset" in board.missing
