"""Solved sections kept between runs: the same figures to the last bit, and nothing believed that is not whole."""

from __future__ import annotations

import dataclasses
import hashlib
import json
import pickle
import signal
import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import msgspec
import numpy as np
import pytest

from pairrules.balance import section_store
from pairrules.balance.section_store import SectionMatrices, solved
from pairrules.fields.cross_section import Conductor, CrossSection, Layer, Plane
from pairrules.fields.solve import SectionSolution
from pairrules.pipeline import check
from pairrules.result import Result
from pairrules.running.kept_check import kept_check
from pairrules.running.kept_results import KeptResults
from pairrules.running.kept_sections import KeptSections
from pairrules.running.section_file import SectionFile
from tests.balance.test_electrical import CLASS, straight

ROOT = Path(__file__).resolve().parents[2]


def section(*legs: str, gap: float = 0.2, planes: int = 1, beside: bool = False, thick: bool = True) -> CrossSection:
    """Legs of 0.25 mm over planes, with copper at 0 V 0.3 mm to their left."""

    def copper(name: str, x: float) -> Conductor:
        role = "signal" if name in legs else "grounded"
        if not thick:
            return Conductor(name=name, role=role, strip=(x, x + 0.25, 0.2))
        box = ((x, 0.2), (x + 0.25, 0.2), (x + 0.25, 0.235), (x, 0.235))
        return Conductor(name=name, role=role, polygon=box)

    conductors = [copper(name, i * (0.25 + gap)) for i, name in enumerate(legs)]
    return CrossSection(
        conductors=(*conductors, copper("beside", -0.55)) if beside else tuple(conductors),
        layers=(Layer(y0=0.0, y1=0.2, er=4.2, loss_tangent=0.02),),
        planes=tuple(Plane(y=0.0 if i == 0 else 0.5) for i in range(planes)),
    )


EVERY = {
    "both": section("plus", "minus"),
    "both beside copper": section("plus", "minus", beside=True, planes=2),
    "both of no height": section("plus", "minus", thick=False),
    "one": section("minus", beside=True),
    "without reference": section("plus", "minus", planes=0),
}


def store(folder: Path, rests_on: str = "1") -> KeptSections:
    return KeptSections(SectionFile(folder), rests_on)


def plain(value: object) -> object:
    """Figures as bytes and numbers that compare to the last bit."""
    if isinstance(value, np.ndarray):
        return value.shape, value.dtype.str, value.tobytes()
    if dataclasses.is_dataclass(value):
        return [plain(getattr(value, field.name)) for field in dataclasses.fields(value)]
    return repr(value)


class Solved:
    """How many sections were really solved."""

    def __init__(self, monkeypatch: pytest.MonkeyPatch) -> None:
        self.times = 0
        really = section_store.solve_section

        def counting(given: CrossSection) -> SectionSolution:
            self.times += 1
            return really(given)

        monkeypatch.setattr(section_store, "solve_section", counting)


@pytest.fixture
def counted(monkeypatch: pytest.MonkeyPatch) -> Solved:
    return Solved(monkeypatch)


def test_what_is_kept_is_what_was_solved_to_the_last_bit(tmp_path: Path, counted: Solved) -> None:
    first = store(tmp_path)
    given = {name: solved(one, first) for name, one in EVERY.items()}
    assert isinstance(given["without reference"], str)
    first.save()
    assert counted.times == len(EVERY)
    again = store(tmp_path)
    for name, one in EVERY.items():
        assert plain(solved(one, again)) == plain(given[name]), name
    assert counted.times == len(EVERY)


@pytest.mark.parametrize(
    "other",
    [
        section("plus", "minus", gap=0.2001),
        section("plus", "minus", planes=2),
        dataclasses.replace(EVERY["both"], layers=(Layer(y0=0.0, y1=0.2, er=4.2, loss_tangent=0.021),)),
    ],
)
def test_another_section_and_another_tool_are_solved_anew(tmp_path: Path, counted: Solved, other: CrossSection) -> None:
    first = store(tmp_path)
    solved(EVERY["both"], first)
    first.save()
    solved(other, store(tmp_path))
    solved(EVERY["both"], store(tmp_path, "2"))
    assert counted.times == 3


def test_nothing_is_read_before_a_section_is_asked_for(tmp_path: Path) -> None:
    kept = store(tmp_path)
    other = store(tmp_path)
    solved(EVERY["one"], other)
    other.save()
    assert EVERY["one"] in kept


def board(folder: Path) -> str:
    (folder / "pairrules.yaml").write_text(CLASS, encoding="utf-8")
    path = folder / "board.json"
    path.write_text(json.dumps(straight(shift=3.0)), encoding="utf-8")
    return str(path)


def once(path: str, kept: KeptResults, *, jobs: int = 1) -> Result:
    """A check that no kept result answers, only kept sections."""
    kept.clear()
    return kept_check(path, kept=kept, jobs=jobs)


def test_a_check_is_the_same_with_kept_sections_as_without(tmp_path: Path, counted: Solved) -> None:
    path, kept = board(tmp_path), KeptResults(tmp_path / "kept")
    without = check(path)
    alone = counted.times
    assert once(path, kept) == without
    assert counted.times == 2 * alone
    again = once(path, kept)
    assert counted.times == 2 * alone
    assert repr(again) == repr(without)


