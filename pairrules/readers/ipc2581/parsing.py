"""Hands the elements of an XML file to a walk through it, record by record, and holds no more of it than one record.

The parser is the standard library's Expat: it calls for every element and builds no tree, of whose millions of corners
each would have to be asked again. Nothing outside the file is ever opened: a DOCTYPE is refused where
it begins, and without one there are no entities. Source: the Python manual, `xml.parsers.expat`.
"""

from __future__ import annotations

import codecs
import re
from typing import Protocol
from xml.parsers import expat

from pairrules.errors import BoardError
from pairrules.readers.ipc2581.element import STEPS, Element, Step
from pairrules.readers.ipc2581.elements import LONGEST_WORD, wrong
from pairrules.readers.ipc2581.prolog import head
from pairrules.readers.long_file import Sliced

MOST_IN_RECORD = 300_000
"""Elements and attributes one record may hold beside the corners of its outlines; each takes a tenth of a kilobyte and
more. The records of real boards hold some thousands."""

MOST_DEEP = 200
"""Elements within one another; a board needs no more than twenty."""

_CHUNK = 1024 * 1024
_LONGEST = 8
"""Megabytes without any element or end of one: no name, value or text of a board is that long."""

_BROKEN = {
    3: "the XML is empty",
    5: "the XML breaks off before its end",
    6: "the XML breaks off before its end",
    7: "an element is closed by the end tag of another",
    9: "the XML goes on after its end",
    20: "the XML breaks off before its end",
}
"""Our words for the parser's commonest codes. Source: the Python manual, `xml.parsers.expat.errors`."""

_DECLARED = re.compile(r"\s*<\?xml[^>]*?encoding\s*=\s*[\"']([A-Za-z][\w.-]{0,40})[\"']")
_KNOWN = {"ascii", "iso8859-1", "utf-16", "utf-16-be", "utf-16-le", "utf-8"}
_OF_TWO_BYTES = {"big5", "cp932", "euc_jp", "euc_kr", "gb18030", "gb2312", "gbk", "shift_jis"}
_OF_ONE_BYTE = re.compile(r"cp(125\d|437|850|852|866)|iso8859-\d+|koi8-[ru]|mac[-_]\w+")
"""Encodings by Python's names: those the parser knows itself, and others that are turned into UTF-8 first."""


class Walk(Protocol):
    """What becomes of the elements."""

    def starts(self, element: Element) -> bool:
        """An element opens outside records. Returns: whether it is a record, to be handed over when it closes."""

    def ends(self, tag: str) -> None:
        """An element that is no record, and in none, has closed."""

    def outline(self, record: Element, holder: Element, element: Element) -> None:
        """An outline within an open record has closed. holder: what it stands in."""

    def take(self, record: Element) -> None:
        """A record has closed."""


def follow(data: Sliced, walk: Walk) -> None:
    """Take a walk through a file.

    Raises: BoardError, without the file's name, where it is no well-formed XML or has a DOCTYPE; what the walk raises.
    """
    data, encoding = _readable(data)
    parser = expat.ParserCreate(encoding, namespace_separator="}")
    _listen(parser, walk)
    bare = 0
    try:
        for start in range(0, len(data), _CHUNK):
            chunk = data[start : start + _CHUNK]
            bare = 0 if b"<" in chunk else bare + 1
            if bare >= _LONGEST:
                raise BoardError(
                    f"a name, value or text is longer than {_LONGEST} MB",
                    place=f"line {parser.CurrentLineNumber}",
                    remedy="export the file again",
                )
            parser.Parse(chunk, False)
        parser.Parse(b"", True)
    except expat.ExpatError as error:
        found = _BROKEN.get(error.code, "the XML is not well formed")
        if error.code == expat.errors.codes[expat.errors.XML_ERROR_NO_ELEMENTS] and parser.CurrentByteIndex > 0:
            found = "the XML breaks off before its end"
        place = f"line {error.lineno}" if error.lineno else ""
        raise BoardError(found, place=place, remedy="export the file again") from None


