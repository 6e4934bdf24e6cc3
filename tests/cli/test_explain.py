"""`pairrules explain` and `check --explain`."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from pairrules.checks.rule import all_rules
from pairrules.cli import run
from tests.cli.boards import limits, put


def test_a_rule(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["explain", "leg-length"]) == 0
    out = capsys.readouterr().out
    assert out.startswith("leg-length\nThe legs of a pair differ in length.\n\nWhat it judges\n")
    assert "base: most 3 mm; severity review" in out


def test_without_a_rule_all_are_listed(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["explain"]) == 0
    out = capsys.readouterr().out
    assert [line.split(":")[0] for line in out.splitlines()[1 : 1 + len(all_rules())]] == list(all_rules())


def test_the_whole_manual_as_markdown_into_a_file(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    file = tmp_path / "manual.md"
    assert run(["explain", "--all", "--format", "markdown", "--output", str(file)]) == 0
    assert capsys.readouterr() == ("", "")
    text = file.read_text(encoding="utf-8")
    assert text.startswith("# Rules and figures of pairrules\n")
    for name in [*all_rules(), "Figures", "Model: sections"]:
        assert f"\n## {name}\n" in text


def test_a_figure(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["explain", "--figure", "gap_min_mm"]) == 0
    assert capsys.readouterr().out.startswith("gap_min_mm\nLeast distance from track edge to track edge")


@pytest.mark.parametrize(
    ("arguments", "line"),
    [
        (["leg-lenght"], "pairrules: there is no rule 'leg-lenght'; write 'leg-length'\n"),
        (["--figure", "gap_mn_mm"], "pairrules: there is no figure 'gap_mn_mm'; write 'gap_min_mm'\n"),
        (
            ["gap_min_mm"],
            "pairrules: gap_min_mm is a figure, no rule; write `pairrules explain --figure gap_min_mm`\n",
        ),
        (
            ["--figure", "gap-band"],
            "pairrules: gap-band is a rule, no figure; write `pairrules explain gap-band`\n",
        ),
        (
            ["gap-band", "--all"],
            "pairrules explain: give one of RULE, --figure and --all; see `pairrules explain --help`\n",
        ),
    ],
)
def test_what_cannot_be_explained(capsys: pytest.CaptureFixture[str], arguments: list[str], line: str) -> None:
    assert run(["explain", *arguments]) == 2
    assert capsys.readouterr() == ("", line)


SETTINGS = """
extends: []
limits:
  leg-length: {most: 0.5 mm, source: 'this test'}
  pair-impedance: {most: 20 ohm, source: 'this test'}
reference_nets: [GND]
"""
PLANE = [{"net": "GND", "layer": "GND", "outline": [[-5, -5], [25, -5], [25, 15], [-5, 15]]}]


def test_findings_tell_what_they_rest_on(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits(tmp_path, SETTINGS)
    path = put(tmp_path, bump=1.0, areas=PLANE)
    board = json.loads(path.read_text(encoding="utf-8"))
    del board["stackup"][1]["loss_tangent"]
    path.write_text(json.dumps(board), encoding="utf-8")
    assert run(["check", str(path)]) == 1
    assert "rests on" not in capsys.readouterr().out
    assert run(["check", "--explain", str(path)]) == 1
    out = " ".join(capsys.readouterr().out.split())
    _, impedance, length = out.split(" review ")[:3]
    if length.startswith("pair-impedance"):
        impedance, length = length, impedance
    assert "rests on: routes rebuilt from copper that touches" in length
    assert "assumed" not in length and "valid here" not in length
    assert "rests on: two-dimensional quasi-static field of each cross-section" in impedance
    assert "valid: up to the frequency at which the section spans a tenth of a wavelength" in impedance
    assert "valid here up to " in impedance
    assert "assumed: no loss tangent is known for D1: taken as lossless" in impedance


def test_only_the_listing_explains(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["check", "--explain", "--format", "json", str(put(tmp_path))]) == 2
    assert capsys.readouterr().err == (
        "pairrules check: --explain belongs to the listing; leave it or --format out; see `pairrules check --help`\n"
    )
