"""Files that cannot be read, each refused in one line with place and remedy; and what is left out, never in silence."""

from __future__ import annotations

import re

import numpy as np
import pytest

from fixtures.ipc2581_writer import to_ipc2581
from pairrules.errors import BoardError
from pairrules.readers.ipc2581 import READER
from pairrules.readers.reader import read_board
from tests.readers.ipc2581.documents import PROFILE, box, document, feature, line, pad, read
from tests.readers.ipc2581.test_round_trip import BOARD

TRACK = feature(line((0, 0), (1, 0)))
MEND = "correct it there or export the file again"


def refused(data: bytes) -> str:
    with pytest.raises(BoardError) as caught:
        read(data)
    return str(caught.value)


@pytest.mark.parametrize(
    ("drawn", "found"),
    [
        ('<Pad><Location x="abc" y="0"/></Pad>', 'Location has x="abc", which is no number'),
        ('<Pad><Location x="nan" y="0"/></Pad>', 'Location has x="nan", which is no number'),
        ('<Pad><Location x="1" y="-inf"/></Pad>', 'Location has y="-inf", which is no number'),
        ('<Pad><Location x="1_0" y="0"/></Pad>', 'Location has x="1_0", which is no number'),
        ('<Pad><Location x="" y="0"/></Pad>', 'Location has x="", which is no number'),
        ('<Pad><Location y="0"/></Pad>', "Location has no x"),
        ('<Pad><Location x="1e300" y="0"/></Pad>', 'Location has x="1e300", which is beyond any board'),
        ('<Pad><Location x="&#155;31m" y="0"/></Pad>', 'Location has x="31m", which is no number'),
        ('<Pad><Circle diameter="-1"/></Pad>', 'Circle has diameter="-1", which is negative'),
        ('<Pad><Xform rotation="left"/></Pad>', 'Xform has rotation="left", which is no number'),
        ('<Pad><Xform scale="0"/></Pad>', 'Xform has scale="0"; a scale is greater than 0'),
        ('<Pad><Xform mirror="maybe"/></Pad>', 'Xform has mirror="maybe", which is neither true nor false'),
        ("<Features><Contour/></Features>", "Contour has no Polygon"),
        ("<Features><Contour><Polygon/></Contour></Features>", "Polygon has no PolyBegin"),
        (
            '<Features><Contour><Polygon><PolyStepSegment x="0" y="0"/></Polygon></Contour></Features>',
            "Polygon has a PolyStepSegment out of its order",
        ),
        (
            '<Features><Donut shape="ROUND" outerDiameter="1" innerDiameter="2"/></Features>',
            "Donut has an innerDiameter greater than its outerDiameter",
        ),
        (
            '<Features><Moire diameter="5" ringWidth="0.1" ringGap="0.1" ringNumber="100000000"/></Features>',
            "Moire has 100000000 rings",
        ),
    ],
)
def test_what_an_element_cannot_say_is_refused_with_its_line(drawn: str, found: str) -> None:
    data = document(f'<Set net="A">\n{drawn}</Set>')
    number = next(i for i, text in enumerate(data.decode().split("\n"), 1) if text.startswith(drawn))
    assert refused(data) == f"board.xml: line {number}: {found}; {MEND}"


def test_units_that_are_none() -> None:
    assert refused(document(TRACK, units="FURLONG")) == (
        'board.xml: line 4: CadHeader has units="FURLONG"; write MILLIMETER, MICRON or INCH'
    )
    data = document(TRACK).replace(b'<CadHeader units="MILLIMETER">', b"<CadHeader>")
    assert refused(data) == "board.xml: line 4: CadHeader has no units; write MILLIMETER, MICRON or INCH"


def test_a_dictionary_without_units() -> None:
    held = '<DictionaryStandard><EntryStandard id="c"><Circle diameter="1"/></EntryStandard></DictionaryStandard>'
    assert refused(document(TRACK, dictionaries=held)) == (
        "board.xml: line 3: the dictionary of this EntryStandard has no units; write MILLIMETER, MICRON or INCH"
    )


def test_a_step_before_any_header() -> None:
    data = document(TRACK).replace(b'<CadHeader units="MILLIMETER"></CadHeader>', b"")
    assert refused(data) == f"board.xml: line 6: Step stands before any CadHeader with units; {MEND}"


def test_a_file_that_breaks_off() -> None:
    data = document(TRACK)
    cut = data[: data.index(b"</Features>")]
    number = cut.count(b"\n") + 1
    assert refused(cut) == (f"board.xml: line {number}: the XML breaks off before its end; export the file again")


