"""The listing of waivers, and of findings beside an earlier result."""

from __future__ import annotations

from dataclasses import replace

from pairrules.reports.json_result import as_plain
from pairrules.reports.listing import render
from pairrules.reports.report import Look
from pairrules.result import WaiverState
from tests.reports.results import finding, pair, result

HELD = WaiverState(
    rule="leg-length",
    pair="IN",
    state="held",
    why="",
    reason="short\x1b[31m",
    who="A. Tide",
    until="2031-05-17",
    line=2,
)
GONE = replace(HELD, pair="OUT", state="gone", why="the rule finds nothing any more; take the waiver out")


def test_waivers_are_told_with_their_reason_or_why_they_do_not_hold() -> None:
    shown = render(replace(result(pair()), waivers=(HELD, GONE)), Look())
    assert (
        "Waivers (2)\n"
        "  held       leg-length of IN, until 2031-05-17 (A. Tide): short\\x1b[31m\n"
        "  gone       leg-length of OUT, the rule finds nothing any more; take the waiver\n"
        "             out\n"
    ) in shown
    assert "Waivers" not in render(result(pair()), Look())


def test_the_result_has_them_in_order() -> None:
    plain = as_plain(replace(result(pair()), waivers=(HELD, GONE)))
    assert [(one["rule"], one["pair"], one["state"]) for one in plain["waivers"]] == [
        ("leg-length", "IN", "held"),
        ("leg-length", "OUT", "gone"),
    ]


def test_what_stood_before_is_told_last_and_without_colour() -> None:
    stood = pair("OLD", verdict="flag", findings=(finding(severity="blocker", baseline="unchanged"),))
    new = pair("NEW", verdict="flag", findings=(finding(severity="note", baseline="new"),))
    shown = render(result(stood, new), Look(colour=True))
    assert shown.index("NEW  (") < shown.index("OLD  (")
    assert "  blocker    leg-length: stood before; plus is" in shown
    assert "\x1b[1;36mnote\x1b[0m       leg-length: new; plus is" in shown


def test_the_baseline_is_in_the_result_only_where_there_is_one() -> None:
    plain = as_plain(result(pair(findings=(finding(baseline="worse"), finding()))))
    assert (
        plain["pairs"][0]["findings"][0]["baseline"] == "worse" and "baseline" not in plain["pairs"][0]["findings"][1]
    )