def _readable(data: Sliced) -> tuple[Sliced, str | None]:
    """The file in an encoding that the parser knows, and its name where the file's own declaration no longer holds."""
    declared = _DECLARED.match(head(data))
    if declared is None:
        return data, None
    try:
        name = codecs.lookup(declared[1]).name
    except LookupError:
        name = ""
    if name in _KNOWN:
        return data, None
    if name not in _OF_TWO_BYTES and not _OF_ONE_BYTE.fullmatch(name):
        raise BoardError(
            f"the XML says it is written in {declared[1]}, which is not read",
            place="line 1",
            remedy="export it in UTF-8",
        )
    return data[:].decode(name, errors="replace").encode(), "utf-8"


def _listen(parser: expat.XMLParserType, walk: Walk) -> None:
    """Give the parser its callbacks: functions that share what they hold, since they are called millions of times.

    Between an outline's or line's first step and its end a lighter pair of them is called, which knows steps alone.
    """
    stack: list[Element] = []  # the open record and what is open in it
    marks: list[int] = []  # what the record held when each of them opened
    tags: dict[str, str] = {}
    steps: dict[str, str] = {}  # the names among them that are steps
    open_steps: list[Step] = []  # of the outline or line that is being walked
    deep = within = held = 0

    def tag_of(name: str) -> str:
        tag = name.rpartition("}")[2]
        if len(tag) > LONGEST_WORD:
            raise BoardError(
                f"the name of an element has {len(tag)} characters",
                place=f"line {parser.CurrentLineNumber}",
                remedy=f"write at most {LONGEST_WORD}",
            )
        if len(tags) < _MOST_NAMES:
            tags[name] = tag
            if tag in STEPS:
                steps[name] = tag
        return tag

    def start(name: str, attributes: dict[str, str]) -> None:
        nonlocal deep, held, open_steps, within
        tag = tags.get(name) or tag_of(name)
        if not stack:
            element = Element(tag, attributes, parser.CurrentLineNumber)
            deep += 1
            if deep > MOST_DEEP:
                _too_deep(element)
            if walk.starts(element):
                held = 1 + len(attributes)
                stack.append(element)
                marks.append(held)
            return
        held += 1 + len(attributes)
        if held > MOST_IN_RECORD:
            _crowded(stack[0])
        top = stack[-1]
        if tag in STEPS:
            open_steps = top.steps or []
            open_steps.append((tag, attributes, parser.CurrentLineNumber))
            top.steps = open_steps
            within = 1
            parser.StartElementHandler, parser.EndElementHandler = start_step, end_step
            return
        element = Element(tag, attributes, parser.CurrentLineNumber)
        if top.inner:
            top.inner.append(element)
        else:
            top.inner = [element]
        stack.append(element)
        marks.append(held)
        if len(stack) > MOST_DEEP:
            _too_deep(element)

    def end(name: str) -> None:
        nonlocal deep, held
        if not stack:
            deep -= 1
            walk.ends(tags.get(name) or tag_of(name))
            return
        element, mark = stack.pop(), marks.pop()
        if not stack:
            deep -= 1
            walk.take(element)
        elif element.steps:
            walk.outline(stack[0], stack[-1], element)
            if not element.steps:
                held = mark

    def start_step(name: str, attributes: dict[str, str]) -> None:
        nonlocal held, within
        if within:  # what a step holds is nothing
            within += 1
            return
        held += 2
        if name in steps and held <= MOST_IN_RECORD:
            open_steps.append((steps[name], attributes, parser.CurrentLineNumber))
            within = 1
            return
        parser.StartElementHandler, parser.EndElementHandler = start, end
        start(name, attributes)

    def end_step(name: str) -> None:
        nonlocal within
        if within:
            within -= 1
            return
        parser.StartElementHandler, parser.EndElementHandler = start, end
        end(name)

    def doctype(*_: object) -> None:
        raise BoardError(
            "the file has a DOCTYPE, which a board file does not need",
            place=f"line {parser.CurrentLineNumber}",
            remedy="remove the DOCTYPE",
        )

    parser.StartElementHandler, parser.EndElementHandler = start, end
    parser.StartDoctypeDeclHandler = doctype


_MOST_NAMES = 10_000


def _crowded(record: Element) -> None:
    wrong(record, f"{record.tag} holds more than {MOST_IN_RECORD} elements and attributes")


def _too_deep(element: Element) -> None:
    wrong(element, "elements are nested too deep", "export the file again")
