"""Solved cross-sections kept between runs in one file of numbers: a key of bytes for each, and its figures as bytes.

The file is read whole and written whole, so that several processes may use it at once: one that writes adds to what is
there at that moment, and should two do so in the same moment, what one of them added is solved again some day. It holds
nothing that is run. What is damaged, or is something else, counts as not there.
"""

from __future__ import annotations

import contextlib
import hashlib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import msgspec

from pairrules.running.whole_file import write_whole

MOST_SECTIONS = 20_000
MOST_BYTES = 32 * 1024 * 1024
"""The file holds so many sections and bytes at most; those that came first go first."""

_FIRST = b"pairrules sections 1\n"
_DIGEST = 32


@dataclass(frozen=True, slots=True, kw_only=True)
class SectionsExtent:
    """How many sections are kept, and the size of their file [bytes]."""

    sections: int
    size: int


class SectionFile:
    """The file in a folder. most, most_bytes: its bounds."""

    def __init__(self, folder: Path, most: int = MOST_SECTIONS, most_bytes: int = MOST_BYTES) -> None:
        self.path = folder / "solved.sections"
        self._most, self._most_bytes = most, most_bytes

    def read(self) -> dict[bytes, bytes]:
        """What is kept, the first that came first; empty where there is nothing, or nothing to be believed."""
        try:
            with self.path.open("rb") as file:
                data = file.read(self._most_bytes + 1)
        except OSError:
            return {}
        if len(data) > self._most_bytes or not data.startswith(_FIRST):
            return {}
        start = len(_FIRST) + _DIGEST
        digest, packed = data[len(_FIRST) : start], data[start:]
        if hashlib.sha256(packed).digest() != digest:
            return {}
        try:
            return msgspec.msgpack.decode(packed, type=dict[bytes, bytes])
        except msgspec.MsgspecError:
            return {}

    def add(self, new: Mapping[bytes, bytes]) -> None:
        """Keep these too."""
        if not new:
            return
        kept = {**self.read(), **new}
        size = 0
        rows: list[tuple[bytes, bytes]] = []
        for key, value in reversed(kept.items()):
            # Each of the two is packed with a head of five bytes at most.
            size += len(key) + len(value) + 10
            if size > self._most_bytes - 1024 or len(rows) == self._most:
                break
            rows.append((key, value))
        packed = msgspec.msgpack.encode(dict(reversed(rows)))
        write_whole(self.path, _FIRST + hashlib.sha256(packed).digest() + packed)

    def extent(self) -> SectionsExtent:
        """How much is kept."""
        try:
            size = self.path.stat().st_size
        except OSError:
            size = 0
        return SectionsExtent(sections=len(self.read()), size=size)

    def clear(self) -> SectionsExtent:
        """Drop everything. Returns: what was dropped."""
        found = self.extent()
        with contextlib.suppress(OSError):
            self.path.unlink()
        return found
