"""Elements of the file: their names without namespace, their numbers, their words, and the errors they cause."""

from __future__ import annotations

import math
import unicodedata
from collections.abc import Iterator
from functools import lru_cache
from typing import TYPE_CHECKING, NoReturn

from pairrules.errors import BoardError

if TYPE_CHECKING:
    from pairrules.readers.ipc2581.element import Element

UNIT_MM = {"MILLIMETER": 1.0, "MICRON": 0.001, "INCH": 25.4}
"""Millimetres in the units of a header or dictionary. Source: IPC-2581A schema, `unitsType`."""

FARTHEST_MM = 10_000.0
"""No board is ten metres long; beyond it a coordinate is a fault of the file (common practice, no source)."""

LONGEST_WORD = 4000
"""Characters of the longest name or value that is read; longer ones are no name (common practice, no source)."""

_LONGEST_NUMBER = 100
_SHOWN = 60

NO_NET = {"", "no net", "none", "$none$", "n/c", "unconnected"}
"""Names, in small letters, that exporters give to copper of no net (common practice, no source)."""


def local(element: Element) -> str:
    """The element's name."""
    return element.tag


def children(element: Element) -> Iterator[tuple[str, Element]]:
    """Name and element of each child: steps of an outline first, then all else in document order."""
    for child in element if element.steps else element.inner:
        yield child.tag, child


def named(element: Element, *names: str) -> Iterator[tuple[str, Element]]:
    """Name and element of each child of one of the names, which are no steps."""
    for child in element.inner:
        if child.tag in names:
            yield child.tag, child


def child(element: Element, name: str) -> Element | None:
    """The first child of that name, which is no step."""
    for inner in element.inner:
        if inner.tag == name:
            return inner
    return None


@lru_cache(maxsize=65536)
def clean(text: str) -> str:
    """Text of the file without control and direction characters, which a terminal or page would obey."""
    if text.isprintable():
        return text
    kept = (" " if c in "\t\n\r" else c for c in text)
    return "".join(c for c in kept if unicodedata.category(c) not in {"Cc", "Cf", "Cs", "Zl", "Zp"}).strip()


def word(element: Element, name: str, default: str = "") -> str:
    """A cleaned attribute, `default` where absent."""
    text = element.attributes.get(name)
    if text is None:
        return default
    if len(text) > LONGEST_WORD:
        wrong(element, f"{local(element)} has a {name} of {len(text)} characters", f"write at most {LONGEST_WORD}")
    return clean(text)


def shown(text: str) -> str:
    """Text of the file in a message: cleaned, and cut where it is long."""
    return clean(text) if len(text) <= _SHOWN else f"{clean(text[:_SHOWN])}…"


def truth(element: Element, name: str, *, default: bool = False) -> bool:
    """An `xsd:boolean` attribute."""
    text = element.get(name)
    if text is None:
        return default
    text = text[:LONGEST_WORD].strip().lower()
    if text not in {"true", "false", "1", "0"}:
        wrong(element, f'{local(element)} has {name}="{shown(text)}", which is neither true nor false')
    return text in {"true", "1"}


def number(element: Element, name: str, default: float | None = None) -> float:
    """A finite number. Raises: BoardError, with the line, where it is absent (and no default given) or no number."""
    text = element.get(name)
    if text is None:
        if default is None:
            wrong(element, f"{local(element)} has no {name}")
        return default
    try:
        value = float(text) if len(text) <= _LONGEST_NUMBER else math.nan
    except ValueError:
        value = math.nan
    if not math.isfinite(value) or "_" in text:
        wrong(element, f'{local(element)} has {name}="{shown(text)}", which is no number')
    return value


def length(element: Element, name: str, factor: float, default: float | None = None) -> float:
    """A length or coordinate [mm]; `factor` is the millimetres in the unit that holds here."""
    text = element.attributes.get(name)
    if text is not None and len(text) <= _LONGEST_NUMBER and "_" not in text:
        try:
            value = float(text) * factor
        except ValueError:
            pass
        else:
            if -FARTHEST_MM < value < FARTHEST_MM:
                return value
    return _doubtful_length(element, name, factor, default)


def _doubtful_length(element: Element, name: str, factor: float, default: float | None) -> float:
    """The same where the attribute is absent or wrong, for the words of what is wrong."""
    value = number(element, name, default) * factor
    if not -FARTHEST_MM < value < FARTHEST_MM:
        wrong(element, f'{local(element)} has {name}="{shown(element.get(name) or "")}", which is beyond any board')
    return value


def point(element: Element, x: str, y: str, factor: float) -> complex:
    """The place [mm] that two attributes give; a negative nothing is nothing."""
    across, up = element.attributes.get(x, "_"), element.attributes.get(y, "_")
    if len(across) + len(up) <= _LONGEST_NUMBER and "_" not in across and "_" not in up:
        try:
            at = complex(float(across) * factor, float(up) * factor)
        except ValueError:
            pass
        else:
            if -FARTHEST_MM < at.real < FARTHEST_MM and -FARTHEST_MM < at.imag < FARTHEST_MM:
                return at + 0j
    return complex(length(element, x, factor), length(element, y, factor)) + 0j


def size(element: Element, name: str, factor: float, default: float | None = None) -> float:
    """A length that cannot be negative [mm]."""
    value = length(element, name, factor, default)
    if value < 0:
        wrong(element, f'{local(element)} has {name}="{shown(element.get(name) or "")}", which is negative')
    return value


def units(element: Element) -> float:
    """Millimetres in the unit named by a header's or dictionary's `units`."""
    text = word(element, "units").upper()
    if text not in UNIT_MM:
        wrong(
            element,
            f'{local(element)} has units="{shown(text)}"' if text else f"{local(element)} has no units",
            "write MILLIMETER, MICRON or INCH",
        )
    return UNIT_MM[text]


def line(element: Element) -> int:
    """The line of the file that the element begins on."""
    return element.line


def wrong(element: Element, found: str, remedy: str = "correct it there or export the file again") -> NoReturn:
    """Refuse the file for what an element says. The file's name is added by the reader."""
    raise BoardError(found, place=f"line {line(element)}", remedy=remedy)
