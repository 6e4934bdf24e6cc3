"""Every attack is refused with one line, or borne, within a hundred megabytes."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

from pairrules import check
from tests.fuzz.attacks import BORNE, REFUSED, SETTINGS, SETTINGS_BORNE, WAIVERS
from tests.fuzz.measure_attack import SETTINGS as SETTINGS_END
from tests.fuzz.measure_attack import WAIVERS as WAIVERS_END

ROOT = Path(__file__).resolve().parents[2]
MOST_MEGABYTES = 100.0
"""By which memory's peak may grow above that of checking a small board."""

MOST_SECONDS = 600.0
"""After which the process is ended: no measure of speed, but an attack without end shall not hang the tests.

`python -m tests.fuzz.measure_attack FILE` tells the processor's time: below a second for each.
"""

BOARDS = REFUSED | BORNE
EVERY = BOARDS | SETTINGS | SETTINGS_BORNE | WAIVERS

Outcomes = dict[str, dict[str, Any]]


@pytest.fixture(scope="module")
def outcomes(tmp_path_factory: pytest.TempPathFactory) -> Outcomes:
    folder = tmp_path_factory.mktemp("attacks")
    files = {}
    for i, (name, attack) in enumerate(EVERY.items()):
        end = "" if name in BOARDS else WAIVERS_END if name in WAIVERS else SETTINGS_END
        path = folder / f"{i}{end}"
        path.write_bytes(attack())
        files[str(path)] = name
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


@pytest.mark.parametrize("name", SETTINGS | WAIVERS)
def test_settings_and_waivers_are_refused(outcomes: Outcomes, name: str) -> None:
    found = outcomes[name]
    lines = found["said"].splitlines()
    assert found["status"] == 2
    assert lines
    assert all(line.startswith("pairrules: ") and "; " in line and line.isprintable() for line in lines)
    assert all(len(line) < 500 for line in lines)
    assert found["megabytes"] < MOST_MEGABYTES


@pytest.mark.parametrize("name", BORNE | SETTINGS_BORNE)
def test_borne(outcomes: Outcomes, name: str) -> None:
    found = outcomes[name]
    assert found["status"] in {0, 1}
    assert found["said"] == ""
    assert found["megabytes"] < MOST_MEGABYTES


def test_copper_that_cannot_be_followed_is_undecided(tmp_path: Path) -> None:
    path = tmp_path / "board.json"
    path.write_bytes(BORNE["a leg of twenty thousand tracks upon one another"]())
    (pair,) = check(path, "").pairs
    assert pair.verdict == "undecided"
    assert pair.missing[0] == "plus has copper that lies upon itself too often to be followed"
