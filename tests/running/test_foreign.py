"""Which files are no boards, told from what is in them."""

from __future__ import annotations

import gzip
import io
import zipfile
from pathlib import Path

import pytest

from pairrules.running.foreign import is_foreign

IPC = b'<?xml version="1.0"?>\n<!-- <html> -->\n<i:IPC-2581 revision="C" xmlns:i="http://webstds.ipc.org/2581"/>'
JSON = b'\xef\xbb\xbf {"name": "buoy", "pairrules_board": 1}'


def zipped(name: str, data: bytes) -> bytes:
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w") as archive:
        archive.writestr("readme.txt", "x")
        archive.writestr(name, data)
    return stream.getvalue()


@pytest.mark.parametrize(
    ("data", "foreign"),
    [
        (IPC, False),
        (IPC.decode().encode("utf-16"), False),
        (JSON, False),
        (gzip.compress(IPC, mtime=0), False),
        (zipped("board.xml", IPC), False),
        (b"", False),  # reading says that it is empty
        (b"\x1f\x8b broken", False),
        (b"<!-- <IPC-2581> --><project/>", True),
        (b"<html><IPC-2581/></html>", True),
        (b'{"name": "package"}', True),
        (b"[1]", True),
        (b"text", True),
        (gzip.compress(b"<html/>", mtime=0), True),
        (zipped("a.xml", b"<html/>"), True),
    ],
)
def test_told_by_content(tmp_path: Path, data: bytes, foreign: bool) -> None:
    path = tmp_path / "file.bin"
    path.write_bytes(data)
    assert is_foreign(str(path)) is foreign


def test_what_is_not_there_is_left_to_reading(tmp_path: Path) -> None:
    assert not is_foreign(str(tmp_path / "none"))
    assert not is_foreign(str(tmp_path))
