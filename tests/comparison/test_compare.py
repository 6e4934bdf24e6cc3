"""Results held against each other: laws, tolerances, and which pair is which."""

from __future__ import annotations

import pytest

from pairrules.comparison.compare import compare, with_baseline
from pairrules.comparison.findings_matched import findings_matched
from pairrules.comparison.pairs_matched import matched
from pairrules.comparison.rounding import step
from pairrules.result import BalancePoint, Finding, Measures, PairResult
from tests.reports.results import finding, pair, result


@pytest.mark.parametrize(
    ("unit", "old", "within", "beyond"),
    [
        ("mm", 1.0, 1.001, 1.0011),
        ("mm", 50.0, 50.001, 50.0011),
        ("dB", 80.0, 80.01, 80.0101),
        ("dB", -150.0, -170.0, -139.0),
        ("ohm", 100.0, 101.0, 101.1),
        ("ohm", 0.001, 0.0011, 0.0012),
        ("ps", 0.5, 0.51, 0.52),
        ("mm2", 100.0, 100.1, 100.2),
        ("", 2.0, 2.0, 3.0),
        ("V", 1.0, 1.01, 1.02),
    ],
)
def test_rounding_noise_is_no_step(unit: str, old: float, within: float, beyond: float) -> None:
    assert step(old, within, unit) == 0.0 == step(within, old, unit)
    assert step(old, beyond, unit) > 0.0 > step(beyond, old, unit)


def changes(old: list[Finding], new: list[Finding]) -> list[str]:
    return [one.change for one in findings_matched(old, new)]


def test_findings_are_held_worst_to_worst() -> None:
    old = [finding(measured=3.0), finding(measured=5.0)]
    assert changes(old, [finding(measured=5.0), finding(measured=3.0)]) == ["same", "same"]
    assert changes(old, [finding(measured=4.0)]) == ["better", "vanished"]
    assert changes(old, [finding(measured=3.0), finding(measured=6.0), finding(measured=1.0)]) == [
        "same",
        "worse",
        "appeared",
    ]


def test_a_run_apart_ends_where_reach_does_and_is_known_less_well() -> None:
    for rule, change in (("apart-run", "same"), ("stub-length", "worse")):
        assert changes([finding(rule=rule, measured=2.0)], [finding(rule=rule, measured=2.009)]) == [change]
    assert changes([finding(rule="apart-run", measured=2.0)], [finding(rule="apart-run", measured=2.011)]) == ["worse"]
    assert compare(result(with_figures(apart_mm=2.0)), result(with_figures(apart_mm=2.009))).summary["same"] == 1


def test_too_little_is_worse_the_less_it_is() -> None:
    old = finding(rule="link-rejection", measured=70.0, limit=80.0, unit="dB")
    assert changes([old], [finding(rule="link-rejection", measured=69.0, limit=80.0, unit="dB")]) == ["worse"]
    assert changes([old], [finding(rule="link-rejection", measured=71.0, limit=80.0, unit="dB")]) == ["better"]


def test_the_other_side_of_a_band_is_another_finding() -> None:
    high, low = (
        finding(rule="pair-impedance", unit="ohm", measured=m, limit=b) for m, b in ((120.0, 110.0), (80.0, 90.0))
    )
    assert changes([high], [low]) == ["appeared", "vanished"]


def test_severity_and_waivers_count() -> None:
    assert changes([finding(severity="note")], [finding(severity="blocker")]) == ["worse"]
    assert changes([finding(severity="blocker")], [finding(severity="note")]) == ["better"]
    assert changes([finding(waived=True)], [finding()]) == ["appeared"]
    assert changes([finding()], [finding(waived=True)]) == ["waived"]
    assert changes([finding(waived=True)], [finding(waived=True)]) == ["same"]


def test_findings_without_numbers_are_the_same_while_they_stand() -> None:
    one = finding(rule="half-pair", measured=None, limit=None, unit="")
    assert changes([one], [one]) == ["same"] and changes([one], [one, one]) == ["same", "appeared"]


def ends(name: str, number: int) -> PairResult:
    return pair(name, ends_plus=("J1.1", f"U1.{number}"), ends_minus=("J1.2", f"U1.{number + 1}"))


def told(old: list[PairResult], new: list[PairResult]) -> list[tuple[str | None, str | None, str]]:
    return [(m.old.name if m.old else None, m.new.name if m.new else None, m.by) for m in matched(old, new)]


def test_pairs_are_the_same_by_their_nets_whatever_they_are_called() -> None:
    old, new = pair("A"), pair("B", plus="A_N", minus="A_P")
    assert told([old], [new]) == [("A", "B", "nets")]