def test_tags_that_do_not_match() -> None:
    data = document(TRACK).replace(b"</Features>", b"</Feature>")
    assert refused(data) == ("board.xml: line 8: an element is closed by the end tag of another; export the file again")


def test_a_file_without_copper() -> None:
    said = "board.xml: the file holds no board copper; export the board with its copper layers"
    assert refused(document("<Set/>")) == said
    silk = '<Layer name="TOP" layerFunction="SILKSCREEN" side="TOP" polarity="POSITIVE"/>'
    assert refused(document(TRACK, layers=silk, bottom="")) == said


def test_a_step_that_stands_twice() -> None:
    data = document(TRACK, more_steps=f'<Step name="board">{PROFILE}</Step>')
    number = next(i for i, text in enumerate(data.decode().split("\n"), 1) if text.startswith("</LayerFeature>"))
    assert refused(data) == f'board.xml: line {number}: step "board" stands twice in the file; {MEND}'


@pytest.mark.parametrize(
    "declared",
    [
        b"<!DOCTYPE IPC-2581>",
        b'<!DOCTYPE IPC-2581 SYSTEM "http://example.invalid/board.dtd">',
        b'<!DOCTYPE IPC-2581 [<!ENTITY a "aaaa"><!ENTITY b "&a;&a;&a;">]>',
        b'<!DOCTYPE IPC-2581 [<!ENTITY f SYSTEM "file:///etc/hostname">]>',
    ],
)
def test_a_doctype_is_refused(declared: bytes) -> None:
    data = document(TRACK).replace(b"<IPC-2581 ", declared + b"\n<IPC-2581 ", 1)
    assert READER.recognises(data.replace(declared, b""))
    assert refused(data) == (
        "board.xml: line 2: the file has a DOCTYPE, which a board file does not need; remove the DOCTYPE"
    )


def test_a_doctype_behind_a_long_comment_is_refused_too() -> None:
    comment = b"<!--" + b"x" * 100_000 + b"-->"
    data = document(TRACK).replace(b"<IPC-2581 ", comment + b"\n<!DOCTYPE IPC-2581>\n<IPC-2581 ", 1)
    assert refused(data) == (
        "board.xml: line 3: the file has a DOCTYPE, which a board file does not need; remove the DOCTYPE"
    )


def test_shapes_that_name_others_without_end_are_refused() -> None:
    entries = '<EntryUser id="u0"><UserSpecial><Circle diameter="1"/></UserSpecial></EntryUser>'
    for level in range(1, 12):
        inner = f'<UserPrimitiveRef id="u{level - 1}"/>' * 10
        entries += f'<EntryUser id="u{level}"><UserSpecial>{inner}</UserSpecial></EntryUser>'
    held = f'<DictionaryUser units="MILLIMETER">{entries}</DictionaryUser>'
    assert refused(document(TRACK, dictionaries=held)) == (
        f"board.xml: line 3: a user shape draws more than 20000 pieces; {MEND}"
    )


@pytest.mark.parametrize("other", [b"<svg/>", b"<IPC-2582/>", b"not xml at all", b"{}", b"", b"\x00\x01\x02"])
def test_other_files_are_not_recognised(other: bytes) -> None:
    assert not READER.recognises(other)


@pytest.mark.parametrize(
    "before",
    [b"", b"\n\n", b"<!-- IPC -->", b'<?xml version="1.0"?><!-- <svg/> -->\n<?pi x?>', b"\xef\xbb\xbf<!-- a -->"],
)
def test_the_root_is_found_behind_comments_and_declarations(before: bytes) -> None:
    assert READER.recognises(before + b'<IPC-2581 revision="B"/>')
    assert READER.recognises(before + b'<x:IPC-2581 xmlns:x="y" revision="B"/>')


def test_the_reader_is_chosen_by_content() -> None:
    assert read_board(document(TRACK), "board.json").format == "IPC-2581"


