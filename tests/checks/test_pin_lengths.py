"""What pins add to the legs: which pins a leg passes, lengths and times counted into both rules, what is not given."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from pairrules.checks.judge_pair import judge_pair
from pairrules.checks.pin_lengths import PinExtra, pin_extra
from pairrules.checks.rule import Subject, all_rules
from pairrules.pipeline import check
from pairrules.settings.limit import Timed
from pairrules.settings.pair_class import PinLengths
from tests.checks.drawn_pairs import limit, subject
from tests.cli.boards import put

CASE: dict[str, Any] = {"plus": [[[0, 0], [20, 0]]], "minus": [[[0, 0.5], [20, 0.5]]]}
"""Plus goes from pin 1 of U1 to pin 1 of J1, minus from pin 2 to pin 2."""


def extra(lengths: PinLengths, *expected: str, slowness: float | None = 6.0) -> PinExtra:
    drawn = subject(CASE)
    return pin_extra(drawn.board, drawn.link, drawn.geometry, lengths=lengths, expected=expected, slowness=slowness)


def legs(found: PinExtra) -> tuple[float | None, ...]:
    return found.plus_mm, found.minus_mm, found.plus_ps, found.minus_ps


def test_both_ends_of_a_leg_count_and_other_pins_do_not() -> None:
    given: PinLengths = {"U1": {"1": 3.0, "2": 2.0, "3": 50.0}, "J1": {"1": 0.5}, "U2": {"1": 70.0}}
    assert legs(extra(given)) == pytest.approx((3.5, 2.0, 21.0, 12.0))


def test_a_time_counts_as_a_length_at_the_pairs_velocity() -> None:
    assert legs(extra({"U1": {"1": Timed(amount=12.0)}, "J1": {"1": 1.0}})) == pytest.approx((3.0, 0.0, 18.0, 0.0))


def test_without_a_velocity_only_what_needs_none_is_known() -> None:
    given: PinLengths = {"U1": {"1": Timed(amount=12.0), "2": 2.0}}
    assert legs(extra(given, slowness=None)) == (None, 2.0, 12.0, None)


def test_expected_parts_without_a_length_are_named() -> None:
    assert extra({"U1": {"1": 3.0}}, "U*").missing == (
        "the class expects lengths of pins that pin_lengths in the settings does not give: U1 2"
    )
    assert extra({}, "U1", "J1").missing.endswith("does not give: J1 1, 2; U1 1, 2")
    assert extra({"U1": {"1": 3.0, "2": 0.0}}, "U1").missing == ""


def with_pins(case: dict[str, Any], pins: PinExtra) -> Subject:
    return replace(subject(case), pins=pins)


def test_the_length_rule_counts_them_in() -> None:
    rules = all_rules()
    given = {"leg-length": limit("leg-length", rules["leg-length"], {"most": "0.5 mm"})}
    (finding,) = judge_pair(with_pins(CASE, PinExtra(plus_mm=3.5, minus_mm=2.0)), given, rules).findings
    assert (finding.measured, finding.limit) == (pytest.approx(1.5), 0.5)
    assert finding.message == (
        "plus is 1.50 mm longer than minus (pins add 3.50 mm to plus and 2.00 mm to minus); 0.50 mm is allowed"
    )
    longer = CASE | {"minus": [[[0, 0.5], [21.5, 0.5]]]}
    assert judge_pair(with_pins(longer, PinExtra(plus_mm=3.5, minus_mm=2.0)), given, rules).findings == ()


def test_the_delay_rule_counts_them_in() -> None:
    rules = all_rules()
    case = CASE | {"electrical": {"delay_plus_ps": 120, "delay_minus_ps": 130}}
    given = {"leg-delay": limit("leg-delay", rules["leg-delay"], {"most": "5 ps"})}
    assert judge_pair(with_pins(case, PinExtra(plus_ps=9.0, minus_ps=2.0)), given, rules).findings == ()
    (finding,) = judge_pair(with_pins(case, PinExtra(plus_ps=18.0, minus_ps=2.0)), given, rules).findings
    assert finding.message == (
        "plus is 6.00 ps slower than minus (pins add 18.00 ps to plus and 2.00 ps to minus); 5.00 ps is allowed"
    )


@pytest.mark.parametrize(
    ("rule", "pins", "missing"),
    [
        ("leg-length", {"plus_mm": None}, "pins add a time to the legs, and the pair's velocity is unknown"),
        ("leg-delay", {"minus_ps": None}, "pins add a length to the legs, and the pair's velocity is unknown"),
    ],
)
def test_without_a_velocity_the_rules_are_undecided(rule: str, pins: dict[str, None], missing: str) -> None:
    rules = all_rules()
    case = CASE | {"electrical": {"delay_plus_ps": 120, "delay_minus_ps": 120}}
    given = {rule: limit(rule, rules[rule], {"most": "0.5 mm" if rule == "leg-length" else "5 ps"})}
    found = judge_pair(with_pins(case, PinExtra(**pins)), given, rules)
    assert [one.missing for one in found.unjudged] == [missing]


def test_from_the_settings_to_the_result(tmp_path: Path) -> None:
    (tmp_path / "pairrules.yaml").write_text(
        "extends: []\n"
        "pin_lengths: {U1: {1: 3.2 mm, 2: 2 mm}, J1: {1: 1 mm}}\n"
        "classes:\n"
        "  in:\n"
        "    match: [IN]\n"
        "    pin_lengths: {U1: {2: 2.2 mm}}\n"
        "    expects_pin_lengths: [J1, U1]\n"
        "limits: {leg-length: {most: 1 mm, source: 'this test'}}\n",
        encoding="utf-8",
    )
    first, second = check(put(tmp_path)).pairs
    assert [finding.measured for finding in first.findings] == pytest.approx([2.0])
    assert first.measures.length_mismatch_mm == pytest.approx(0.0)
    assert first.missing[-1] == (
        "the class expects lengths of pins that pin_lengths in the settings does not give: J1 2"
    )
    # The other pair has pins 3 and 4.
    assert second.verdict == "pass"
    assert [held.measured for held in second.limits] == pytest.approx([0.0])


def test_a_kept_limit_shows_what_was_compared(tmp_path: Path) -> None:
    (tmp_path / "pairrules.yaml").write_text(
        "extends: []\n"
        "pin_lengths: {U1: {1: 3.2 mm, 2: 2.9 mm}}\n"
        "limits: {leg-length: {most: 1 mm, source: 'this test'}}\n",
        encoding="utf-8",
    )
    first = check(put(tmp_path)).pairs[0]
    assert [(held.outcome, held.measured) for held in first.limits] == [("kept", pytest.approx(0.3))]
