"""`pairrules link` and `pairrules section`: files in, tables and JSON out, errors in one line."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from click.testing import CliRunner

from pairrules.cli import run
from pairrules.cli.link import command as link_command

SECTION: dict[str, Any] = {
    "pairrules_section": 1,
    "id": "over a plane",
    "unit": "mm",
    "layers": [{"y0": 0.0, "y1": 0.2, "er": 4.2}],
    "planes": [{"y": 0.0, "x": None}],
    "conductors": [
        {"name": "plus", "role": "signal", "strip": [-0.3, -0.1, 0.2]},
        {"name": "minus", "role": "signal", "strip": [0.1, 0.3, 0.2]},
    ],
}
LINK: dict[str, Any] = {
    "pairrules_link": 1,
    "id": "named",
    "source": {"R": [1000, 1010]},
    "sections": [{"section": "over a plane", "length": 0.05}],
    "load": {"R_ground": [1e6, 1e6]},
    "frequencies": [50, 1000],
}


def written(folder: Path, document: Any) -> str:
    path = folder / "case.json"
    path.write_text(json.dumps(document))
    return str(path)


def told(capsys: pytest.CaptureFixture[str], *arguments: str) -> tuple[int, str, str]:
    status = run(arguments)
    out, err = capsys.readouterr()
    return status, out, err


def test_a_list_is_answered_in_its_order_by_kind(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = written(tmp_path, [LINK, SECTION, {**LINK, "id": 7}])
    for name in ("link", "section"):
        status, out, err = told(capsys, name, path, "--format", "json")
        found = json.loads(out)
        assert (status, err) == (0, "")
        assert [one["id"] for one in found] == ["named", "over a plane", 7]
        assert found[1]["impedance_diff_ohm"] > 0
        assert found[0]["results"] == found[2]["results"]


def test_a_named_section_is_the_same_as_its_matrices(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    _, out, _ = told(capsys, "link", written(tmp_path, [SECTION, LINK]), "--format", "json")
    section, named = json.loads(out)
    pair = section["pair"]
    given = {
        "L": [[value * 1e-9 for value in row] for row in pair["L_nH_per_m"]],
        "C": [[value * 1e-12 for value in row] for row in pair["C_pF_per_m"]],
        "length": 0.05,
    }
    _, out, _ = told(capsys, "link", written(tmp_path, {**LINK, "sections": [given]}), "--format", "json")
    for one, other in zip(json.loads(out)["results"], named["results"], strict=True):
        assert one["conversion_db"] == pytest.approx(other["conversion_db"], abs=1e-9)


def test_one_object_is_answered_by_one_object(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    _, out, _ = told(capsys, "section", written(tmp_path, SECTION), "--format", "json")
    assert json.loads(out)["id"] == "over a plane"
    _, out, _ = told(capsys, "link", written(tmp_path, []), "--format", "json")
    assert json.loads(out) == []


def test_stdin_is_a_file_named_by_a_dash() -> None:
    bare = {**LINK, "sections": []}
    found = CliRunner().invoke(link_command, ["-", "--format", "json"], input=json.dumps(bare))
    assert found.exit_code == 0
    assert json.loads(found.output)["id"] == "named"


def test_a_link_as_a_table(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    # 10 ohm of 1 kohm against 1 Mohm: 20 log(1e6 · 10/(1.001e6 · 1.00101e6)) = −100.02 dB, gain −0.01 dB.
    status, out, _ = told(
        capsys, "link", written(tmp_path, {**LINK, "sections": [], "id": "bare\x1b[2J", "frequencies": [50]})
    )
    assert status == 0
    assert out == (
        "link bare\\x1b[2J\n"
        "   frequency  conversion      source       trace        load        gain   rejection\n"
        "          Hz          dB          dB          dB          dB          dB          dB\n"
        "          50     -100.02     -100.02     -400.00     -400.00       -0.01      100.01\n"
    )


def test_a_section_as_a_table(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    _, out, _ = told(capsys, "section", written(tmp_path, [SECTION, {**SECTION, "id": "again"}]))
    lines = out.splitlines()
    assert lines[0] == "section over a plane"
    assert "section again" in lines
    assert sum(line.startswith("  differential impedance") for line in lines) == 2


FAULTS = [
    (
        "{",
        ["link"],
        "case.json: line 1: this is no JSON: expecting property name enclosed in double quotes; mend the text there",
    ),
    ('{"pairrules_link": NaN}', ["link"], "case.json: this is no JSON: NaN is no number here; write a plain number"),
    ("[" * 100_000, ["link"], "case.json: brackets are nested too deeply; give one object or a list"),
    (
        "[3]",
        ["link"],
        "case.json: [0]: neither of pairrules_section and pairrules_link is given; "
        "give one of them with its version, 1",
    ),
    (json.dumps(SECTION), ["link"], "case.json: pairrules_link is in no object; use `pairrules section` for this file"),
    (json.dumps(LINK), ["section"], "case.json: pairrules_section is in no object; use `pairrules link` for this file"),
    (
        json.dumps([LINK]),
        ["link"],
        'case.json: [0].sections[0].section: no section has the id "over a plane"; put that section into the same list',
    ),
    (
        json.dumps([SECTION, SECTION, LINK]),
        ["link"],
        'case.json: [1].id: two sections have the id "over a plane"; give each its own',
    ),
    (
        json.dumps([{**SECTION, "conductors": SECTION["conductors"][:1]}, LINK]),
        ["link"],
        "case.json: [0]: a link cannot run through this section: a pair needs two signal conductors; "
        "this section has 1; name a section with two signals and a reference",
    ),
]


@pytest.mark.parametrize(("text", "command", "line"), FAULTS, ids=[line[:50] for *_, line in FAULTS])
def test_faults_are_one_line(
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    text: str,
    command: list[str],
    line: str,
) -> None:
    (tmp_path / "case.json").write_text(text)
    monkeypatch.chdir(tmp_path)
    assert told(capsys, *command, "case.json") == (2, "", f"pairrules: {line}\n")


def test_a_file_that_cannot_be_read(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "binary.json").write_bytes(b"\xff\xfe\x00")
    assert told(capsys, "link", "none.json") == (
        2,
        "",
        "pairrules: none.json: cannot be read (no such file or directory); give a JSON file, or - for stdin\n",
    )
    assert told(capsys, "link", "binary.json") == (
        2,
        "",
        "pairrules: binary.json: this is no UTF-8 text; give a JSON file\n",
    )
