"""`check --report NAME=FILE`: several reports of one run."""

from __future__ import annotations

import json
import re
from pathlib import Path
from xml.etree import ElementTree as ET

import pytest

from fixtures.boards import serpentine_leg
from fixtures.ipc2581_writer import to_ipc2581
from pairrules.cli import run
from tests.cli.boards import limits, put

KNOWN = ", ".join(sorted(["csv", "json", "junit", "listing", "markdown", "sarif"]))


@pytest.fixture
def there(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    limits(tmp_path)
    return tmp_path


def left(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.iterdir())


def test_several_reports_beside_the_listing(there: Path, capsys: pytest.CaptureFixture[str]) -> None:
    put(there, bump=1.0)
    wanted = ["--report", "sarif=out.sarif", "--report", "junit=out.xml", "--report", "markdown=out.md"]
    assert run(["check", "buoy.json", *wanted]) == 1
    out, err = capsys.readouterr()
    assert out.startswith("buoy.json: 2 pairs") and err == ""
    (one,) = json.loads((there / "out.sarif").read_text())["runs"]
    assert [found["ruleId"] for found in one["results"]] == ["leg-length"]
    assert one["artifacts"][0]["location"]["uri"] == "buoy.json"
    assert ET.parse(there / "out.xml").getroot().get("failures") == "1"
    assert (there / "out.md").read_text().startswith("### Pairs of <code>buoy.json</code>\n")
    assert left(there) == ["buoy.json", "out.md", "out.sarif", "out.xml", "pairrules.yaml"]


def test_output_and_reports_together(there: Path, capsys: pytest.CaptureFixture[str]) -> None:
    put(there)
    assert run(["check", "buoy.json", "--format", "json", "--output", "a.json", "--report", "csv=a.csv"]) == 0
    assert capsys.readouterr().out == ""
    assert json.loads((there / "a.json").read_text())["summary"]["pass"] == 2
    assert len((there / "a.csv").read_text().splitlines()) == 3


@pytest.mark.parametrize(
    ("arguments", "line"),
    [
        (["--report", "sarfi=x"], f"there is no report 'sarfi'; do you mean 'sarif'; there are {KNOWN}"),
        (["--report", "zzz=x"], f"there is no report 'zzz'; there are {KNOWN}"),
        (["--report", "sarif"], "--report 'sarif' is not NAME=FILE, as in sarif=out.sarif"),
        (["--report", "sarif="], "--report 'sarif=' is not NAME=FILE, as in sarif=out.sarif"),
        (
            ["--report", "sarif=x", "--report", "junit=./x"],
            "--report junit and --report sarif name the same file './x'",
        ),
        (["--report", "sarif=x", "--report", "sarif=x"], "--report sarif and --report sarif name the same file 'x'"),
        (["--output", "x", "--report", "csv=../here/x"], "--report csv and --output name the same file '../here/x'"),
    ],
)
def test_wrong_use_is_one_line_and_2_and_nothing_is_written(
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    arguments: list[str],
    line: str,
) -> None:
    (tmp_path / "here").mkdir()
    monkeypatch.chdir(tmp_path / "here")
    put(Path())
    assert run(["check", "buoy.json", *arguments]) == 2
    out, err = capsys.readouterr()
    assert out == "" and err == f"pairrules check: {line}; see `pairrules check --help`\n"
    assert left(Path()) == ["buoy.json"]


def test_one_that_cannot_be_written_leaves_all_as_they_were(there: Path, capsys: pytest.CaptureFixture[str]) -> None:
    put(there)
    (there / "old.xml").write_text("before")
    assert run(["check", "buoy.json", "--report", "junit=old.xml", "--report", "sarif=nowhere/out.sarif"]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err == (
        "pairrules: nowhere/out.sarif: --report sarif cannot be written (No such file or directory); "
        "name a file in a folder you may write to\n"
    )
    assert (there / "old.xml").read_text() == "before"
    assert left(there) == ["buoy.json", "old.xml", "pairrules.yaml"]


def test_a_folder_is_no_file(there: Path, capsys: pytest.CaptureFixture[str]) -> None:
    put(there)
    (there / "out").mkdir()
    assert run(["check", "buoy.json", "--report", "junit=out"]) == 2
    assert capsys.readouterr().err == "pairrules: out: --report junit names a folder; name a file in it\n"


def test_an_unreadable_board_is_told_where_a_report_can(there: Path, capsys: pytest.CaptureFixture[str]) -> None:
    put(there)
    wanted = [f"--report={name}=out.{name}" for name in ("sarif", "junit", "markdown", "csv")]
    assert run(["check", "gone.xml", "buoy.json", *wanted]) == 3
    out, err = capsys.readouterr()
    assert out.startswith("buoy.json: 2 pairs")
    assert err.splitlines() == [
        "pairrules: gone.xml: there is no such file; check the path",
        "pairrules: out.csv is not written, since not all boards could be judged",
    ]
    failed, judged = json.loads((there / "out.sarif").read_text())["runs"]
    assert failed["invocations"][0]["executionSuccessful"] is False and "results" not in failed
    assert judged["invocations"][0]["executionSuccessful"] is True
    suites = ET.parse(there / "out.junit").getroot()
    assert [(suite.get("name"), suite.get("errors")) for suite in suites] == [("gone.xml", "1"), ("buoy.json", "0")]
    assert "could not be read: gone.xml: there is no such file" in (there / "out.markdown").read_text()
    assert not (there / "out.csv").exists()


def test_wrong_settings_leave_nothing_written(there: Path, capsys: pytest.CaptureFixture[str]) -> None:
    put(there)
    limits(there, "limits: 3\n")
    assert run(["check", "buoy.json", "--report", "junit=out.xml"]) == 2
    assert "pairrules: out.xml is not written, since not all boards could be judged" in capsys.readouterr().err
    assert left(there) == ["buoy.json", "pairrules.yaml"]


def test_a_result_points_at_the_line_where_the_net_s_copper_stands(there: Path) -> None:
    path = there / "buoy.xml"
    path.write_bytes(to_ipc2581(serpentine_leg().board))
    assert run(["check", "buoy.xml", "--report", "sarif=out.sarif"]) == 1
    (one,) = json.loads((there / "out.sarif").read_text())["runs"][0]["results"]
    lines = path.read_text().splitlines()
    nets = []
    for place in (one["locations"][0], one["relatedLocations"][0]):
        line = place["physicalLocation"]["region"]["startLine"]
        assert "<Features>" in lines[line - 1]
        # The net is named by the set that the features stand in.
        before = "\n".join(lines[:line])
        nets.append(re.findall(r'<Set net="([^"]+)"', before)[-1])
    assert nets == ["IN_P", "IN_N"]
