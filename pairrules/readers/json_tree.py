"""JSON text to checked values: strict parsing, and members of objects with the path to each for messages.

All numbers become `float`, so that an integer of ten thousand digits is just as infinite as 1e999.
"""

from __future__ import annotations

import json
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

from pairrules.errors import BoardError

Path = tuple[Any, "str | int"] | None
"""Where a value stands: the path of what holds it and its key there; `None` is the file. Only messages render it."""

LONGEST_TEXT = 4000
"""Characters of the longest name or value; longer ones are no name. Common practice, no source."""

_SHOWN = 60


class _Repeated(dict[str, Any]):
    """An object in which one key stands twice."""

    key: str


@dataclass(slots=True)
class Document:
    """One file while it is being read.

    Parameters
    ----------
    file: its name for messages.
    unknown: members that nobody asked for, by path without numbers.
    cleaned: how many texts held characters that cannot be printed, which were taken out.
    chords: of its arcs, as `json_paths` counts them.
    notes: what was mended, with how often and where first.
    """

    file: str
    unknown: Counter[str] = field(default_factory=Counter)
    cleaned: int = 0
    chords: int = 0
    notes: dict[str, tuple[int, Path]] = field(default_factory=dict)

    def note(self, what: str, path: Path) -> None:
        """Something at `path` was mended; `what` goes on from the path."""
        count, first = self.notes.get(what, (0, path))
        self.notes[what] = (count + 1, first)

    def noted(self) -> list[str]:
        """What was mended, a sentence a kind."""
        return [
            f"{written(path)} {what}" + ("" if count == 1 else f", and so do {count - 1} more")
            for what, (count, path) in self.notes.items()
        ]

    def fault(self, path: Path, value: object, remedy: str) -> BoardError:
        """The error that the value at `path` is wrong."""
        return BoardError(f"{written(path)} is {show(value)}", file=printable(self.file), remedy=remedy)

    def absent(self, path: Path, remedy: str) -> BoardError:
        """The error that nothing stands at `path`."""
        return BoardError(f"{written(path)} is missing", file=printable(self.file), remedy=remedy)

    def misfit(self, path: Path, found: str, remedy: str) -> BoardError:
        """The error that what stands at `path` does not fit together; `found` goes on from the path."""
        return BoardError(f"{written(path)} {found}", file=printable(self.file), remedy=remedy)

    def text(self, value: object, path: Path, remedy: str = "give a text in quotes") -> str:
        """A text that is not empty, without characters that cannot be printed."""
        if type(value) is not str:
            raise self.fault(path, value, remedy)
        if len(value) > LONGEST_TEXT:
            raise self.misfit(path, f"has {len(value)} characters", f"write at most {LONGEST_TEXT}")
        plain = value
        if not value.isprintable():
            plain = printable(value)
            self.cleaned += 1
        if not plain:
            raise self.fault(path, value, remedy)
        return plain

    def members(self, value: object, path: Path, known: frozenset[str], what: str) -> Members:
        """The members of an object; those not in `known` are counted in `unknown`."""
        if not isinstance(value, dict):
            raise self.fault(path, value, f"give {{...}} with {what}")
        for key in value.keys() - known:
            self.unknown[_kind(path, key)] += 1
        return Members(document=self, values=value, path=path)

    def entries(self, value: object, path: Path, what: str) -> Iterator[tuple[Path, object]]:
        """The entries of a list, each with its path."""
        if type(value) is not list:
            raise self.fault(path, value, f"give a list of {what}")
        for number, entry in enumerate(value):
            yield (path, number), entry


@dataclass(frozen=True, slots=True)
class Members:
    """The members of one object. An optional member that is `null` counts as left out."""

    document: Document
    values: dict[str, Any]
    path: Path

    def get(self, key: str) -> object:
        """The member as parsed; `None` where left out."""
        return self.values.get(key)

    def need(self, key: str, remedy: str) -> object:
        """The member as parsed, which must be there."""
        if key not in self.values:
            raise self.document.absent((self.path, key), remedy)
        value: object = self.values[key]
        return value

    def text(self, key: str, remedy: str = "give a text in quotes") -> str:
        """A text that must be there."""
        return self.document.text(self.need(key, remedy), (self.path, key), remedy)

    def text_or_empty(self, key: str, remedy: str = "give a text in quotes, or leave it out") -> str:
        """A text, "" where left out or empty."""
        value = self.values.get(key)
        return "" if value is None or value == "" else self.document.text(value, (self.path, key), remedy)

    def number(self, key: str, *, least: float, most: float, remedy: str) -> float | None:
        """A number between two bounds, `None` where left out."""
        value = self.values.get(key)
        if value is None:
            return None
        if type(value) is not float or not least <= value <= most:
            raise self.document.fault((self.path, key), value, remedy)
        return value

    def choice(self, key: str, choices: tuple[str, ...]) -> str:
        """A text out of a few, which must be there."""
        value = self.need(key, f"give {or_list(choices)}")
        if not isinstance(value, str) or value not in choices:
            raise self.document.fault((self.path, key), value, f"give {or_list(choices)}")
        return value

    def flag(self, key: str) -> bool:
        """True or false, false where left out."""
        value = self.values.get(key)
        if value is not None and type(value) is not bool:
            raise self.document.fault((self.path, key), value, "give true or false")
        return bool(value)

    def entries(self, key: str, what: str) -> Iterator[tuple[Path, object]]:
        """The entries of a list, none where it is left out."""
        value = self.values.get(key)
        return iter(()) if value is None else self.document.entries(value, (self.path, key), what)


