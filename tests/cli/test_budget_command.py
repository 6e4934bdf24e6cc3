"""`pairrules budget`: networks from options or from a class of a settings file."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from pairrules.cli import run

NETWORK = ["--source", "1 kohm", "--load", "1 Mohm"]
WANTED = ["--want", "80 dB", "--at", "50 Hz"]

SETTINGS = """\
classes:
  gauge:
    match: ["BR*"]
    source: {kind: impedance, plus: 1 kohm, minus: 1.01 kohm}
    cable: {length: 3 m, resistance: 0.09 ohm/m, capacitance: 60 pF/m}
    load: {kind: impedance, plus: {resistance: 1 Mohm}, minus: {resistance: 1 Mohm}, rejection: 100 dB}
    frequencies: [50 Hz, 1 kHz]
  bare:
    match: ["X*"]
    frequencies: [50 Hz]
"""


def told(capsys: pytest.CaptureFixture[str], *arguments: str) -> tuple[int, str, str]:
    status = run(["budget", *arguments])
    out, err = capsys.readouterr()
    return status, out, err


def test_options_as_json(capsys: pytest.CaptureFixture[str]) -> None:
    status, out, err = told(capsys, *NETWORK, "--source-minus", "1.01 kohm", *WANTED, "--format", "json")
    found = json.loads(out)
    assert (status, err) == (0, "")
    assert found["wanted"] == [{"frequency_hz": 50.0, "wanted_db": 80.0, "has_db": pytest.approx(100.01, abs=0.01)}]
    source = found["allowances"][0]
    assert source["name"] == "source resistance"
    # 1e-4 (Z_c + Z_s) with 1005 ohm on each leg, to first order; 10 ohm of it are used.
    assert source["alone"] == pytest.approx(100.1, rel=2e-3)
    assert source["remaining"] == pytest.approx(90.1, rel=2e-3)
    assert list(found["not_judged"]) == ["leg length"]


def test_options_as_a_table(capsys: pytest.CaptureFixture[str]) -> None:
    status, out, _ = told(
        capsys, "--source", "0 ohm", "--r1", "1 kohm", "--r2", "100 kohm", "--tolerance", "0.1 %", *WANTED,
        "--leg-impedance", "50 ohm", "--permittivity", "4",
    )  # fmt: skip
    lines = out.splitlines()
    assert status == 0
    assert lines[0] == "   frequency      wanted         has"
    # 20 log(101/0.004) = 88.05 dB; 0.2525 % for 80 dB (Sedra & Smith, problem 2.67).
    assert lines[1] == "       50 Hz     80.0 dB     88.0 dB"
    assert "resistor tolerance         0.252 %       0.152 %         50 Hz" in lines
    assert lines[-1].startswith("leg length")


def test_a_class_brings_networks_and_frequencies(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "pairrules.yaml").write_text(SETTINGS)
    path = str(tmp_path / "pairrules.yaml")
    status, out, err = told(capsys, "--settings", path, "--class", "gauge", "--want", "70 dB", "--format", "json")
    assert (status, err) == (0, "")
    found = json.loads(out)
    assert [one["frequency_hz"] for one in found["wanted"]] == [50.0, 1000.0]
    assert {one["name"] for one in found["allowances"]} == {"source resistance", "load resistance", "capacitance"}
    assert all(one["alone"] > one["remaining"] > 0 for one in found["allowances"])


FAULTS = [
    ([*NETWORK], "what is wanted is missing; add --want and at least one --at"),
    (["--load", "1 Mohm", *WANTED], "the source is missing; add --source, or --settings and --class"),
    (["--source", "1 ohm", *WANTED], "the load is missing; add --load, or --r1 and --r2"),
    ([*NETWORK, *WANTED, "--r1", "1 kohm"], "--load and --r1 are both given; give one kind of load"),
    (["--source", "1 ohm", *WANTED, "--r1", "1 kohm"], "--r1 and --r2 go together; give both or neither"),
    (
        [*NETWORK, *WANTED, "--tolerance", "1 %"],
        "--tolerance is given without --r1 and --r2; it is that of their resistors",
    ),
    (
        [*NETWORK, *WANTED, "--permittivity", "3"],
        "--leg-impedance and --permittivity go together; give both or neither",
    ),
    (["--class", "gauge", *WANTED], "--settings and --class go together; give both or neither"),
    (
        ["--settings", "s.yaml", "--class", "gauge", *NETWORK],
        "--source and --class are both given; name the network one way",
    ),
    (["--settings", "s.yaml", "--class", "pump"], "s.yaml: 'pump' is no class; known are bare, gauge"),
    (["--settings", "s.yaml", "--class", "bare"], "s.yaml: classes.bare: source is missing; add source: to the class"),
    (
        ["--settings", "s.yaml", "--class", "gauge"],
        "s.yaml: classes.gauge: no link-rejection is wanted; add limits.link-rejection, or give --want",
    ),
]


@pytest.mark.parametrize(("arguments", "line"), FAULTS, ids=[line[:50] for _, line in FAULTS])
def test_faults_are_one_line(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str], arguments: list[str], line: str
) -> None:
    (tmp_path / "s.yaml").write_text(SETTINGS)
    monkeypatch.chdir(tmp_path)
    assert told(capsys, *arguments) == (2, "", f"pairrules: {line}\n")


def test_a_quantity_without_a_unit_is_refused(capsys: pytest.CaptureFixture[str]) -> None:
    status, _, err = told(capsys, "--source", "1000", "--load", "1 Mohm", *WANTED)
    assert status == 2
    assert err == (
        "pairrules budget: invalid value for '--source': '1000' has no unit; write 350 ohm; "
        "see `pairrules budget --help`\n"
    )
