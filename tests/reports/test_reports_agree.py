"""SARIF, JUnit and CSV of one run tell the same findings, and a second rendering is the same bytes."""

from __future__ import annotations

import csv
import io
import json
import re
import xml.etree.ElementTree as ET
from pathlib import Path

import pytest

from pairrules.pipeline import check
from pairrules.reports import csv_table, junit, sarif
from pairrules.reports.report import Look
from pairrules.result import Result
from pairrules.shipped import demo_folder

Told = set[tuple[str, str, str]]
"""(pair, rule, message) of every finding."""


@pytest.fixture(scope="module")
def demo() -> Result:
    return check(Path(demo_folder()) / "tide-gauge-buoy.json")


def expected(result: Result) -> Told:
    return {(pair.name, found.rule, found.message) for pair in result.pairs for found in pair.findings}


def of_sarif(text: str) -> Told:
    (run,) = json.loads(text)["runs"]
    told = set()
    for one in run["results"]:
        if one.get("kind", "fail") == "fail":
            pair = next(place["name"] for place in one["locations"][0]["logicalLocations"] if place["kind"] == "pair")
            told.add((pair, one["ruleId"], one["message"]["text"]))
    return told


def of_junit(text: str) -> Told:
    told = set()
    for case in ET.fromstring(text).iter("testcase"):
        for failure in case.iter("failure"):
            for found in re.finditer(r"^(?:blocker|review|note) ([a-z-]+): (.*)$", failure.text or "", re.MULTILINE):
                told.add((case.get("name") or "", found[1], found[2]))
    return told


def test_the_three_tell_the_same(demo: Result) -> None:
    want = expected(demo)
    assert len(want) > 10
    from_sarif = of_sarif(sarif.REPORT.render(demo, Look()))
    assert {(pair, rule) for pair, rule, _ in from_sarif} == {(pair, rule) for pair, rule, _ in want}
    for pair, rule, message in want:
        assert any(p == pair and r == rule and message in text for p, r, text in from_sarif)
    assert of_junit(junit.REPORT.render(demo, Look())) == want
    rows = {row["pair"]: row for row in csv.DictReader(io.StringIO(csv_table.REPORT.render(demo, Look())))}
    for pair in demo.pairs:
        cell = rows[pair.name]["findings"]
        assert all(f"{found.rule}: {found.message}" in cell for found in pair.findings)
        counted = sum(int(rows[pair.name][f"{severity} findings"]) for severity in ("blocker", "review", "note"))
        assert counted == len(pair.findings)


@pytest.mark.parametrize("report", [sarif, junit, csv_table])
def test_again_the_same_bytes(demo: Result, report: object) -> None:
    render = report.REPORT.render  # type: ignore[attr-defined]
    assert render(demo, Look()) == render(demo, Look())
