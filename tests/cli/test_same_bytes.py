"""The same input gives the same bytes: in another run, with other hashes of names, from another folder."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

from fixtures.boards import via_pair
from fixtures.ipc2581_writer import to_ipc2581
from pairrules.reports.report import reports_of
from pairrules.shipped import demo_folder

ROOT = Path(__file__).resolve().parents[2]
DEMO = demo_folder() / "tide-gauge-buoy.json"


def reports(board: Path, into: Path, *, cwd: Path, seed: str, jobs: int = 1) -> dict[str, bytes]:
    """Every report of a board, made in a process of its own."""
    into.mkdir()
    names = sorted(reports_of("check"))
    wanted = [part for name in names for part in ("--report", f"{name}={into / name}")]
    command = [sys.executable, "-m", "pairrules", "check", str(board), "--no-cache", "--today", "2026-01-01"]
    environment = os.environ | {"PYTHONHASHSEED": seed, "PYTHONPATH": str(ROOT)}
    done = subprocess.run(
        [*command, "--jobs", str(jobs), *wanted], cwd=cwd, env=environment, capture_output=True, check=False
    )
    assert done.stderr == b""
    assert done.returncode == 1
    return {"stdout": done.stdout} | {name: (into / name).read_bytes() for name in names}


@pytest.mark.parametrize("kind", ["demo", "IPC-2581"])
def test_other_hashes_and_folders_change_no_byte(tmp_path: Path, kind: str) -> None:
    board = DEMO
    if kind != "demo":
        tree = via_pair().board
        tree["futureMember"] = {"a": 1}
        board = tmp_path / "board.xml"
        board.write_bytes(to_ipc2581(json.loads(json.dumps(tree))))
    first = reports(board, tmp_path / "a", cwd=ROOT, seed="1")
    second = reports(board, tmp_path / "b", cwd=tmp_path, seed="31337")
    assert first.keys() == second.keys()
    for name, data in first.items():
        assert data, name
        assert data == second[name], name
