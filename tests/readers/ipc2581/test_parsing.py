"""The parser's bounds, encodings and words, apart from what a board is."""

from __future__ import annotations

import pytest

from pairrules.errors import BoardError
from pairrules.readers.ipc2581.element import Element
from pairrules.readers.ipc2581.parsing import MOST_DEEP, MOST_IN_RECORD, follow


class Walk:
    """Takes every `Set` as a record and writes down what it is told."""

    def __init__(self) -> None:
        self.told: list[str] = []
        self.records: list[Element] = []

    def starts(self, element: Element) -> bool:
        self.told.append(f"<{element.tag} {element.line}")
        return element.tag == "Set"

    def ends(self, tag: str) -> None:
        self.told.append(f"{tag}>")

    def outline(self, record: Element, holder: Element, element: Element) -> None:
        self.told.append(f"{element.tag} of {len(element.steps)} in {record.tag}")
        if element.tag == "Cutout":
            element.steps = ()

    def take(self, record: Element) -> None:
        self.records.append(record)


def walked(text: str | bytes) -> Walk:
    walk = Walk()
    follow(text if isinstance(text, bytes) else text.encode(), walk)
    return walk


def refused(text: str | bytes) -> str:
    with pytest.raises(BoardError) as caught:
        walked(text)
    return f"{caught.value.place}: {caught.value.found}"


STEP = '<PolyStepSegment x="1" y="2"/>'


def test_records_are_handed_over_whole() -> None:
    walk = walked(
        f"<a xmlns:p='urn:p'>\n<b/>\n<p:Set net='N'>\n<Pad><Location x='1' y='2'/></Pad>\n"
        f"<Polygon>\n<PolyBegin x='0' y='0'/>\n{STEP}<Xform/>\n{STEP}</Polygon></p:Set></a>"
    )
    assert walk.told == ["<a 1", "<b 2", "b>", "<Set 3", "Polygon of 3 in Set", "a>"]
    (record,) = walk.records
    pad, polygon = record
    assert (record.get("net"), record.get("x"), len(record), bool(record)) == ("N", None, 2, True)
    assert [(inner.tag, inner.line, inner.attributes) for inner in pad] == [("Location", 4, {"x": "1", "y": "2"})]
    # Steps come first, whatever stands between them.
    assert [(inner.tag, inner.line) for inner in polygon] == [
        ("PolyBegin", 6), ("PolyStepSegment", 7), ("PolyStepSegment", 8), ("Xform", 7),
    ]  # fmt: skip


def test_what_stands_in_a_step_is_nothing() -> None:
    walk = walked(
        f"<a><Set><Polygon>{STEP}<PolyBegin x='0' y='0'><b><PolyBegin/></b></PolyBegin>{STEP}</Polygon></Set></a>"
    )
    assert walk.told == ["<a 1", "<Set 1", "Polygon of 3 in Set", "a>"]


def test_a_record_of_too_much_is_refused() -> None:
    inner = "<b c='1' d='2'/>" * (MOST_IN_RECORD // 3)
    assert refused(f"<a>\n<Set>{inner}</Set></a>") == (
        f"line 2: Set holds more than {MOST_IN_RECORD} elements and attributes"
    )
    assert refused(f"<a>\n<Set><Polygon>{STEP * (MOST_IN_RECORD // 2)}</Polygon></Set></a>").startswith("line 2: Set")
    # What the walk has taken out of an outline counts no longer.
    cutout = f"<Cutout>{STEP * 1000}</Cutout>"
    assert len(walked(f"<a><Set>{cutout * (MOST_IN_RECORD // 1000)}</Set></a>").records) == 1


@pytest.mark.parametrize("inside", ["", "<Set>"])
def test_elements_within_elements_without_end_are_refused(inside: str) -> None:
    assert refused(f"<a>{inside}" + "<b>" * MOST_DEEP * 2) == "line 1: elements are nested too deep"


def test_a_value_of_many_megabytes_is_refused() -> None:
    said = "line 1: a name, value or text is longer than 8 MB"
    assert refused("<a b='" + "x" * 11_000_000 + "'/>") == said
    assert refused("<a><!--" + "x" * 11_000_000 + "--></a>") == said


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", "line 1: the XML is empty"),
        ("<a>\n<b>", "line 2: the XML breaks off before its end"),
        ("<a>\n<b", "line 2: the XML breaks off before its end"),
        ("<a>\n<!-- b", "line 2: the XML breaks off before its end"),
        ("<a>\n</b>", "line 2: an element is closed by the end tag of another"),
        ("<a/>\n<b/>", "line 2: the XML goes on after its end"),
        ("<a>&b;</a>", "line 1: the XML is not well formed"),
        ("<a b='1' b='2'/>", "line 1: the XML is not well formed"),
        (f"<{'a' * 5000}/>", "line 1: the name of an element has 5000 characters"),
        ("<p:a/>", "line 1: the XML is not well formed"),
        (
            "<!DOCTYPE a [<!ENTITY b 'c'>]><a>&b;</a>",
            "line 1: the file has a DOCTYPE, which a board file does not need",
        ),
        (
            "<?xml version='1.0' encoding='x-none'?><a/>",
            "line 1: the XML says it is written in x-none, which is not read",
        ),
        ("<?xml version='1.0' encoding='zip'?><a/>", "line 1: the XML says it is written in zip, which is not read"),
    ],
)
def test_what_is_no_xml_is_refused(text: str, said: str) -> None:
    assert refused(text) == said


@pytest.mark.parametrize("encoding", ["utf-8", "utf-16", "latin-1", "windows-1252", "iso-8859-15", "gbk", "shift_jis"])
def test_encodings(encoding: str) -> None:
    name = {"gbk": "浮标", "shift_jis": "潮位"}.get(encoding, "Ebbe ö")
    data = f"<?xml version='1.0' encoding='{encoding}'?><a><Set net='{name}'/></a>".encode(encoding)
    assert walked(data).records[0].get("net") == name


def test_names_of_control_characters_are_handed_on_as_they_are() -> None:
    assert walked("<a><Set net='a&#9;b&lt;'/></a>").records[0].get("net") == "a\tb<"
