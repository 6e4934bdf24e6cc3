"""YAML text as a tree of nodes that know their line and column.

Only tables, lists and plain text come out: no tags, no types, no merge keys. What a text means (a quantity, a flag) is
decided by the shape that is expected there. Built from the parser's events without recursion, so that neither deep
nesting nor aliases of aliases can hurt.
"""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass, field
from typing import Any

import yaml

from pairrules.settings.faults import Faults

LARGEST_BYTES = 4_000_000
"""A settings file larger than this is refused."""

DEEPEST = 50
LARGEST_TREE = 100_000
LONGEST_TEXT = 1000

_LOADER: Any = getattr(yaml, "CSafeLoader", yaml.SafeLoader)
_FORBIDDEN = re.compile("[^\t\n\r\x20-\x7e\x85\xa0-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")


@dataclass(frozen=True, slots=True, kw_only=True)
class Scalar:
    """One text. `empty` where nothing (or `~`, unquoted) stands."""

    line: int
    column: int
    text: str
    empty: bool
    size: int = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class Sequence:
    """A list."""

    line: int
    column: int
    items: tuple[Node, ...]
    size: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Mapping:
    """A table: keys as they stand, each once, in the file's order."""

    line: int
    column: int
    entries: tuple[tuple[Scalar, Node], ...]
    size: int


Node = Scalar | Sequence | Mapping


@dataclass(slots=True)
class _Open:
    """A list or table whose end has not come yet."""

    event: Any
    table: bool
    items: list[Node] = field(default_factory=list)
    keys: list[Scalar | None] = field(default_factory=list)


class _Refused(Exception):  # noqa: N818  carries no message; the fault is noted before it is raised
    """Reading on makes no sense."""


def decode(data: bytes, faults: Faults) -> str | None:
    """The text of a settings file; a fault and None where it is too large or not UTF-8."""
    if len(data) > LARGEST_BYTES:
        faults.add(f"holds more than {LARGEST_BYTES} bytes", "split it with extends")
        return None
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        faults.add(f"line {line} is not UTF-8", "save the file as UTF-8")
        return None


def parse(text: str, faults: Faults) -> Node | None:
    """The tree of a YAML text, an empty table where there is none; a fault and None where it cannot be read."""
    strange = _FORBIDDEN.search(text)
    if strange is not None:
        line = text.count("\n", 0, strange.start()) + 1
        column = strange.start() - (text.rfind("\n", 0, strange.start()) + 1) + 1
        faults.add(
            f"holds the control character U+{ord(strange[0]):04X}",
            "delete it",
            Scalar(line=line, column=column, text="", empty=True),
        )
        return None
    try:
        return _Tree(faults).build(yaml.parse(text, Loader=_LOADER))
    except yaml.MarkedYAMLError as error:
        mark = error.problem_mark or error.context_mark
        at = None if mark is None else Scalar(line=mark.line + 1, column=mark.column + 1, text="", empty=True)
        faults.add(f"cannot be read as YAML: {error.problem}", "mend the indentation, brackets or quotes there", at)
    except _Refused:
        pass
    return None


class _Tree:
    def __init__(self, faults: Faults) -> None:
        self._faults = faults
        self._open: list[_Open] = []
        self._anchors: dict[str, Node] = {}
        self._root: Node | None = None
        self._documents = 0

    def build(self, events: Any) -> Node | None:
        for event in events:
            if isinstance(event, yaml.DocumentStartEvent):
                self._documents += 1
                if self._documents > 1:
                    self._refuse("a second document begins", "keep one document a file", event)
            elif isinstance(event, yaml.AliasEvent):
                self._add(self._aliased(event))
            elif isinstance(event, yaml.ScalarEvent):
                self._check_tag(event)
                self._finish(event, self._scalar(event))
            elif isinstance(event, yaml.CollectionStartEvent):
                self._check_tag(event)
                if len(self._open) >= DEEPEST:
                    self._refuse(f"is nested more than {DEEPEST} deep", "write it flatter", event)
                self._open.append(_Open(event=event, table=isinstance(event, yaml.MappingStartEvent)))
            elif isinstance(event, yaml.CollectionEndEvent):
                done = self._open.pop()
                self._finish(done.event, self._collection(done))
        return self._root or Mapping(line=1, column=1, entries=(), size=1)

    def _check_tag(self, event: Any) -> None:
        if event.tag is not None and event.tag != "!":
            shown = _printable(event.tag)[:60]
            self._refuse(f"the tag {shown!r} is not understood", "leave the tag out", event)

    def _aliased(self, event: Any) -> Node:
        node = self._anchors.get(event.anchor)
        if node is None:
            self._refuse(f"the alias *{event.anchor} names nothing complete before it", "write the value out", event)
            raise AssertionError
        return node

    def _scalar(self, event: Any) -> Scalar:
        text = _printable(event.value)
        line, column = _where(event)
        node = Scalar(line=line, column=column, text=text, empty=event.implicit[0] and text in {"", "~"})
        if len(text) > LONGEST_TEXT:
            self._faults.add(f"a text of {len(text)} characters", f"keep it below {LONGEST_TEXT}", node)
            return Scalar(line=line, column=column, text=text[:LONGEST_TEXT], empty=False)
        if not text.isprintable():
            self._faults.add("the text holds a character that cannot be printed", "delete it", node)
            return Scalar(line=line, column=column, text="".join(c for c in text if c.isprintable()), empty=False)
        return node

    def _collection(self, done: _Open) -> Node:
        line, column = _where(done.event)
        size = 1 + sum(node.size for node in done.items)
        if size > LARGEST_TREE:
            self._refuse(f"spells out to more than {LARGEST_TREE} values", "use fewer aliases", done.event)
        if not done.table:
            return Sequence(line=line, column=column, items=tuple(done.items), size=size)
        entries: dict[str, tuple[Scalar, Node]] = {}
        for key, value in zip(done.keys, done.items, strict=True):
            if key is None:
                continue
            if key.text in entries:
                before = entries[key.text][0].line
                self._faults.add(
                    f"{key.text!r} stands here a second time", f"it is already in line {before}; keep one", key
                )
            else:
                entries[key.text] = (key, value)
        return Mapping(line=line, column=column, entries=tuple(entries.values()), size=size)

    def _finish(self, event: Any, node: Node) -> None:
        if event.anchor is not None:
            self._anchors[event.anchor] = node
        self._add(node)

    def _add(self, node: Node) -> None:
        if not self._open:
            self._root = node
            return
        top = self._open[-1]
        if top.table and len(top.keys) == len(top.items):
            if not isinstance(node, Scalar):
                self._faults.add("a key is a list or a table", "write a word as key", node)
            top.keys.append(node if isinstance(node, Scalar) else None)
        else:
            top.items.append(node)

    def _refuse(self, found: str, remedy: str, event: Any) -> None:
        line, column = _where(event)
        self._faults.add(found, remedy, Scalar(line=line, column=column, text="", empty=True))
        raise _Refused


def _where(event: Any) -> tuple[int, int]:
    return event.start_mark.line + 1, event.start_mark.column + 1


def _printable(text: str) -> str:
    """One line, with every kind of blank a plain one (a quantity copied from a document may hold a fixed blank)."""
    joined = " ".join(line.strip() for line in text.splitlines()) if "\n" in text else text
    return "".join(" " if c == "\t" or unicodedata.category(c) == "Zs" else c for c in joined).strip()
