"""Results kept between runs, in a folder of the user's: found by key, believed only where undamaged, bounded in size.

Several processes may use it at once: an entry is written beside its place and moved there in one step. It holds JSON
and nothing that is run, and no fault of the folder ever fails a check.
"""

from __future__ import annotations

import contextlib
import hashlib
import json
import os
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from pairrules.running.whole_file import PART, write_whole

MOST_BYTES = 256 * 1024 * 1024
"""The folder is cut back to nine tenths of this, least recently used first, when it has grown beyond it."""

_ENDING = ".json"


@dataclass(frozen=True, slots=True, kw_only=True)
class Extent:
    """How many results are kept, and their size [bytes]."""

    results: int
    size: int


class KeptResults:
    """A folder of results. most: bound of its size [bytes]."""

    def __init__(self, folder: Path, most: int = MOST_BYTES) -> None:
        self.folder = folder
        self._most = most

    def get(self, key: str) -> Any:
        """What was kept under a key; `None` where there is nothing, or nothing to be believed."""
        path = self._path(key)
        try:
            data = path.read_bytes()
        except OSError:
            return None
        digest, _, text = data.partition(b"\n")
        try:
            if digest.decode("ascii") == hashlib.sha256(text).hexdigest():
                with contextlib.suppress(OSError):
                    os.utime(path)
                return json.loads(text)
        except (ValueError, RecursionError):
            pass
        with contextlib.suppress(OSError):
            path.unlink()
        return None

    def put(self, key: str, value: Any) -> None:
        """Keep a value of plain lists, dicts, strings and numbers; the folder is made where it is not there."""
        text = json.dumps(value, separators=(",", ":")).encode("ascii")
        data = hashlib.sha256(text).hexdigest().encode("ascii") + b"\n" + text
        if len(data) > self._most // 4:
            return
        if write_whole(self._path(key), data):
            self._cut_back()

    def extent(self) -> Extent:
        """How much is kept."""
        found = self._entries()
        return Extent(results=len(found), size=sum(size for _, size, _ in found))

    def clear(self) -> Extent:
        """Drop everything. Returns: what was dropped."""
        found = self._entries()
        for path in (path for *_, path in found):
            with contextlib.suppress(OSError):
                path.unlink()
        for path in self._files(PART):
            with contextlib.suppress(OSError):
                path.unlink()
        return Extent(results=len(found), size=sum(size for _, size, _ in found))

    def _path(self, key: str) -> Path:
        return self.folder / f"{key}{_ENDING}"

    def _files(self, ending: str) -> list[Path]:
        try:
            return sorted(path for path in self.folder.iterdir() if path.name.endswith(ending))
        except OSError:
            return []

    def _entries(self) -> list[tuple[float, int, Path]]:
        """Last use, size and path of every entry, the least recently used first."""
        found = []
        for path in self._files(_ENDING):
            with contextlib.suppress(OSError):
                told = path.stat()
                found.append((told.st_mtime, told.st_size, path))
        return sorted(found)

    def _cut_back(self) -> None:
        found = self._entries()
        size = sum(one for _, one, _ in found)
        if size <= self._most:
            return
        for _, own, path in found:
            with contextlib.suppress(OSError):
                path.unlink()
            size -= own
            if size <= self._most * 9 // 10:
                return