# -- what is left out is said -----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("sets", "said"),
    [
        (
            '<Set net="A"><Xyz/><Xyz/><Xyz/></Set>',
            "3 elements Xyz in layer features were not understood and are left out",
        ),
        (feature('<Text textString="R1"/>'), "1 element Text in layer features was not understood and is left out"),
        (pad("<Blob/>"), "1 element Blob in pads was not understood and is left out"),
        (
            feature("<UserSpecial><Blob/></UserSpecial>"),
            "1 element Blob in user shapes was not understood and is left out",
        ),
        (feature(line((0, 0), (1, 0), width=0)), "1 line on copper without a width is left out (on line 8)"),
        (
            feature('<Polyline><PolyBegin x="0" y="0"/><PolyStepSegment x="1" y="0"/></Polyline>'),
            "1 line on copper without a width is left out (on line 8)",
        ),
        (feature(line((0, 0), (0, 0), (1, 0))), "1 line piece without length is left out (on line 8)"),
        (
            feature('<StandardPrimitiveRef id="gone"/>'),
            "1 shape named by features is not in the file's dictionaries and is left out",
        ),
        (
            feature('<Line startX="0" startY="0" endX="1" endY="0"><LineDescRef id="gone"/></Line>'),
            "1 line style named by features is not in the file's dictionary",
        ),
        (
            feature('<Contour><Polygon><PolyBegin x="0" y="0"/><PolyStepSegment x="1" y="0"/></Polygon></Contour>'),
            "1 outline of fewer than three corners is left out (on line 8)",
        ),
        (feature('<Circle diameter="0"/>'), "1 area without extent is left out"),
        (feature('<Hexagon length="1"/>'), "1 hexagon or octagon is read with the length from corner to corner"),
    ],
)
def test_what_is_left_out_is_said(sets: str, said: str) -> None:
    assert said in read(document(TRACK + sets)).missing


def arc(end_y: float) -> str:
    return feature(
        f'<Arc startX="1" startY="0" endX="0" endY="{end_y}" centerX="0" centerY="0" clockwise="false">'
        '<LineDesc lineEnd="ROUND" lineWidth="0.1"/></Arc>'
    )


def test_an_arc_that_does_not_quite_fit_its_ends_is_mended_by_the_nearest_centre_and_said() -> None:
    """The centre moves along the chord's direction onto the chord's bisector: for ends (1, 0) and (0, 1.04)."""
    board = read(document(arc(1.04)))
    assert (
        "1 arc with ends at unequal distances from the centre is drawn about the nearest one that fits (on line 8)"
        in (board.missing)
    )
    (centre,) = board.tracks.centre
    near, far = np.hypot(*(centre - (1, 0))), np.hypot(*(centre - (0, 1.04)))
    assert near == pytest.approx(far, rel=1e-12)
    along = (1.04**2 - 1) / 2 / np.hypot(1, 1.04)
    assert np.hypot(*centre) == pytest.approx(along, rel=1e-9)


def test_an_arc_that_fits_nowhere_near_is_refused() -> None:
    assert refused(document(arc(2))) == (
        f"board.xml: line 8: Arc has its centre 1 mm from its start and 2 mm from its end; {MEND}"
    )


def test_what_is_not_copper_is_not_spoken_of() -> None:
    sets = '<Set><ColorRef id="c"/><NonstandardAttribute name="n" type="STRING" value="v"/></Set>'
    assert read(document(TRACK + sets)).missing == (
        "the file has no stackup: barrel lengths and impedances are unknown",
    )


def test_names_lose_their_control_characters() -> None:
    board = read(document(feature(line((0, 0), (1, 0)), net="A&#155;31m&#10;B&#8238;")))
    assert board.nets == ("A31m B",)


def test_measurements_and_other_lists_are_passed_over() -> None:
    measured = (
        '<DfxMeasurementList name="m"><DfxMeasurement value="1">'
        + box(0, 0, 1, 1)
        + "</DfxMeasurement></DfxMeasurementList>"
    )
    assert len(read(document(TRACK, more_features=measured)).tracks) == 1


def changed(data: bytes) -> list[bytes]:
    """The document with every kind of attribute once made nonsense or taken away."""
    text = data.decode()
    seen: set[tuple[str, str]] = set()
    changes: list[bytes] = []
    for tag in re.finditer(r"<([A-Za-z]+) ([^<>]*)>", text):
        for attribute in re.finditer(r'([A-Za-z]+)="([^"]*)"', tag[2]):
            kind = (tag[1], attribute[1])
            if kind in seen:
                continue
            seen.add(kind)
            start, end = tag.start(2) + attribute.start(), tag.start(2) + attribute.end()
            others = ("", *(f'{attribute[1]}="{junk}"' for junk in ("", "x", "-1")))
            changes += [(text[:start] + other + text[end:]).encode() for other in others]
    return changes


@pytest.mark.parametrize("revision", ["A", "C"])
def test_any_attribute_may_be_nonsense(revision: str) -> None:
    """A file is read or refused in one line, whatever stands in it."""
    changes = changed(to_ipc2581(BOARD, revision=revision))
    assert len(changes) > 300
    outcomes, sentences = set(), []
    for data in changes:
        try:
            outcomes.add(read(data).format)
        except BoardError as error:
            outcomes.add("refused")
            sentences.append(str(error))
    assert outcomes == {"IPC-2581", "refused"}
    assert [said for said in sentences if "; " not in said or not said.isprintable()] == []
