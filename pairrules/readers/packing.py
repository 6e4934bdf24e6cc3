"""Packed board files: gzip and zip, told by their first bytes, opened within bounds no hostile archive can pass."""

from __future__ import annotations

import io
import struct
import zipfile
import zlib
from collections.abc import Callable, Iterable

from pairrules.errors import BoardError
from pairrules.readers.long_file import Sliced

MOST_BYTES = 2 * 1024**3
"""Size, unpacked, that is still taken for a board."""

MOST_RATIO = 100
"""Unpacked to packed size that is still taken for text: boards reach 10 to 40, deflate itself 1032 (zlib's technical
notes; the rest common practice, no source)."""

_SMALL_BYTES = 4 * 1024**2
"""Below this size no ratio is asked: so much repetition harms nobody."""

_MOST_MEMBERS = 1000
"""Members of a zip that are looked into for a board."""

_MOST_LISTED = 100_000
"""Members a zip may list, and a gzip file may be joined of; reading a list of millions would take minutes."""

_METHODS = {zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED, zipfile.ZIP_BZIP2}
"""Packings whose memory is small whatever the archive says. LZMA's dictionary may be of gigabytes."""

_ZIP_FAULTS = (
    zipfile.BadZipFile,
    zlib.error,
    struct.error,
    EOFError,
    NotImplementedError,
    RuntimeError,
    ValueError,
    OSError,
)
"""What the standard library raises for damaged, locked or strangely packed members."""

_CHUNK = 1024**2
_FED = 16 * 1024
"""Bytes given to gzip at a time: what is left of them is copied where a member ends."""

_LONGEST_NAME = 200
_BOARD_NAMES = (".xml", ".cvg", ".json")
_HEAD = 4096


def unpack(data: Sliced, name: str) -> tuple[Sliced, str]:
    """The board file inside `data`, and the label that messages call it by ("archive.zip: board.xml").

    Plain files come back as they are. From a zip the one board is taken: the only member named .xml, .cvg or .json,
    else the first that begins like a board.

    Raises: BoardError where the file is empty, the archive is broken, too large unpacked, or holds no board.
    """
    start = data[:4]
    if not start:
        raise BoardError("the file is empty", file=name, remedy="export the board again")
    if start.startswith(b"\x1f\x8b"):
        plain = _gunzip(data[:], name)
        if not plain:
            raise BoardError("the archive holds an empty file", file=name, remedy="pack the board again")
        return plain, name
    if start in {b"PK\x03\x04", b"PK\x05\x06"}:
        return _from_zip(data[:], name)
    return data, name


def _gunzip(data: bytes, name: str) -> bytes:
    """All members of a gzip file, one after the other."""
    parts: list[bytes] = []
    total = place = members = 0
    while data.startswith(b"\x1f\x8b", place):
        members += 1
        if members > _MOST_LISTED:
            raise BoardError("the archive has too many members", file=name, remedy="give the board file itself")
        engine = zlib.decompressobj(wbits=31)
        rest = b""
        try:
            while not engine.eof:
                if not rest:
                    rest = data[place : place + _FED]
                    place += len(rest)
                    if not rest:
                        raise _broken(name, "the gzip data breaks off")
                piece = engine.decompress(rest, _CHUNK)
                rest = engine.unconsumed_tail
                parts.append(piece)
                total += len(piece)
                # Against what has been read so far, so that a long file of blanks fills no memory before it is refused.
                _check_size(total, place - len(rest), name)
        except zlib.error:
            raise _broken(name, "the gzip data is damaged") from None
        place -= len(engine.unused_data)
    return b"".join(parts)


def _from_zip(data: bytes, name: str) -> tuple[bytes, str]:
    if data.count(b"PK\x01\x02") > _MOST_LISTED:
        raise BoardError("the archive has too many members", file=name, remedy="give the board file itself")
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            members = [member for member in archive.infolist() if not member.is_dir()]
            chosen = _choose(members, lambda member, most: _member(archive, member, name, len(data), most))
            if chosen is None:
                raise BoardError(
                    "the archive holds no board", file=name, remedy="put an .xml, .cvg or .json board in it"
                )
            label = f"{name}: {_shown(chosen.filename)}"
            if chosen.compress_type not in _METHODS:
                raise BoardError(
                    "the archive is packed in an unusual way", file=label, remedy="pack it with deflate, as is usual"
                )
            plain = _member(archive, chosen, name, len(data), None)
    except _ZIP_FAULTS as error:
        locked = "encrypted" in str(error)
        raise _broken(name, "the zip archive is locked" if locked else "the zip archive is damaged") from None
    if not plain:
        raise BoardError("the file is empty", file=label, remedy="export the board again")
    return plain, label


def _choose(
    members: Iterable[zipfile.ZipInfo], head: Callable[[zipfile.ZipInfo, int], bytes]
) -> zipfile.ZipInfo | None:
    members = list(members)
    named = [member for member in members if member.filename.lower().endswith(_BOARD_NAMES)]
    if len(named) == 1:
        return named[0]
    candidates = [member for member in named or members if member.compress_type in _METHODS][:_MOST_MEMBERS]
    return next((member for member in candidates if _looks_like_board(head(member, _HEAD))), None)


def _looks_like_board(start: bytes) -> bool:
    """Whether the beginning could be an IPC-2581 or a plain JSON board; the readers look closer."""
    bare = start.replace(b"\0", b"")
    return b"IPC-2581" in bare or b"pairrules_board" in bare


def _member(archive: zipfile.ZipFile, member: zipfile.ZipInfo, name: str, packed: int, most: int | None) -> bytes:
    """A member's bytes, or its first `most`. The sizes an archive states of itself are not believed.

    packed: the archive's size.
    """
    parts: list[bytes] = []
    total = 0
    with archive.open(member) as stream:
        if most is not None:
            return stream.read(most)
        while piece := stream.read(_CHUNK):
            parts.append(piece)
            total += len(piece)
            _check_size(total, min(member.compress_size, packed), name)
    return b"".join(parts)


def _check_size(total: int, packed: int, name: str) -> None:
    if total > MOST_BYTES:
        found = f"the archive unpacks to more than {MOST_BYTES // 1024**3} GB"
        raise BoardError(found, file=name, remedy="give the board file itself")
    if total > _SMALL_BYTES and total > MOST_RATIO * max(packed, 1):
        found = f"the archive unpacks to more than {MOST_RATIO} times its size"
        raise BoardError(found, file=name, remedy="give the board file itself")


def _broken(name: str, found: str) -> BoardError:
    return BoardError(found, file=name, remedy="pack the board again, or give the board file itself")


def _shown(filename: str) -> str:
    plain = "".join(c for c in filename if c.isprintable())
    return plain if len(plain) <= _LONGEST_NAME else f"{plain[:_LONGEST_NAME]}…"
