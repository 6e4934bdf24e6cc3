"""Every rule against its case file, and what every rule must have."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
import yaml

from pairrules.checks.rule import Undecided, all_rules
from pairrules.checks.timed_limit import in_own_unit
from tests.checks.drawn_pairs import limit, subject

FOLDER = Path(__file__).with_name("cases")
PARTS = ("What it judges", "Why it matters", "Formula", "Source", "What to do", "Example")
GEOMETRIC = {path.stem for path in FOLDER.glob("*.yaml")}


def cases() -> list[Any]:
    return [
        pytest.param(path.stem, case, id=f"{path.stem}: {case['name']}")
        for path in sorted(FOLDER.glob("*.yaml"))
        for case in yaml.safe_load(path.read_text(encoding="utf-8"))
    ]


@pytest.mark.parametrize(("name", "case"), cases())
def test_case(name: str, case: dict[str, Any]) -> None:
    rule = all_rules()[name]
    judged = subject(case)
    holds = in_own_unit(judged, limit(name, rule, case["limit"]), rule)
    answer = holds if isinstance(holds, Undecided) else rule.judge(judged, holds)
    if case["expect"] == "undecided":
        assert isinstance(answer, Undecided)
        assert answer.missing and not answer.missing.endswith(".")
        if "missing" in case:
            assert answer.missing == case["missing"]
        return
    assert not isinstance(answer, Undecided), answer
    if case["expect"] == "pass":
        assert answer == ()
        return
    (finding,) = answer
    assert (finding.rule, finding.severity, finding.unit) == (name, "review", rule.unit)
    assert finding.source == case.get("source", "this test")
    if "measured" in case:
        assert finding.measured == pytest.approx(case["measured"], abs=1e-9)
    if "limit_is" in case:
        assert finding.limit == pytest.approx(case["limit_is"], abs=1e-9)
    if "message" in case:
        assert finding.message == case["message"]
    assert case.get("message_has", "") in finding.message
    assert finding.advice.startswith(case.get("advice", "")) and finding.advice
    if finding.measured is not None and finding.unit:
        assert str(round(finding.measured, 2)) in finding.message


@pytest.mark.parametrize("name", sorted(all_rules()))
def test_every_rule_has_a_pass_a_flag_and_an_undecided(name: str) -> None:
    found = {case["expect"] for case in yaml.safe_load((FOLDER / f"{name}.yaml").read_text(encoding="utf-8"))}
    assert found == {"pass", "flag", "undecided"}


@pytest.mark.parametrize("name", sorted(all_rules()))
def test_every_rule_says_what_it_is(name: str) -> None:
    module = __import__(f"pairrules.checks.{name.replace('-', '_')}", fromlist=["RULE"])
    lines = str(module.__doc__).splitlines()
    assert lines[0].endswith(".") and len(lines[0]) < 100
    assert [line for line in lines if line in PARTS] == list(PARTS)
    for first, part in enumerate(lines):
        if part in PARTS:
            assert lines[first + 1].startswith("    ") and len(lines[first + 1].strip()) > 3, part
    rule = all_rules()[name]
    assert set(rule.required) <= set(rule.quantities)
    assert not rule.summary.endswith(".")


def test_no_case_file_without_a_rule() -> None:
    assert set(all_rules()) >= GEOMETRIC