def parse(data: bytes, file: str) -> dict[str, Any]:
    """The object that UTF-8 JSON text holds.

    Raises
    ------
    BoardError: where it is no UTF-8, no JSON (with line and column), no object, nested too deep, or repeats a key.
    """
    name = printable(file)
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as fault:
        line = data.count(b"\n", 0, fault.start) + 1
        raise BoardError(
            "holds bytes that are no UTF-8", file=name, place=f"line {line}", remedy="save it as UTF-8"
        ) from None
    repeated: list[str] = []

    def build(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
        members = dict(pairs)
        if len(members) == len(pairs):
            return members
        seen: set[str] = set()
        marked = _Repeated(members)
        marked.key = next(key for key, _ in pairs if key in seen or seen.add(key))  # type: ignore[func-returns-value]
        repeated.append(marked.key)
        return marked

    try:
        tree = json.loads(text, object_pairs_hook=build, parse_int=float)
    except json.JSONDecodeError as fault:
        rest = text[fault.pos : fault.pos + 1]
        found = f"no valid JSON at {show(rest)}" if rest else "the file ends in the middle of the JSON"
        place = f"line {fault.lineno}, column {fault.colno}"
        raise BoardError(found, file=name, place=place, remedy="mend the file or export it again") from None
    except RecursionError:
        raise BoardError("is nested too deep", file=name, remedy="a board needs no more than ten levels") from None
    if not isinstance(tree, dict):
        raise BoardError("holds no JSON object", file=name, remedy="put the whole file between { and }")
    if repeated:
        path = _first_repeated(tree)
        raise BoardError(f"{written(path)} stands twice", file=name, remedy="keep one of them")
    return tree


def _first_repeated(tree: object) -> Path:
    todo: list[tuple[Path, object]] = [(None, tree)]
    while todo:
        path, value = todo.pop()
        if isinstance(value, _Repeated):
            return (path, value.key)
        if isinstance(value, dict):
            todo.extend(((path, key), member) for key, member in reversed(value.items()))
        elif isinstance(value, list):
            todo.extend(((path, number), value[number]) for number in reversed(range(len(value))))
    raise AssertionError("a repeated key was seen while parsing")


def written(path: Path) -> str:
    """The path as messages show it: `tracks[12].width`."""
    steps: list[str] = []
    while path is not None:
        path, key = path
        if isinstance(key, int):
            steps.append(f"[{key}]")
        else:
            plain = _short(printable(key))
            steps.append(plain if path is None else f".{plain}")
    return "".join(reversed(steps)) or "the file"


def show(value: object) -> str:
    """A parsed value in a few characters, safe to print."""
    if value is None or isinstance(value, bool):
        return {None: "null", True: "true", False: "false"}[value]
    if isinstance(value, str):
        return f'"{_short(printable(value))}"'
    if isinstance(value, float):
        return f"{value:.0f}" if value.is_integer() and abs(value) < 1e15 else f"{value:.12g}"
    if isinstance(value, list):
        return "an empty list" if not value else f"a list of {len(value)}"
    return "an object"


def or_list(words: tuple[str, ...]) -> str:
    """Texts as a choice in a sentence, each in quotes."""
    quoted = [f'"{_short(word)}"' for word in words[:20]] + ([f"{len(words) - 20} more"] if len(words) > 20 else [])
    return quoted[0] if len(quoted) == 1 else f"{', '.join(quoted[:-1])} or {quoted[-1]}"


def printable(text: str) -> str:
    """The text without control characters, line ends, direction marks and halves of surrogate pairs."""
    return text if text.isprintable() else "".join(letter for letter in text if letter.isprintable())


def _short(text: str) -> str:
    return text if len(text) <= _SHOWN else f"{text[:_SHOWN]}…"


def _kind(path: Path, key: str) -> str:
    """Path of a member without the numbers of lists, so that a thousand tracks count as one kind."""
    steps = [_short(printable(key))]
    while path is not None:
        path, name = path
        steps.append("[]" if isinstance(name, int) else str(name))
    text = ".".join(reversed(steps))
    return text.replace(".[]", "[]")
