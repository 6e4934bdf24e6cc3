"""`pairrules review` from the outside."""

from __future__ import annotations

import json
import re
import subprocess
import sys
from pathlib import Path

import pytest

from pairrules.cli import run
from tests.cli.boards import limits, put

ROOT = Path(__file__).resolve().parents[2]


def test_the_page_is_written_and_says_nothing_besides(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    target = tmp_path / "review.html"
    assert run(["review", str(put(tmp_path, bump=1.0)), "-o", str(target)]) == 0
    assert capsys.readouterr() == ("", "")
    text = target.read_text(encoding="utf-8")
    assert text.startswith("<!doctype html>") and text.rstrip().endswith("</html>")
    found = re.search(r'<script type="application/json" id="board">(.*?)</script>', text, re.S)
    assert found is not None
    pairs = json.loads(found[1])["pairs"]
    assert [(one["name"], one["verdict"], len(one["lines"])) for one in pairs] == [("IN", "flag", 2), ("OK", "pass", 2)]


def test_only_the_pairs_asked_for(tmp_path: Path) -> None:
    limits(tmp_path)
    target = tmp_path / "review.html"
    assert run(["review", "--pair", "OK", str(put(tmp_path)), "--output", str(target)]) == 0
    assert 'id="pair-0"' in target.read_text() and 'id="pair-1"' not in target.read_text()


@pytest.mark.parametrize(
    ("arguments", "line"),
    [
        ([], "pairrules review: missing option '-o' / '--output'; see `pairrules review --help`"),
        (
            ["-o", "x.html"],
            "pairrules review: no BOARD is given; name a file, or take --demo; see `pairrules review --help`",
        ),
        (["--demo", "x", "-o", "x.html"], "pairrules review: --demo takes no BOARD; see `pairrules review --help`"),
    ],
)
def test_wrong_usage_is_one_line_and_2(capsys: pytest.CaptureFixture[str], arguments: list[str], line: str) -> None:
    assert run(["review", *arguments]) == 2
    assert capsys.readouterr() == ("", line + "\n")


def test_a_board_that_is_not_there_writes_nothing(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    target, lost = tmp_path / "review.html", tmp_path / "lost.json"
    assert run(["review", str(lost), "-o", str(target)]) == 3
    assert capsys.readouterr().err == f"pairrules: {lost}: there is no such file; check the path\n"
    assert not target.exists()


def test_no_other_command_loads_the_templates(tmp_path: Path) -> None:
    code = "import sys\nfrom pairrules.cli import run\nrun(['check', sys.argv[1]])\nprint('jinja2' in sys.modules)\n"
    done = subprocess.run(
        [sys.executable, "-c", code, str(put(tmp_path))], capture_output=True, text=True, check=True, cwd=ROOT
    )
    assert done.stdout.splitlines()[-1] == "False"
