"""`pairrules picture` from the outside."""

from __future__ import annotations

from pathlib import Path
from xml.etree import ElementTree as ET

import pytest

from pairrules.cli import run
from tests.cli.boards import limits, put


def test_a_picture_of_a_pair(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    path, target = put(tmp_path, bump=1.0), tmp_path / "in.svg"
    assert run(["picture", str(path), "--pair", "IN", "-o", str(target)]) == 0
    assert capsys.readouterr().out == ""
    whole = ET.parse(target).getroot()
    assert whole.tag == "{http://www.w3.org/2000/svg}svg"
    told = ["".join(text.itertext()) for text in whole.iter("{http://www.w3.org/2000/svg}text")]
    assert told[0] == "Pair IN: IN_P and IN_N"
    assert any("review leg-length: plus is 2.00 mm longer than minus" in line for line in told)
    assert run(["picture", str(path), "--pair", "IN_?"]) == 0
    assert capsys.readouterr().out == target.read_text()


@pytest.mark.parametrize(
    ("wanted", "line"),
    [
        ("*", "2 pairs match '*' (IN, OK); name one of them"),
        ("NO", "no pair or net of a pair matches 'NO'; `pairrules pairs` lists them"),
    ],
)
def test_not_just_one_pair(tmp_path: Path, capsys: pytest.CaptureFixture[str], wanted: str, line: str) -> None:
    limits(tmp_path)
    path = put(tmp_path)
    assert run(["picture", str(path), "--pair", wanted]) == 2
    assert capsys.readouterr().err == f"pairrules: {path}: {line}\n"


def test_a_name_with_brackets_is_found_by_itself(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    path = put(tmp_path, pairs=[{"name": "D[0]", "plus": "IN_P", "minus": "IN_N"}])
    assert run(["picture", str(path), "--pair", "D[0]"]) == 0
    assert "<title>Pair D[0]: IN_P and IN_N</title>" in capsys.readouterr().out


def test_a_broken_pair_is_drawn_too(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    path = put(tmp_path, tracks=[{"net": "IN_P", "layer": "TOP", "width": 0.2, "points": [[0, 0], [9, 0]]}])
    assert run(["picture", str(path), "--pair", "IN"]) == 0
    assert "not routed from end to end" in " ".join(capsys.readouterr().out.split())
