"""The findings in the manual are what the rules tell today, and are the same bytes each time they are made."""

from __future__ import annotations

import json

import pytest

from fixtures.write_rule_findings import FILE, text
from pairrules.checks.rule import all_rules
from pairrules.manual.page import plain
from pairrules.manual.rule_findings import rule_findings
from pairrules.manual.rule_page import rule_page

AGAIN = "run `python fixtures/write_rule_findings.py`"


def test_the_findings_are_those_of_a_run_today() -> None:
    assert FILE.read_text(encoding="utf-8") == text(), AGAIN


def test_a_fault_is_told_alike_whether_other_pairs_have_faults_or_not() -> None:
    """Returns far off and connectors elsewhere are no matter of a pair's own fault."""
    some = ("leg-length", "link-rejection", "via-match")
    whole = json.loads(FILE.read_text(encoding="utf-8"))
    assert json.loads(text(some)) == {rule: whole[rule] for rule in some}


def test_every_rule_has_its_finding() -> None:
    assert sorted(rule_findings()) == sorted(all_rules()), AGAIN
    assert len({finding.pair for finding in rule_findings().values()}) == len(all_rules())


@pytest.mark.parametrize("name", sorted(all_rules()))
def test_the_page_of_a_rule_shows_its_finding_whole(name: str) -> None:
    finding = rule_findings()[name]
    page = " ".join(plain((rule_page(name),)).split())
    for said in (finding.pair, f"{finding.severity}: {finding.found}", *finding.at, f"to do: {finding.advice}"):
        assert " ".join(said.split()) in page
