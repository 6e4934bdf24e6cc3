"""The beginning of an XML file: its root element's name, and whether a DOCTYPE stands before it."""

from __future__ import annotations

import codecs
import re

from pairrules.readers.long_file import Sliced

HEAD_BYTES = 65536
"""How far the root element is looked for; declarations and comments before it are short."""

_MARKS = ((codecs.BOM_UTF8, "utf-8"), (codecs.BOM_UTF16_LE, "utf-16-le"), (codecs.BOM_UTF16_BE, "utf-16-be"))
_SKIPPED = re.compile(r"\s+|<\?.*?\?>|<!--.*?-->", re.DOTALL)
_ROOT = re.compile(r"<([^\s<>/!?]+)")
_DOCTYPE = re.compile(r"<!DOCTYPE", re.IGNORECASE)
_DOCTYPE_ROOT = re.compile(r"<!DOCTYPE\s+([^\s<>\[/!?]+)", re.IGNORECASE)


def head(data: Sliced) -> str:
    """The first characters of the file, by its byte order mark, else UTF-16 by its zeros, else as single bytes."""
    start = data[:HEAD_BYTES]
    for mark, encoding in _MARKS:
        if start.startswith(mark):
            return start[len(mark) :].decode(encoding, errors="replace")
    if start[:2] == b"<\0":
        return start.decode("utf-16-le", errors="replace")
    if start[:2] == b"\0<":
        return start.decode("utf-16-be", errors="replace")
    return start.decode("latin-1")


def root_name(data: Sliced) -> str:
    """The root element's name without prefix, "" where none is found."""
    text, place = _after_prolog(head(data))
    # A DOCTYPE names the root too: such a file is recognised, so that it can be refused for what it is.
    found = _DOCTYPE_ROOT.match(text, place) or _ROOT.match(text, place)
    return "" if found is None else found[1].rpartition(":")[2]


def doctype_line(data: Sliced) -> int:
    """The line on which a DOCTYPE stands before the root element, 0 where there is none."""
    text, place = _after_prolog(head(data))
    return text.count("\n", 0, place) + 1 if _DOCTYPE.match(text, place) else 0


def _after_prolog(text: str) -> tuple[str, int]:
    place = 0
    while (skipped := _SKIPPED.match(text, place)) is not None:
        place = skipped.end()
    return text, place
