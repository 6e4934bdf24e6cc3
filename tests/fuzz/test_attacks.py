"""Every attack is refused with one line, or borne, within a hundred megabytes."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

from pairrules import check
from tests.fuzz.attacks import BORNE, REFUSED

ROOT = Path(__file__).resolve().parents[2]
MOST_MEGABYTES = 100.0
MOST_SECONDS = 600.0
"""After which the process is ended: no measure of speed, but an attack without end shall not hang the tests.

`python -m tests.fuzz.measure_attack FILE` tells the processor's time: below a second for all but a few.
"""

Outcomes = dict[str, dict[str, Any]]


@pytest.fixture(scope="module")
def outcomes(tmp_path_factory: pytest.TempPathFactory) -> Outcomes:
    folder = tmp_path_factory.mktemp("attacks")
    files = {str(folder / f"{i}"): name for i, name in enumerate((*REFUSED, *BORNE))}
    for path, name in files.items():
        Path(path).write_bytes({**REFUSED, **BORNE}[name]())
    command = [sys.executable, "-m", "tests.fuzz.measure_attack", *files]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, timeout=MOST_SECONDS, check=False)
    assert done.returncode == 0
    assert done.stderr == ""
    return {files[one["file"]]: one for one in map(json.loads, done.stdout.splitlines())}


@pytest.mark.parametrize("name", REFUSED)
def test_refused(outcomes: Outcomes, name: str) -> None:
    found = outcomes[name]
    (line,) = found["said"].splitlines()
    assert found["status"] == 3
    assert line.startswith(f"pairrules: {found['file']}: ")
    assert "; " in line, "a remedy is missing"
    assert line.isprintable()
    assert len(line) < 500
    assert found["megabytes"] < MOST_MEGABYTES


@pytest.mark.parametrize("name", BORNE)
def test_borne(outcomes: Outcomes, name: str) -> None:
    found = outcomes[name]
    assert found["status"] in {0, 1}
    assert found["said"] == ""
    assert found["megabytes"] < 3 * MOST_MEGABYTES


def test_copper_that_cannot_be_followed_is_undecided(tmp_path: Path) -> None:
    path = tmp_path / "board.json"
    path.write_bytes(BORNE["a leg of twenty thousand tracks upon one another"]())
    (pair,) = check(path, "").pairs
    assert pair.verdict == "undecided"
    assert pair.missing[0] == "plus has copper that lies upon itself too often to be followed"
