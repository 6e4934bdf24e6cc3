"""A file read piece by piece gives what its bytes give, and is refused where it changes meanwhile."""

from __future__ import annotations

import gzip
import hashlib
from pathlib import Path

import pytest

from fixtures.boards import BOARDS
from fixtures.ipc2581_writer import to_ipc2581
from pairrules.errors import BoardError
from pairrules.readers.long_file import LongFile
from pairrules.readers.reader import read_board

DATA = bytes(range(256)) * 40


def test_it_is_sliced_as_bytes_are(tmp_path: Path) -> None:
    path = tmp_path / "board"
    path.write_bytes(DATA)
    with path.open("rb") as file:
        held = LongFile(file, len(DATA), "board")
        assert len(held) == len(DATA)
        for part in (slice(4), slice(100, 300), slice(-5, None), slice(9000, 99000), slice(300, 100), slice(None)):
            assert held[part] == DATA[part]


@pytest.mark.parametrize("read_first", [[], [slice(0, 100)], [slice(0, 100), slice(0, 5000), slice(5000, None)]])
def test_its_digest_is_that_of_its_bytes(tmp_path: Path, read_first: list[slice]) -> None:
    path = tmp_path / "board"
    path.write_bytes(DATA)
    with path.open("rb") as file:
        held = LongFile(file, len(DATA), "board")
        for part in read_first:
            held[part]
        assert held.sha256() == hashlib.sha256(DATA).hexdigest()


def test_what_was_read_to_its_end_is_not_read_again_for_its_digest(tmp_path: Path) -> None:
    path = tmp_path / "board"
    path.write_bytes(DATA)
    with path.open("rb") as file:
        held = LongFile(file, len(DATA), "board")
        for start in range(0, len(DATA), 999):
            held[start : start + 999]
    assert held.sha256() == hashlib.sha256(DATA).hexdigest()  # closed: a further look would raise


@pytest.mark.parametrize("later", [DATA[:-1], DATA[:-1] + b"?"])
def test_a_file_that_changes_is_refused(tmp_path: Path, later: bytes) -> None:
    path = tmp_path / "board"
    path.write_bytes(DATA)
    with path.open("rb") as file:
        held = LongFile(file, len(DATA), "board")
        held[:]
        path.write_bytes(later)
        with pytest.raises(BoardError, match="board: the file changed while it was read"):
            held[:]


@pytest.mark.parametrize("packed", [False, True])
@pytest.mark.parametrize("form", ["json", "xml"])
def test_boards_are_the_same(tmp_path: Path, form: str, *, packed: bool) -> None:
    import json

    tree = BOARDS[0]().board
    data = json.dumps(tree).encode() if form == "json" else to_ipc2581(tree, revision="C")
    data = gzip.compress(data) if packed else data
    path = tmp_path / "board"
    path.write_bytes(data)
    whole = read_board(data, "board")
    with path.open("rb") as file:
        board = read_board(LongFile(file, len(data), "board"), "board")
    assert (board.nets, board.missing) == (whole.nets, whole.missing)
    assert board.tracks.start.tobytes() == whole.tracks.start.tobytes()