def test_then_by_some_of_their_nets() -> None:
    old = pair("A", nets_plus=("A_P", "A_P_C"), nets_minus=("A_N", "A_N_C"))
    new = pair("B", nets_plus=("B_P", "A_P_C"), nets_minus=("B_N", "A_N_C"))
    assert told([pair("C"), old], [new]) == [("A", "B", "some nets"), ("C", None, "")]


def test_then_by_their_pins_legs_exchanged_or_not() -> None:
    turned = pair("Y", ends_plus=("J1.2", "U1.4"), ends_minus=("J1.1", "U1.3"))
    assert told([ends("A", 3), ends("B", 5)], [ends("X", 5), turned]) == [
        ("B", "X", "pins at its ends"),
        ("A", "Y", "pins at its ends"),
    ]


def test_then_by_their_parts_where_that_is_the_only_one() -> None:
    lone = pair("A", source="J7", load="U7")
    assert told([lone], [pair("X", source="U7", load="J7")]) == [("A", "X", "parts at its ends")]
    # Two pairs between the same parts: nothing tells which is which.
    both = [pair("X"), pair("Y")]
    assert told([pair("A")], both) == [(None, "X", ""), (None, "Y", ""), ("A", None, "")]


def test_then_by_name() -> None:
    new = pair("A", plus="Q_P", minus="Q_N", nets_plus=("Q_P",), nets_minus=("Q_N",), source="", load="")
    assert told([pair("A")], [new]) == [("A", "A", "name")]


def with_figures(**figures: float | None) -> PairResult:
    return pair(measures=Measures(**figures))  # type: ignore[arg-type]


def test_figures_that_say_how_far_from_balance_may_get_worse_others_only_change() -> None:
    before = result(with_figures(length_mismatch_mm=-1.0, gap_min_mm=0.2, loop_area_mm2=5.0, stub_plus_mm=1.0))
    after = result(with_figures(length_mismatch_mm=1.2, gap_min_mm=0.1, loop_area_mm2=4.0, stub_plus_mm=None))
    (one,) = compare(before, after).pairs
    assert one.change == "both" and one.worse
    assert {figure.figure: figure.change for figure in one.figures} == {
        "length_mismatch_mm": "worse", "gap_min_mm": "changed", "loop_area_mm2": "better", "stub_plus_mm": "changed",
    }  # fmt: skip


def at(frequency: float, rejection: float | None, total: float = -90.0) -> BalancePoint:
    return BalancePoint(
        frequency_hz=frequency,
        source_db=None,
        trace_db=None,
        cable_db=None,
        load_db=None,
        total_db=total,
        rejection_db=rejection,
    )


def test_rejection_gets_worse_as_it_falls() -> None:
    old = result(pair(balance=(at(50, 90.0), at(1e3, 80.0), at(1e6, None, -60.0))))
    new = result(pair(balance=(at(50, 89.0), at(1e3, 80.005), at(1e6, None, -59.0), at(2e6, 10.0))))
    (one,) = compare(old, new).pairs
    assert [(f.figure, f.frequency_hz, f.change) for f in one.figures] == [
        ("rejection_db", 50, "worse"),
        ("total_db", 1e6, "worse"),
    ]


@pytest.mark.parametrize("waived", [False, True])
def test_a_waived_finding_makes_nothing_worse(waived: bool) -> None:
    new = result(pair(findings=(finding(waived=waived),)))
    assert compare(result(pair()), new).worse is not waived
    assert compare(result(), new).worse is not waived


def test_a_result_is_the_same_as_itself_and_worse_turns_to_better() -> None:
    good = result(pair(findings=(finding(measured=1.0),)), pair("OK"))
    bad = result(pair(findings=(finding(measured=2.0),)), pair("OK"))
    assert {one.change for one in compare(good, good).pairs} == {"same"} and not compare(good, good).worse
    assert [one.change for one in compare(good, bad).pairs] == ["worse", "same"]
    assert [one.change for one in compare(bad, good).pairs] == ["better", "same"]
    assert compare(good, bad).summary == {
        "worse": 1, "better": 0, "both": 0, "changed": 0, "same": 1, "appeared": 0, "vanished": 0
    }  # fmt: skip


def test_the_baseline_marks_findings_and_leaves_all_else() -> None:
    old = result(pair(findings=(finding(measured=1.0), finding(rule="via-match", unit="", measured=1.0, limit=0.0))))
    new = result(
        pair(
            verdict="flag",
            findings=(finding(measured=1.0), finding(rule="via-match", unit="", measured=2.0, limit=0.0)),
        ),
        pair("NEW", source="X", verdict="flag", findings=(finding(),)),
    )
    marked = with_baseline(old, new)
    assert [[one.baseline for one in pair.findings] for pair in marked.pairs] == [["unchanged", "worse"], ["new"]]
    assert [pair.verdict for pair in marked.pairs] == ["flag", "flag"] and marked.summary == new.summary
