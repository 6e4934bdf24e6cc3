"""Packed board files: what comes out, and how a broken or hostile archive is refused."""

from __future__ import annotations

import bz2
import gzip
import io
import zipfile

import pytest

from pairrules.errors import BoardError
from pairrules.readers import packing
from pairrules.readers.packing import unpack

BOARD = b'<?xml version="1.0"?>\n<IPC-2581 revision="C"/>'
JSON = b'{"pairrules_board": 1}'
GIVE = "pack the board again, or give the board file itself"


def zipped(*members: tuple[str, bytes], method: int = zipfile.ZIP_DEFLATED) -> bytes:
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", method) as archive:
        for name, data in members:
            archive.writestr(name, data)
    return out.getvalue()


def refused(data: bytes) -> str:
    with pytest.raises(BoardError) as caught:
        unpack(data, "archive.zip")
    return str(caught.value)


@pytest.mark.parametrize("plain", [BOARD, JSON, b"anything", b"PK but no archive", b"\x1f not gzip"])
def test_plain_files_come_back_as_they_are(plain: bytes) -> None:
    assert unpack(plain, "board.xml") == (plain, "board.xml")


def test_gzip_is_told_by_its_bytes() -> None:
    assert unpack(gzip.compress(BOARD), "board.xml") == (BOARD, "board.xml")


def test_gzip_of_several_members_is_one_file() -> None:
    assert unpack(gzip.compress(BOARD[:10]) + gzip.compress(BOARD[10:]), "b.gz") == (BOARD, "b.gz")


def test_gzip_larger_than_a_chunk() -> None:
    data = BOARD + bytes(range(256)) * 15_000
    assert unpack(gzip.compress(data), "b.gz")[0] == data


@pytest.mark.parametrize("method", [zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED, zipfile.ZIP_BZIP2])
def test_the_only_board_file_of_a_zip(method: int) -> None:
    data = zipped(("readme.txt", b"IPC-2581"), ("out/board.xml", BOARD), method=method)
    assert unpack(data, "archive.zip") == (BOARD, "archive.zip: out/board.xml")


@pytest.mark.parametrize("name", ["b.XML", "b.cvg", "b.json"])
def test_names_of_board_files(name: str) -> None:
    assert unpack(zipped(("a.txt", b"x"), (name, JSON)), "a.zip") == (JSON, f"a.zip: {name}")


def test_of_several_the_first_that_looks_like_a_board() -> None:
    data = zipped(("a.xml", b"<svg/>"), ("b.xml", BOARD), ("c.json", JSON))
    assert unpack(data, "archive.zip") == (BOARD, "archive.zip: b.xml")
    assert unpack(zipped(("a", b"x"), ("b", BOARD.decode().encode("utf-16"))), "a.zip")[1] == "a.zip: b"


def test_a_member_s_name_loses_its_control_characters() -> None:
    assert unpack(zipped(("b\x1b[31m.xml", BOARD)), "a.zip")[1] == "a.zip: b[31m.xml"


def test_an_empty_file() -> None:
    assert refused(b"") == "archive.zip: the file is empty; export the board again"
    assert refused(gzip.compress(b"")) == "archive.zip: the archive holds an empty file; pack the board again"
    assert refused(zipped(("b.xml", b""))) == "archive.zip: b.xml: the file is empty; export the board again"


@pytest.mark.parametrize("members", [(), (("a.txt", b"hello"),), (("a.xml", b"<svg/>"), ("b.xml", b"<svg/>"))])
def test_a_zip_without_a_board(members: tuple[tuple[str, bytes], ...]) -> None:
    assert refused(zipped(*members)) == (
        "archive.zip: the archive holds no board; put an .xml, .cvg or .json board in it"
    )


def test_damaged_gzip() -> None:
    data = gzip.compress(BOARD * 100)
    assert refused(data[: len(data) // 2]) == f"archive.zip: the gzip data breaks off; {GIVE}"
    assert refused(data[:10] + b"\xff" * 40) == f"archive.zip: the gzip data is damaged; {GIVE}"
    assert refused(data[:-8] + bytes(8)) == f"archive.zip: the gzip data is damaged; {GIVE}"


def test_damaged_zip() -> None:
    data = zipped(("board.xml", bytes(range(256)) * 40))
    said = f"archive.zip: the zip archive is damaged; {GIVE}"
    assert refused(data[: len(data) // 2]) == said
    assert refused(data[:60] + b"\xff" * 20 + data[80:]) == said


def test_a_packing_whose_memory_has_no_bound_is_refused() -> None:
    lzma = zipped(("board.xml", BOARD), method=zipfile.ZIP_LZMA)
    assert refused(lzma) == (
        "archive.zip: board.xml: the archive is packed in an unusual way; pack it with deflate, as is usual"
    )
    two = zipped(("a.xml", BOARD), ("b.xml", BOARD), method=zipfile.ZIP_LZMA)
    assert refused(two) == "archive.zip: the archive holds no board; put an .xml, .cvg or .json board in it"


def test_damaged_members_of_other_packings() -> None:
    data = zipped(("board.xml", bz2.compress(bytes(range(256)) * 40)), method=zipfile.ZIP_BZIP2)
    assert refused(data[:60] + b"\xff" * 20 + data[80:]) == f"archive.zip: the zip archive is damaged; {GIVE}"


def test_a_locked_zip() -> None:
    data = bytearray(zipped(("board.xml", BOARD)))
    data[6] |= 1  # the flag of an encrypted member, in its own header and in the directory
    data[data.index(b"PK\x01\x02") + 8] |= 1
    assert refused(bytes(data)) == f"archive.zip: the zip archive is locked; {GIVE}"


def test_unpacking_stops_at_the_ratio(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(packing, "_SMALL_BYTES", 1_000_000)
    monkeypatch.setattr(packing, "MOST_RATIO", 100)
    blanks = b" " * 4_000_000
    said = "archive.zip: the archive unpacks to more than 100 times its size; give the board file itself"
    assert refused(gzip.compress(blanks)) == said
    assert refused(zipped(("b.xml", blanks))) == said


def test_unpacking_stops_at_the_size(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(packing, "MOST_BYTES", 3_000_000)
    blanks = b" " * 4_000_000
    said = "archive.zip: the archive unpacks to more than 0 GB; give the board file itself"
    assert refused(gzip.compress(blanks)) == said
    assert refused(zipped(("b.xml", blanks))) == said


def test_an_archive_of_too_many_members(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(packing, "_MOST_LISTED", 10)
    said = "archive.zip: the archive has too many members; give the board file itself"
    assert refused(gzip.compress(b" ") * 11) == said
    assert refused(zipped(*((f"{i}.xml", b"") for i in range(11)))) == said


def test_gzip_members_that_end_anywhere_in_what_is_fed() -> None:
    pieces = [bytes([i % 251]) * (i * 37 % 5000) for i in range(300)]
    assert unpack(b"".join(map(gzip.compress, pieces)), "b.gz")[0] == b"".join(pieces)


def test_what_lies_within_the_bounds_comes_out() -> None:
    data = (b" " * 200 + bytes(range(56))) * 16_000
    assert unpack(zipped(("b.xml", data)), "a.zip")[0] == data
