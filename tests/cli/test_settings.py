"""`pairrules settings`: what each pair ended up with and from where; the first settings file of real boards."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from pairrules import check
from pairrules.cli import run
from pairrules.pipeline import find_pairs
from pairrules.shipped import demo_folder
from tests.cli.boards import limits, put

REAL = Path(__file__).resolve().parents[2] / ".." / "shared" / "boards" / "case-10-assembly.xml"

SETTINGS = """\
extends: [./house.yaml]
limits:
  leg-length: {most: 0.5 mm, source: a book}
classes:
  sensor:
    match: [IN]
    like: house
    cable: {length: 3 m, capacitance: 60 pF/m, twisted: true, screened: false}
    frequencies: [50 Hz, 1 kHz]
    limits:
      stub-length: {most: 5 % of rise_time, severity: note}
      via-match: off
"""
HOUSE = """\
extends: []
limits:
  leg-length: {most: 2 mm, severity: blocker}
  via-match: {most: 0, source: house}
classes:
  house:
    source: {kind: impedance, plus: 350 ohm, mismatch: -1 %}
    load: {kind: impedance, plus: {resistance: 1 Mohm, capacitance: 10 pF}, rejection: 110 dB}
    rise_time: 1 ns
    mask: [{frequency: 1 MHz, value: 40 dB}, {frequency: 50 MHz, value: 30 dB}]
    breakout: 2 mm
"""


def board(folder: Path) -> tuple[str, str, str]:
    """The board, its settings and the file these extend."""
    (folder / "house.yaml").write_text(HOUSE, encoding="utf-8")
    own = limits(folder, SETTINGS)
    return str(put(folder)), str(own), str(folder / "house.yaml")


def test_as_json_every_value_has_its_place(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path, own, house = board(tmp_path)
    assert run(["settings", "--format", "json", path]) == 0
    found = json.loads(capsys.readouterr().out)
    assert found["settings"] == [house, own]
    first, second = found["pairs"]
    assert (first["name"], first["class"], first["class_place"]) == ("IN", "sensor", f"{own} line 6")
    assert [(value["key"], value["says"], value["place"]) for value in first["values"]] == [
        ("like", "house", f"{own} line 7"),
        ("match", "IN", f"{own} line 6"),
        ("source", "impedance: plus 350 ohm, mismatch -1 %", f"{house} line 7"),
        ("cable", "length 3 m, capacitance 60 pF/m, twisted, not screened", f"{own} line 8"),
        (
            "load",
            "impedance: plus resistance 1 Mohm, plus capacitance 10 pF, rejection 110 dB",
            f"{house} line 8",
        ),
        ("frequencies", "50 Hz, 1 kHz", f"{own} line 9"),
        ("breakout", "2 mm", f"{house} line 11"),
        ("rise_time", "1 ns", f"{house} line 9"),
        ("mask", "40 dB at 1 MHz, 30 dB at 50 MHz", f"{house} line 10"),
    ]
    assert [tuple(limit.values()) for limit in first["limits"]] == [
        ("leg-length", "most 0.5 mm", "blocker", "a book", f"{own} line 3", f"{house} line 3"),
        ("stub-length", "most 5 % of rise_time", "note", "set by the project", f"{own} line 11", ""),
        ("via-match", "off", "", "", f"{own} line 12", ""),
    ]
    assert (second["name"], second["class"], second["values"]) == ("OK", None, [])
    assert [limit["rule"] for limit in second["limits"]] == ["leg-length", "via-match"]
    assert second["limits"][1]["severity_place"] == "default"


def test_as_a_table(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path, own, house = board(tmp_path)
    assert run(["settings", "--pair", "IN", path]) == 0
    out = capsys.readouterr().out
    assert all(len(line) <= 80 or str(tmp_path) in line for line in out.splitlines())
    # Where a line is broken depends on how long the path is; a path too long for a line is broken itself.
    said = "".join(out.split())
    for text in (
        f"IN (class sensor) [{own} line 6]",
        f"rise_time: 1 ns [{house} line 9]",
        f"leg-length: most 0.5 mm; blocker from {house} line 3; a book [{own} line 3]",
        f"via-match: off [{own} line 12]",
    ):
        assert text.replace(" ", "") in said
    assert "OK" not in said.split("IN(class")[1]


def test_new_settings_are_read_by_check_and_ignore_those_that_lie_there(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = str(put(tmp_path))
    limits(tmp_path, "classes: {")
    own = tmp_path / "new.yaml"
    assert run(["settings", "--new", "--output", str(own), path]) == 0
    assert capsys.readouterr() == ("", "")
    assert [pair.klass for pair in check(path, own).pairs] == ["other-pairs", "other-pairs"]
    text = own.read_text(encoding="utf-8")
    assert text.startswith("# First settings for buoy.json: 2 pairs in likely classes.\n")


@pytest.mark.parametrize("more", [["--settings", "x.yaml"], ["--format", "json"]])
def test_new_takes_no_settings(tmp_path: Path, capsys: pytest.CaptureFixture[str], more: list[str]) -> None:
    assert run(["settings", "--new", *more, str(put(tmp_path))]) == 2
    line = "pairrules settings: --new takes neither --settings nor --format; see `pairrules settings --help`\n"
    assert capsys.readouterr().err == line


def test_new_settings_of_the_demo_board(tmp_path: Path) -> None:
    own = tmp_path / "new.yaml"
    path = str(demo_folder() / "tide-gauge-buoy.json")
    assert run(["settings", "--new", "--pair", "[CU]*", "--output", str(own), path]) == 0
    assert [(pair.name, pair.klass) for pair in find_pairs(path, own, pairs="[CU]*").pairs] == [
        ("CAN", "can"),
        ("CONVERTER", "converter"),
        ("USB", "usb"),
    ]
    text = own.read_text(encoding="utf-8")
    assert "# CAN: can, by name (CAN); 119 ohm; U6 to J3; class can in the board file\n" in text


@pytest.mark.skipif(not REAL.exists(), reason="the consortium's board is not beside the checkout")
def test_new_settings_of_the_consortiums_board(tmp_path: Path) -> None:
    own = tmp_path / "new.yaml"
    assert run(["settings", "--new", "--output", str(own), str(REAL)]) == 0
    classes = {pair.name: pair.klass for pair in find_pairs(REAL, own).pairs}
    assert len(classes) == 17 and set(classes.values()) == {"serial-lane-pairs"}
    assert "# stackup:\n" in own.read_text(encoding="utf-8")


def test_a_class_that_only_the_board_file_knows(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path)
    declared = [{"name": "IN", "plus": "IN_P", "minus": "IN_N", "class": "winch"}]
    assert run(["settings", str(put(tmp_path, pairs=declared))]) == 0
    out = capsys.readouterr().out
    assert "\nIN  (class winch, which the settings do not have)\n  limits\n" in out
    assert "\nOK  (no class)\n  limits\n" in out
