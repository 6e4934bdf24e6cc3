"""The faults of a chain of settings files, gathered so that all are told at once."""

from __future__ import annotations

import difflib
from collections.abc import Iterable
from typing import Protocol

from pairrules.errors import SettingsError


class Placed(Protocol):
    """Anything that knows the line and column (from 1) where it stands in its file."""

    @property
    def line(self) -> int:
        """Line, from 1."""

    @property
    def column(self) -> int:
        """Column, from 1."""


class Faults:
    """Collects what is wrong in one file; `of_file` gives the collector of a further file of the same chain.

    Parameters
    ----------
    file: as the user named it.
    """

    def __init__(self, file: str) -> None:
        self.file = file
        self._found: list[tuple[int, int, int, SettingsError]] = []
        self._files: list[str] = [file]

    def of_file(self, file: str) -> Faults:
        """A collector that adds to this one under another file's name."""
        other = Faults(file)
        other._found = self._found
        other._files = self._files
        if file not in self._files:
            self._files.append(file)
        return other

    def add(self, found: str, remedy: str, at: Placed | None = None) -> None:
        """Note one fault: what was found, what to do, and where."""
        place = "" if at is None else f"line {at.line}, column {at.column}"
        error = SettingsError(found, file=self.file, place=place, remedy=remedy)
        line, column = (0, 0) if at is None else (at.line, at.column)
        self._found.append((self._files.index(self.file), line, column, error))

    def raise_if_any(self) -> None:
        """Raise the first fault, by file and place, with all others in its `others`; nothing where none was noted."""
        if self._found:
            first, *others = (error for *_, error in sorted(self._found, key=lambda entry: entry[:3]))
            raise SettingsError(
                first.found, file=first.file, place=first.place, remedy=first.remedy, others=tuple(others)
            )


def nearest(word: str, known: Iterable[str]) -> str:
    """The remedy for an unknown word: the known one most like it, or all of them.

    Examples
    --------
    >>> nearest("limts", ["limits", "match"])
    "write 'limits'"
    >>> nearest("zebra", ["limits", "match"])
    'known are limits, match'
    """
    names = sorted(known)
    close = difflib.get_close_matches(word, names, n=1)
    if close:
        return f"write {close[0]!r}"
    return f"known are {', '.join(names)}" if names else "leave it out"