def test_what_is_damaged_or_foreign_is_not_believed(tmp_path: Path, counted: Solved) -> None:
    path, kept = board(tmp_path), KeptResults(tmp_path / "kept")
    true = once(path, kept)
    file = SectionFile(kept.folder)
    whole, every, alone = file.path.read_bytes(), file.read(), counted.times
    assert len(every) == alone
    head, body = whole[:21], whole[53:]

    def packed(content: bytes) -> bytes:
        return head + hashlib.sha256(content).digest() + content

    other = msgspec.msgpack.encode([[1.0], [1.0], [1.0], None, None, 1.0, None, [[1.0]]])
    hostile = [dict.fromkeys(every, value) for value in (b"", b"\xff", msgspec.msgpack.encode([1]), other)]
    for damaged in (
        b"",
        whole[:-1],
        whole[:-1] + b"\0",
        whole[:40],
        body,
        packed(b""),
        packed(pickle.dumps(every)),
        packed(msgspec.msgpack.encode([every])),
        *(packed(msgspec.msgpack.encode(one)) for one in hostile),
    ):
        file.path.write_bytes(damaged)
        counted.times = 0
        assert once(path, kept) == true
        assert counted.times == alone
        assert file.read() == every


def test_several_add_to_the_file_and_leave_it_whole(tmp_path: Path) -> None:
    file = SectionFile(tmp_path)
    file.add({b"a": b"1"})
    file.add({b"b": b"2"})
    assert file.read() == {b"a": b"1", b"b": b"2"}
    with ThreadPoolExecutor(8) as pool:
        list(pool.map(lambda i: file.add({bytes([i]): bytes(1000)}), range(64)))
    assert {b"a", b"b"} <= file.read().keys()
    assert [path.name for path in tmp_path.iterdir()] == [file.path.name]


def test_the_file_is_bounded_and_the_first_go_first(tmp_path: Path) -> None:
    few = SectionFile(tmp_path, most=3)
    for i in range(5):
        few.add({bytes([i]): b"x"})
    few.add({bytes([2]): b"y"})
    assert few.read() == {bytes([2]): b"y", bytes([3]): b"x", bytes([4]): b"x"}
    small = SectionFile(tmp_path, most_bytes=10_000)
    for i in range(20):
        small.add({bytes([i]): bytes(1000)})
    assert list(small.read()) == [bytes([i]) for i in range(12, 20)]
    assert small.extent().size <= 10_000
    small.path.write_bytes(small.path.read_bytes() + bytes(10_000))
    assert small.read() == {}


def test_a_folder_that_cannot_be_made_fails_nothing(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("", encoding="utf-8")
    path, kept = board(tmp_path), KeptResults(tmp_path / "file" / "kept")
    assert once(path, kept) == check(path)
    assert SectionFile(kept.folder).extent().sections == 0


KILLED = """
import os, signal, sys
from pathlib import Path
from pairrules.running import kept_check, whole_file
from pairrules.running.kept_results import KeptResults
os.replace = lambda *_: os.kill(os.getpid(), signal.SIGKILL)
kept_check.kept_check(sys.argv[1], kept=KeptResults(Path(sys.argv[2])))
"""


@pytest.mark.skipif(sys.platform == "win32", reason="a process is not killed by a signal there")
def test_a_run_that_is_killed_while_writing_leaves_what_was_there(tmp_path: Path, counted: Solved) -> None:
    path, kept = board(tmp_path), KeptResults(tmp_path / "kept")
    file = SectionFile(kept.folder)
    for before in ({}, {b"a": b"1"}):
        file.add(before)
        command = [sys.executable, "-c", KILLED, path, str(kept.folder)]
        assert subprocess.run(command, cwd=ROOT, check=False).returncode == -signal.SIGKILL
        assert file.read() == before
    assert any(one.name.endswith(".part") for one in kept.folder.iterdir())
    assert once(path, kept) == check(path)
    assert len(file.read()) == 1 + counted.times // 2
    assert not any(one.name.endswith(".part") for one in kept.folder.iterdir())


def test_what_workers_solve_is_kept_too(tmp_path: Path, counted: Solved) -> None:
    plain_board = straight()
    for key in ("parts", "tracks"):
        more = json.loads(json.dumps(plain_board[key]).replace("IN_", "OUT_"))
        for one in more:
            for pin in one.get("pins", ()):
                pin["at"][1] += 10
                pin["pin"] += "0"
            one.get("points", [])[:] = [[x, y + 10] for x, y in one.get("points", ())]
            one["ref" if "ref" in one else "width"] = one["ref"] + "0" if "ref" in one else 0.3
        plain_board[key] += more
    path, kept = board(tmp_path), KeptResults(tmp_path / "kept")
    Path(path).write_text(json.dumps(plain_board), encoding="utf-8")
    true = check(path)
    alone, counted.times = counted.times, 0
    assert len(true.pairs) == 2
    assert alone > 1
    assert once(path, kept, jobs=2) == true
    assert counted.times == 0  # all was solved elsewhere
    assert once(path, kept) == true
    assert counted.times == 0


def test_the_types_of_what_is_solved_are_plain() -> None:
    found = solved(EVERY["both beside copper"], {})
    assert isinstance(found, SectionMatrices)
    assert {type(found.diff), type(found.common), type(found.delay)} == {float}
    assert {type(one) for row in found.coupling for one in row} == {float}
