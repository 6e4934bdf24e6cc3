"""What a waiver needs to hold, and what it is told to be where it does not."""

from __future__ import annotations

from dataclasses import replace
from datetime import date

import pytest

from pairrules.checks.judge_pair import Judgement, verdict
from pairrules.checks.waiving import left_over, waive
from pairrules.result import Finding, Unjudged
from pairrules.settings.waivers import Waiver

MARK = "1:00c0ffee-" + "0123" * 8
NEAR = "1:00c0ffee-" + "0126" * 8
OTHER = "1:00c0ffee-" + "0123" * 7 + "0223"
DAY = date(2031, 5, 17)
LONG = Finding(
    rule="leg-length", severity="review", measured=1.0, limit=0.5, unit="mm", message="m", advice="a", fingerprint=MARK
)
VIAS = replace(LONG, rule="via-match", fingerprint="1:11c0ffee-" + "0123" * 8)
WAIVER = Waiver(rule="leg-length", pair=("IN",), reason="short", who="A. Tide", until=DAY, fingerprint=MARK, line=3)


def judged(*findings: Finding, unjudged: tuple[Unjudged, ...] = ()) -> Judgement:
    names = tuple(sorted({finding.rule for finding in findings} | {"leg-length"} - {one.rule for one in unjudged}))
    return Judgement(findings=findings, unjudged=unjudged, judged=names)


def test_it_waives_its_rule_alone() -> None:
    found, (state,) = waive(judged(LONG, VIAS), [WAIVER], DAY, name="IN")
    assert [finding.waived for finding in found.findings] == [True, False]
    assert (state.rule, state.pair, state.state, state.why, state.until) == (
        "leg-length",
        "IN",
        "held",
        "",
        "2031-05-17",
    )
    assert verdict(found, "complete") == "flag"


def test_all_findings_of_the_rule_are_waived_and_the_verdict_with_them() -> None:
    found, _ = waive(judged(LONG, replace(LONG, measured=2.0)), [WAIVER], DAY)
    assert [finding.waived for finding in found.findings] == [True, True]
    assert verdict(found, "complete") == "waived"


def test_it_hides_nothing_undecided() -> None:
    open_rule = Unjudged(rule="gap-band", missing="the stackup is unknown")
    found, _ = waive(judged(LONG, unjudged=(open_rule,)), [WAIVER], DAY)
    assert found.unjudged == (open_rule,)
    assert (
        verdict(found, "complete") == "undecided"
        and verdict(waive(judged(LONG), [WAIVER], DAY)[0], "partial") == "undecided"
    )


@pytest.mark.parametrize(
    ("waiver", "judgement", "today", "state", "why"),
    [
        (
            WAIVER, judged(LONG), date(2031, 5, 18), "expired",
            "it held until 2031-05-17; mend the finding or waive it again",
        ),
        (replace(WAIVER, fingerprint=NEAR), judged(LONG), DAY, "held", ""),
        (
            replace(WAIVER, fingerprint=OTHER), judged(LONG), DAY, "changed",
            "the copper is not what it was given for; look again, then mend the finding or waive it again",
        ),
        (
            replace(WAIVER, fingerprint=MARK.replace("1:", "9:", 1)), judged(LONG), DAY, "changed",
            "its fingerprint was made by another version of pairrules; waive the finding again",
        ),
        (WAIVER, judged(VIAS), DAY, "gone", "the rule finds nothing any more; take the waiver out"),
        (
            replace(WAIVER, rule="gap-band"), judged(LONG), DAY, "gone",
            "no limit of this rule holds for the pair; take the waiver out",
        ),
        (
            WAIVER, judged(VIAS, unjudged=(Unjudged(rule="leg-length", missing="plus is broken"),)), DAY, "undecided",
            "the rule could not judge: plus is broken",
        ),
    ],
)  # fmt: skip
def test_states(waiver: Waiver, judgement: Judgement, today: date, state: str, why: str) -> None:
    found, (told,) = waive(judgement, [waiver], today)
    assert (told.state, told.why) == (state, why)
    assert any(finding.waived for finding in found.findings) is (state == "held")


def test_one_of_no_pair_is_gone() -> None:
    (told,) = left_over([replace(WAIVER, pair=("A_P", "A_N"))])
    assert (told.pair, told.state, told.why) == ("A_P and A_N", "gone", "no pair has this name, or a net of this name")


def test_of_two_waivers_for_one_finding_one_that_holds_is_enough_and_each_is_told() -> None:
    by_net = replace(WAIVER, pair=("IN_P",), until=date(2030, 1, 1), line=9)
    for waivers in ((WAIVER, by_net), (by_net, WAIVER)):
        found, told = waive(judged(LONG), waivers, DAY, name="IN")
        assert [finding.waived for finding in found.findings] == [True]
        assert {one.line: (one.state, one.why) for one in told} == {
            3: ("held", ""),
            9: ("expired", "it held until 2030-01-01; mend the finding or waive it again"),
        }


def test_two_waivers_that_both_hold_are_both_told_as_held() -> None:
    found, told = waive(judged(LONG), [WAIVER, replace(WAIVER, pair=("IN_P", "IN_N"), line=9)], DAY, name="IN")
    assert [finding.waived for finding in found.findings] == [True]
    assert [(one.line, one.state) for one in told] == [(3, "held"), (9, "held")]


def test_two_waivers_neither_of_which_holds_waive_nothing() -> None:
    late, other = replace(WAIVER, until=date(2030, 1, 1)), replace(WAIVER, pair=("IN_P",), fingerprint=OTHER, line=9)
    found, told = waive(judged(LONG), [late, other], DAY, name="IN")
    assert not any(finding.waived for finding in found.findings)
    assert [one.state for one in told] == ["expired", "changed"]


def test_one_that_is_both_past_its_day_and_of_other_copper_is_told_as_expired() -> None:
    _, (told,) = waive(judged(LONG), [replace(WAIVER, fingerprint=OTHER)], date(2031, 5, 18))
    assert (told.state, told.why) == ("expired", "it held until 2031-05-17; mend the finding or waive it again")
