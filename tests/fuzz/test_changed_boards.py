"""A few changed boards of each kind through the whole command line; `python tests/fuzz/run.py` runs any number."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path
from random import Random

import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from fixtures.boards import BOARDS
from tests.fuzz.corpus import SETTINGS, STACKUP, WAIVERS, drawn, written
from tests.fuzz.mutations import mutated_json, mutated_xml, mutated_yaml, packed
from tests.fuzz.one_input import outcome

CASES = Path(__file__).parent / "cases"
ROOT = Path(__file__).resolve().parents[2]
SEEDS = st.integers(0, 2**32 - 1)
FEW = settings(max_examples=25, deadline=None, derandomize=True, database=None)


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("fuzz") / "case"


@FEW
@given(seed=SEEDS)
def test_any_case_of_the_long_run(folder: Path, seed: int) -> None:
    given_ = drawn(Random(seed))
    found = outcome(folder, given_.board, settings=given_.settings, waivers=given_.waivers, form=given_.form)
    assert found.fault == ""


@FEW
@given(seed=SEEDS)
def test_changed_json(folder: Path, seed: int) -> None:
    random = Random(seed)
    assert outcome(folder, mutated_json(*(random.choice(BOARDS)().board for _ in "ab"), random)).fault == ""


@FEW
@given(seed=SEEDS)
def test_changed_xml(folder: Path, seed: int) -> None:
    random = Random(seed)
    board, other = (written(random.choice(BOARDS)().board, random.choice("ABC")) for _ in "ab")
    assert outcome(folder, mutated_xml(board, other, random)).fault == ""


@FEW
@given(seed=SEEDS)
def test_damaged_archives(folder: Path, seed: int) -> None:
    random = Random(seed)
    assert outcome(folder, packed(written(BOARDS[0]().board, "C"), random)).fault == ""


@FEW
@given(seed=SEEDS)
def test_changed_settings_and_waivers(folder: Path, seed: int) -> None:
    random = Random(seed)
    board = json.dumps(BOARDS[random.choice((2, 9))]().board).encode()
    changed = mutated_yaml(random.choice((SETTINGS, SETTINGS | STACKUP)), SETTINGS, random)
    assert outcome(folder, board, settings=changed).fault == ""
    waivers = mutated_yaml(WAIVERS, WAIVERS, random)
    assert outcome(folder, board, settings=yaml.safe_dump(SETTINGS).encode(), waivers=waivers).fault == ""


@pytest.mark.parametrize("path", sorted(CASES.glob("*.board")), ids=lambda path: path.stem)
def test_what_once_broke_it(folder: Path, path: Path) -> None:
    """Each file here once ended in an exception, ran without end, or gave a figure that was no number."""
    settings_, waivers = (path.with_suffix(f".{kind}.yaml") for kind in ("settings", "waivers"))
    found = outcome(
        folder,
        path.read_bytes(),
        settings=settings_.read_bytes() if settings_.exists() else None,
        waivers=waivers.read_bytes() if waivers.exists() else None,
    )
    assert found.fault == ""


def test_a_fault_is_seen(folder: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The judge of outcomes tells an exception, a figure that is none, a stray file and a connection."""
    import socket

    from pairrules.reports import json_result
    from pairrules.running import pair_stage

    board = json.dumps(BOARDS[0]().board).encode()
    assert outcome(folder, board).fault == ""
    real = pair_stage.measure_links

    def stray(*arguments: object, **named: object) -> object:
        (folder.parent / "stray").write_text("x", encoding="utf-8")
        return real(*arguments, **named)  # type: ignore[arg-type]

    def dials(*arguments: object, **named: object) -> object:
        with socket.socket() as one, pytest.raises(OSError):
            one.connect(("127.0.0.1", 1))
        return real(*arguments, **named)  # type: ignore[arg-type]

    monkeypatch.setattr(pair_stage, "measure_links", stray)
    assert outcome(folder, board).fault.startswith("touches ")
    monkeypatch.setattr(pair_stage, "measure_links", dials)
    assert outcome(folder, board).fault == "touches socket.connect"
    monkeypatch.setattr(pair_stage, "measure_links", lambda *_, **__: 1 / 0)
    assert outcome(folder, board).fault.startswith("ZeroDivisionError")
    monkeypatch.setattr(pair_stage, "measure_links", real)
    monkeypatch.setattr(json_result.json, "dumps", lambda *_, **__: "[NaN]")
    assert outcome(folder, board).fault == "writes no finite figure: NaN"


def test_the_long_run_is_one_command(tmp_path: Path) -> None:
    command = [sys.executable, "tests/fuzz/run.py", "--count", "12", "--seed", "7", "--keep", str(tmp_path / "kept")]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
    assert done.stderr == ""
    assert done.stdout.startswith("12 cases ")
    assert " 0 faults; " in done.stdout
    assert done.returncode == 0
    assert not (tmp_path / "kept").exists()
