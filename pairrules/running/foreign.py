"""Whether a file is no board at all, told from its beginning without reading it as one."""

from __future__ import annotations

import io
import re
import zipfile
import zlib
from pathlib import Path

_ENDINGS = (".xml", ".cvg", ".json")
_HEAD = 1 << 20
_COMMENT = re.compile(r"<!--.*?(?:-->|\Z)|<\?.*?(?:\?>|\Z)", re.DOTALL)
_ROOT = re.compile(r"<([^\s<>/!?]+)")
_MARKS = ((b"\xef\xbb\xbf", "utf-8"), (b"\xff\xfe", "utf-16-le"), (b"\xfe\xff", "utf-16-be"), (b"<\0", "utf-16-le"))


def is_foreign(path: str) -> bool:
    """Whether a file is certainly no board: XML of another root, JSON without a board's mark, or neither.

    What cannot be read is not foreign: reading it as a board will say what is wrong.
    """
    try:
        with Path(path).open("rb") as file:
            head = file.read(_HEAD)
            if head.startswith(b"PK\x03\x04"):
                return _foreign_archive(head + file.read())
            if head.startswith(b"\x1f\x8b"):
                head = zlib.decompressobj(wbits=31).decompress(head, _HEAD)
            elif head.lstrip(b"\xef\xbb\xbf \t\r\n").startswith(b"{"):
                head += file.read()  # the mark may stand anywhere among the keys
    except (OSError, ValueError):
        return False
    except (zlib.error, zipfile.BadZipFile, NotImplementedError, RuntimeError):
        return False
    return bool(head) and not _is_board(head)


def _foreign_archive(data: bytes) -> bool:
    with zipfile.ZipFile(io.BytesIO(data)) as archive:
        for member in archive.infolist()[:1000]:
            if member.filename.lower().endswith(_ENDINGS):
                with archive.open(member) as stream:
                    if _is_board(stream.read(_HEAD)):
                        return False
    return True


def _is_board(head: bytes) -> bool:
    plain = head.removeprefix(b"\xef\xbb\xbf").lstrip(b" \t\r\n")
    if plain.startswith(b"{"):
        return b'"pairrules_board"' in plain
    encoding = next((name for mark, name in _MARKS if head.startswith(mark)), "latin-1")
    text = _COMMENT.sub("", head.decode(encoding, errors="replace"))
    root = _ROOT.search(text)
    return root is not None and root[1].rpartition(":")[2] == "IPC-2581"
