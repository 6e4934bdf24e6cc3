"""The SARIF log against the schema of OASIS, and what becomes of findings, waivers and what could not be judged."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path
from typing import Any

import jsonschema
import pytest

from pairrules.reports import sarif
from pairrules.reports.report import Look
from pairrules.result import Result, RuleInfo, WaiverState
from tests.reports.hostile_names import HOSTILE
from tests.reports.results import finding, pair, result, undecided

SCHEMA = Path(__file__).resolve().parents[2] / ".." / "shared" / "schemas" / "sarif-2.1.0.schema.json"
RULE = RuleInfo(
    name="leg-length",
    summary="the legs differ in length",
    unit="mm",
    help=(("What it judges", "The length."), ("Source", "Common practice, no source.")),
)


def run(whole: Result) -> dict[str, Any]:
    (found,) = json.loads(sarif.render(whole, Look()))["runs"]
    assert isinstance(found, dict)
    return found


def test_it_fits_the_schema() -> None:
    if not SCHEMA.exists():
        pytest.skip("the schema that OASIS publishes does not lie beside the checkout")
    validator = jsonschema.Draft7Validator(json.loads(SCHEMA.read_text(encoding="utf-8")))
    waiver = WaiverState(rule="leg-length", pair="W", state="held", why="", reason="short", who="A", until="2031-05-17")
    lapsed = replace(waiver, state="expired", why="its day has passed")
    whole = result(
        pair("IN", verdict="flag", findings=(finding(baseline="new"), finding(at=())), line_plus=3, line_minus=9),
        pair("W", verdict="waived", findings=(finding(waived=True),)),
        undecided(),
        pair("BARE", verdict="undecided"),
        missing=("no inner layer",),
        unpaired=("CLK_P",),
    )
    whole = replace(whole, rules=(RULE,), waivers=(waiver, lapsed))
    evil = [
        result(pair(name, verdict="flag", findings=(finding(message=name),), line_plus=1), file=name)
        for name in HOSTILE.values()
    ]
    texts = [sarif.render(one, Look()) for one in (whole, *evil, result())]
    texts += [sarif.join(tuple(texts)), sarif.unreadable("a b.xml", "it is empty", "0.1.0")]
    for text in texts:
        validator.validate(json.loads(text))
    # The schema is no mere formality: what it asks for is missed when it is taken away.
    broken = json.loads(texts[0])
    del broken["runs"][0]["tool"]["driver"]["name"]
    with pytest.raises(jsonschema.ValidationError):
        validator.validate(broken)


@pytest.mark.parametrize(("severity", "level"), [("blocker", "error"), ("review", "warning"), ("note", "note")])
def test_severities_are_levels(severity: str, level: str) -> None:
    (one,) = run(result(pair(verdict="flag", findings=(finding(severity=severity),))))["results"]
    assert (one["kind"], one["level"]) == ("fail", level)


def test_a_finding_tells_where_and_how_it_is_known_again() -> None:
    flagged = pair("IN", verdict="flag", findings=(finding(),), line_plus=12, line_minus=40)
    (one,) = run(result(flagged, file="boards/my board.xml"))["results"]
    assert one["message"]["text"] == (
        "IN: plus is 1.10 mm longer than minus; 0.50 mm is allowed\nTo do: add 1.10 mm to minus"
    )
    (location,) = one["locations"]
    physical = location["physicalLocation"]
    assert physical == {"artifactLocation": {"uri": "boards/my%20board.xml"}, "region": {"startLine": 12}}
    assert [(at["kind"], at["fullyQualifiedName"]) for at in location["logicalLocations"]] == [
        ("pair", "IN"),
        ("net", "IN/IN_P"),
        ("net", "IN/IN_N"),
    ]
    assert one["relatedLocations"][0]["physicalLocation"]["region"] == {"startLine": 40}
    assert one["partialFingerprints"] == {"pairrulesFinding/v1": "0f"}
    assert one["properties"]["places"] == [{"layer": "TOP", "x_mm": 12.7, "y_mm": 25.4}]
    assert (one["properties"]["measured"], one["properties"]["limit"]) == (1.1, 0.5)
    assert "baselineState" not in one


def test_without_lines_there_is_no_region() -> None:
    (one,) = run(result(pair(verdict="flag", findings=(finding(fingerprint=""),))))["results"]
    assert "region" not in one["locations"][0]["physicalLocation"] and "relatedLocations" not in one
    assert "partialFingerprints" not in one


@pytest.mark.parametrize(("baseline", "state"), [("new", "new"), ("worse", "updated"), ("unchanged", "unchanged")])
def test_what_stood_before_is_told(baseline: str, state: str) -> None:
    (one,) = run(result(pair(verdict="flag", findings=(finding(baseline=baseline),))))["results"]
    assert one["baselineState"] == state


def test_a_waived_finding_is_suppressed_and_the_others_are_said_not_to_be() -> None:
    held = WaiverState(
        rule="leg-length", pair="W", state="held", why="", reason="the cable is short", who="A. B.", until="2031-05-17"
    )
    whole = result(
        pair("W", verdict="waived", findings=(finding(waived=True),)),
        pair("IN", verdict="flag", findings=(finding(),)),
        undecided(),
    )
    waived, flagged, *lost = run(replace(whole, waivers=(held,)))["results"]
    assert waived["suppressions"] == [
        {
            "kind": "external",
            "status": "accepted",
            "justification": "the cable is short",
            "properties": {"who": "A. B.", "until": "2031-05-17"},
        }
    ]
    assert flagged["suppressions"] == [] and [one["suppressions"] for one in lost] == [[], []]


def test_a_waiver_that_does_not_hold_is_a_warning_of_the_run() -> None:
    lapsed = WaiverState(
        rule="leg-length", pair="W", state="expired", why="it ended", reason="r", who="", until="2001-01-01"
    )
    (invocation,) = run(replace(result(missing=("no inner layer",)), waivers=(lapsed,)))["invocations"]
    assert invocation == {
        "executionSuccessful": True,
        "toolExecutionNotifications": [
            {"level": "warning", "message": {"text": "waiver of leg-length for W: it ended"}},
            {"level": "note", "message": {"text": "no inner layer"}},
        ],
    }


def test_what_could_not_be_judged_is_open_and_never_a_failure() -> None:
    found = run(result(undecided(), pair("BARE", verdict="undecided", missing=("no limit holds",))))["results"]
    assert [(one["ruleId"], one["kind"], one["level"]) for one in found] == [
        ("gap-band", "open", "none"),
        ("leg-length", "open", "none"),
        ("undecided-pair", "open", "none"),
    ]
    assert found[2]["message"]["text"] == "BARE: undecided, no limit holds"


def test_rules_bring_their_help_and_results_point_at_them() -> None:
    whole = replace(result(pair(verdict="flag", findings=(finding(),)), undecided()), rules=(RULE,))
    found = run(whole)
    rules = found["tool"]["driver"]["rules"]
    assert [rule["id"] for rule in rules] == ["gap-band", "leg-length"]
    assert rules[1]["help"]["text"] == "What it judges\nThe length.\n\nSource\nCommon practice, no source."
    assert rules[1]["fullDescription"]["text"] == "The length."
    for one in found["results"]:
        assert rules[one["ruleIndex"]]["id"] == one["ruleId"]


def test_several_boards_are_runs_in_order_and_one_unread_is_a_run_that_failed() -> None:
    texts = (sarif.render(result(file="b.json"), Look()), sarif.unreadable("a.json", "it is empty", "0.1.0"))
    first, second = json.loads(sarif.join(texts))["runs"]
    assert first["artifacts"][0]["location"]["uri"] == "b.json" and first["results"] == []
    assert second["invocations"][0]["executionSuccessful"] is False and "results" not in second
    assert second["invocations"][0]["toolExecutionNotifications"][0]["message"]["text"] == "it is empty"
