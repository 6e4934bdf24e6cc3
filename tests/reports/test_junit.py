"""The test cases that build servers read."""

from __future__ import annotations

from dataclasses import replace
from xml.etree import ElementTree as ET

from pairrules.reports import junit
from pairrules.reports.report import Look
from pairrules.result import WaiverState
from tests.reports.results import finding, pair, result, undecided

WHOLE = result(
    pair("A"),
    pair("IN", verdict="flag", findings=(finding(waived=True, rule="gap-band"), finding(baseline="new"), finding())),
    undecided(),
    pair("W", verdict="waived", findings=(finding(waived=True),)),
    missing=("no inner layer",),
    unpaired=("CLK_P",),
)


def test_one_suite_a_board_one_case_a_pair() -> None:
    held = WaiverState(rule="leg-length", pair="W", state="held", why="", reason="short", who="", until="2031-05-17")
    text = junit.render(replace(WHOLE, waivers=(held,)), Look())
    assert text.startswith('<?xml version="1.0" encoding="UTF-8"?>\n<testsuites ')
    whole = ET.fromstring(text)
    (suite,) = whole
    for element in (whole, suite):
        counts = {key: element.get(key) for key in ("tests", "failures", "errors", "skipped")}
        assert counts == {"tests": "4", "failures": "1", "errors": "0", "skipped": "2"}
    cases = suite.findall("testcase")
    assert [(case.get("classname"), case.get("name")) for case in cases] == [
        ("buoy.json", name) for name in ("A", "IN", "LOST", "W")
    ]
    assert [[child.tag for child in case] for case in cases] == [[], ["failure"], ["skipped"], ["skipped"]]
    failure = cases[1][0]
    assert failure.get("type") == "review"
    assert failure.get("message") == ("leg-length: plus is 1.10 mm longer than minus; 0.50 mm is allowed (and 1 more)")
    assert str(failure.text).splitlines()[:4] == [
        "review leg-length: new; plus is 1.10 mm longer than minus; 0.50 mm is allowed",
        "  at TOP (12.700, 25.400) mm",
        "  to do: add 1.10 mm to minus",
        "  limit from: common practice, no source",
    ]
    assert "gap-band" not in str(failure.text)
    assert cases[2][0].get("message") == (
        "undecided: gap-band: minus cannot be followed from end to end; "
        "leg-length: minus cannot be followed from end to end"
    )
    assert cases[3][0].get("message") == (
        "waived: leg-length: plus is 1.10 mm longer than minus; 0.50 mm is allowed (short)"
    )
    assert suite.findtext("system-out") == ("no inner layer\nnamed like half a pair, the other half is missing: CLK_P")


def test_a_pair_without_any_limit_is_skipped_with_the_reason() -> None:
    text = junit.render(result(pair("BARE", verdict="undecided", missing=("no limit holds",))), Look())
    (skipped,) = ET.fromstring(text).iter("skipped")
    assert skipped.get("message") == "undecided: no limit holds"


def test_several_boards_are_summed_and_one_unread_is_an_error() -> None:
    texts = (junit.render(WHOLE, Look()), junit.unreadable("b.xml", "b.xml: it is empty", "0.1.0"))
    whole = ET.fromstring(junit.join(texts))
    assert [suite.get("name") for suite in whole] == ["buoy.json", "b.xml"]
    assert [whole.get(key) for key in ("tests", "failures", "errors", "skipped")] == ["5", "1", "1", "2"]
    (error,) = whole.iter("error")
    assert error.get("message") == "b.xml: it is empty" == error.text


def test_joining_one_changes_nothing() -> None:
    text = junit.render(WHOLE, Look())
    assert junit.join((text,)) == text
