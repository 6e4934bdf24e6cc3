"""Any number of processes gives the same bytes, and one that is killed is told in one line."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

from tests.cli.boards import limits, put

ROOT = Path(__file__).resolve().parents[2]


def run(*words: str, code: str = "import pairrules.cli as c; c.main()") -> subprocess.CompletedProcess[str]:
    return subprocess.run([sys.executable, "-c", code, *words], cwd=ROOT, capture_output=True, text=True, check=False)


@pytest.mark.parametrize("form", ["json", "listing"])
def test_the_same_bytes_for_any_number_of_processes(tmp_path: Path, form: str) -> None:
    limits(tmp_path)
    path = str(put(tmp_path, bump=1.0))
    texts = {run("check", path, "--no-cache", "--format", form, "--jobs", jobs).stdout for jobs in ("1", "2", "3")}
    assert len(texts) == 1
    assert "leg-length" in texts.pop()


KILLED = """
import os, signal
import pairrules.cli as c
from pairrules.running import pair_stage
really = pair_stage.PairStage.judge
def judge(self, links):
    if any(link.name == "OK" for link in links):
        os.kill(os.getpid(), signal.SIGKILL)
    return really(self, links)
pair_stage.PairStage.judge = judge
c.main()
"""


@pytest.mark.skipif(sys.platform != "linux", reason="the change is handed to the workers by forking")
def test_a_killed_worker_is_told_in_one_line(tmp_path: Path) -> None:
    path = str(put(tmp_path))
    told = run("check", path, "--no-cache", "--jobs", "2", code=KILLED)
    assert told.returncode == 3
    assert told.stderr == (
        f"pairrules: {path}: a worker process ended before its pairs were measured; "
        "free memory or take fewer --jobs, then run again\n"
    )


@pytest.mark.skipif(sys.platform != "linux", reason="the change is handed to the workers by forking")
def test_a_board_that_costs_its_worker_its_life_does_not_stop_the_others(tmp_path: Path) -> None:
    code = KILLED.replace('any(link.name == "OK" for link in links)', "self.board.outline is not None")
    outline = {"outline": [[-5, -5], [30, -5], [30, 10], [-5, 10]]}
    paths = [str(put(tmp_path, f"{i}.json", **(outline if i == 1 else {}))) for i in range(4)]
    told = run("check", *paths, "--no-cache", "--jobs", "2", code=code)
    assert told.returncode == 3
    assert told.stderr == (
        f"pairrules: {paths[1]}: a worker process ended before the board was judged; "
        "free memory or take fewer --jobs, then run again\n"
    )
    assert [line.split()[-2:] for line in told.stdout.splitlines()[-4:]][1] == ["not", "judged"]


FEW_ARE_MANY = "from pairrules.running import workers\nworkers._MANY = 1\nimport pairrules.cli as c\nc.main()"


@pytest.mark.parametrize("form", ["json", "listing"])
def test_copper_made_ready_in_threads_changes_nothing(form: str) -> None:
    demo = str(ROOT / "fixtures" / "demo" / "tide-gauge-buoy.json")
    asked = ("check", demo, "--no-cache", "--format", form)
    alone = run(*asked, "--jobs", "1")
    assert alone.returncode == 1
    for jobs in (("--jobs", "2"), ("--jobs", "3"), ()):
        assert run(*asked, *jobs, code=FEW_ARE_MANY).stdout == alone.stdout
