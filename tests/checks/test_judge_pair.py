"""What the rules' answers add up to."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from pairrules.checks.held_limits import held_limits
from pairrules.checks.judge_pair import Judgement, judge_pair, verdict
from pairrules.checks.rule import all_rules
from pairrules.result import Finding, Unjudged
from tests.checks.drawn_pairs import limit, subject

PLUS = [[[0, 0], [10, 0], [10, -1], [12, -1], [12, 0], [20, 0]]]
CASE: dict[str, Any] = {"plus": PLUS, "minus": [[[0, 0.5], [20, 0.5]]]}
LIMITS = {"leg-length": {"most": "0.5 mm"}, "via-match": {"most": "0"}, "width-match": {"most": "0.01 mm"}}


def judged(case: dict[str, Any], limits: dict[str, dict[str, str]] = LIMITS) -> Judgement:
    rules = all_rules()
    return judge_pair(subject(case), {name: limit(name, rules[name], said) for name, said in limits.items()}, rules)


def test_a_pair_is_judged_by_its_limits_alone() -> None:
    found = judged(CASE)
    assert [finding.rule for finding in found.findings] == ["leg-length"]
    assert found.judged == ("leg-length", "via-match", "width-match") and found.unjudged == ()
    assert verdict(found, "complete") == "flag"


def test_the_worst_severity_comes_first() -> None:
    rules = all_rules()
    case = CASE | {"minus": [{"points": [[0, 0.5], [20, 0.5]], "width": 0.3}]}
    limits = {name: limit(name, rules[name], LIMITS[name]) for name in ("leg-length", "width-match")}
    limits["leg-length"] = replace(limits["leg-length"], severity="note")
    limits["width-match"] = replace(limits["width-match"], severity="blocker")
    found = judge_pair(subject(case), limits, rules)
    assert [finding.rule for finding in found.findings] == ["width-match", "leg-length"]


def test_a_pair_that_no_rule_judges_is_undecided() -> None:
    assert verdict(judged(CASE, {}), "complete") == "undecided"


def test_a_broken_pair_is_undecided_even_where_every_rule_passes() -> None:
    broken = CASE | {"minus": [[[0, 0.5], [8, 0.5]], [[12, 0.5], [20, 0.5]]]}
    found = judged(broken, {"half-pair": {}})
    assert found.findings == () and found.judged == ("half-pair",)
    assert verdict(found, "partial") == "undecided"


def test_a_limit_said_as_a_time_is_kept_as_the_length_it_comes_to() -> None:
    case = CASE | {"electrical": {"sections": [{"mm": [0, 20], "delay": 6e-9}]}}
    rules = all_rules()
    found = judged(case, {"leg-length": {"most": "9 ps"}})
    assert [one.limit for one in found.findings] == pytest.approx([1.5])
    given = {"leg-length": limit("leg-length", rules["leg-length"], {"most": "9 ps"})}
    (held,) = held_limits(given, rules, found, subject(case).measures, ())
    assert (held.says, held.outcome, held.limit) == ("most 1.5 mm", "broken", pytest.approx(1.5))


def test_a_limit_said_as_a_share_of_nothing_known_is_undecided() -> None:
    rules = all_rules()
    found = judged(CASE, {"leg-length": {"most": "5 % of rise_time"}})
    why = "the limit is a share of rise_time, and the pair has no class that gives one"
    assert found.unjudged == (Unjudged(rule="leg-length", missing=why),) and found.judged == ()
    given = {"leg-length": limit("leg-length", rules["leg-length"], {"most": "5 % of rise_time"})}
    (held,) = held_limits(given, rules, found, subject(CASE).measures, ())
    assert (held.says, held.outcome, held.missing) == ("most 5 % of rise_time", "undecided", why)


FINDING = Finding(rule="r", severity="note", measured=None, limit=None, unit="", message="m", advice="a")
WAIVED = replace(FINDING, waived=True)
OPEN = Unjudged(rule="r", missing="m")


@pytest.mark.parametrize(
    ("findings", "unjudged", "rules_judged", "expected"),
    [
        ((), (), ("r",), "pass"),
        ((), (), (), "undecided"),
        ((), (OPEN,), ("r",), "undecided"),
        ((FINDING,), (), ("r",), "flag"),
        ((FINDING,), (OPEN,), ("r",), "flag"),
        ((FINDING, WAIVED), (), ("r",), "flag"),
        ((WAIVED,), (), ("r",), "waived"),
        ((WAIVED,), (OPEN,), ("r",), "undecided"),
    ],
)
def test_verdicts(
    findings: tuple[Finding, ...], unjudged: tuple[Unjudged, ...], rules_judged: tuple[str, ...], expected: str
) -> None:
    assert verdict(Judgement(findings=findings, unjudged=unjudged, judged=rules_judged), "complete") == expected
