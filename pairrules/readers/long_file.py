"""A board file that is read piece by piece, so that a long one need not lie in memory beside what is made of it."""

from __future__ import annotations

import hashlib
from typing import BinaryIO, Protocol

from pairrules.errors import BoardError

_PIECE = 1024**2


class Sliced(Protocol):
    """Bytes, or what gives bytes when it is sliced."""

    def __len__(self) -> int: ...
    def __getitem__(self, part: slice, /) -> bytes: ...


class LongFile:
    """An open file's bytes, read where they are sliced.

    Slices that follow one another from the first byte to the last are digested on the way, so that a digest costs no
    reading of its own and is of the very bytes that were read. Slices raise `BoardError` where the file cannot be read,
    or is no longer what it was.
    """

    def __init__(self, file: BinaryIO, size: int, name: str) -> None:
        """Parameters: size: of the file in bytes. name: of the file, for messages."""
        self._file = file
        self._size = size
        self._name = name
        self._running = hashlib.sha256()
        self._digested = 0
        self._digest = ""

    def __len__(self) -> int:
        return self._size

    def __getitem__(self, part: slice, /) -> bytes:
        start, stop, _ = part.indices(self._size)
        stop = max(start, stop)
        try:
            self._file.seek(start)
            piece = self._file.read(stop - start)
        except OSError as error:
            found = f"the file cannot be read ({error.strerror or error})"
            raise BoardError(found, file=self._name, remedy="check path and medium") from error
        if len(piece) != stop - start:
            raise self._changed()
        self._note(start, piece)
        return piece

    def sha256(self) -> str:
        """Digest of the whole file; what has been read from first to last is not read again."""
        if not self._digest:
            for start in range(0, self._size, _PIECE):
                self[start : start + _PIECE]
        return self._digest

    def _note(self, start: int, piece: bytes) -> None:
        if start == 0:
            self._running, self._digested = hashlib.sha256(), 0
        if start != self._digested:
            return
        self._running.update(piece)
        self._digested += len(piece)
        if self._digested == self._size:
            digest = self._running.hexdigest()
            if self._digest not in {"", digest}:
                raise self._changed()
            self._digest = digest

    def _changed(self) -> BoardError:
        found = "the file changed while it was read"
        return BoardError(found, file=self._name, remedy="check it again when it has been written")
