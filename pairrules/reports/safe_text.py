"""Text from a board file made safe to print: nothing in it moves the cursor, colours the terminal or turns the line."""

from __future__ import annotations

import unicodedata

_HIDDEN = {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}
"""Unicode categories written as escapes: controls (ESC, line breaks), formats (bidirectional marks U+202A to U+202E,
U+2066 to U+2069, U+200E, U+200F, zero-width characters), lone surrogates, unassigned, line and paragraph separators.
Source: Unicode Standard, chapter 4, general category; UTR #36 on bidirectional spoofing (from memory)."""


def safe(text: str) -> str:
    """The text with every hidden character written as its escape, so that two different names stay different."""
    if text.isascii() and text.isprintable():
        return text
    return "".join(_escaped(c) if unicodedata.category(c) in _HIDDEN else c for c in text)


def _escaped(character: str) -> str:
    number = ord(character)
    if number < 0x100:
        return f"\\x{number:02x}"
    return f"\\u{number:04x}" if number < 0x10000 else f"\\U{number:08x}"
