"""What became of each limit, and the figure beside it."""

from __future__ import annotations

from pairrules.checks.held_limits import held_limits, says
from pairrules.checks.judge_pair import Judgement
from pairrules.checks.rule import Rule, Undecided
from pairrules.result import BalancePoint, Finding, Measures, Unjudged
from pairrules.settings.limit import Limit


def rule(unit: str = "mm", **quantities: str) -> Rule:
    return Rule(summary="", unit=unit, quantities=quantities, required=(), judge=lambda _, __: Undecided(missing=""))


RULES = {
    "leg-length": rule(most="length"),
    "link-rejection": rule("dB", least="ratio"),
    "loop-area": rule("mm2", most="area", width="length"),
    "stub-length": rule(most="length"),
}


def limit(name: str, **quantities: float) -> Limit:
    return Limit(rule=name, severity="review", quantities=quantities, source="this test", place="")


def found(waived: bool = False, measured: float = 1.1) -> Finding:
    return Finding(
        rule="leg-length",
        severity="review",
        measured=measured,
        limit=0.5,
        unit="mm",
        message="",
        advice="",
        waived=waived,
    )


def judgement(*findings: Finding, unjudged: tuple[Unjudged, ...] = ()) -> Judgement:
    return Judgement(findings=findings, unjudged=unjudged, judged=())


def point(rejection: float | None) -> BalancePoint:
    return BalancePoint(
        frequency_hz=50.0,
        source_db=None,
        trace_db=None,
        cable_db=None,
        load_db=None,
        total_db=None,
        rejection_db=rejection,
    )


def held(name: str, given: Limit, judged: Judgement, measures: Measures | None = None, *balance: BalancePoint) -> tuple:  # type: ignore[type-arg]
    (one,) = held_limits({name: given}, RULES, judged, measures or Measures(), balance)
    return one.outcome, one.measured, one.limit, one.missing


def test_a_broken_limit_has_what_its_finding_measured_and_a_waived_one_is_named_so() -> None:
    given = limit("leg-length", most=0.5)
    assert held("leg-length", given, judgement(found())) == ("broken", 1.1, 0.5, "")
    assert held("leg-length", given, judgement(found(waived=True))) == ("waived", 1.1, 0.5, "")
    assert held("leg-length", given, judgement(found(True), found(measured=2.0))) == ("broken", 2.0, 0.5, "")


def test_an_undecided_limit_says_what_is_missing_and_shows_no_figure() -> None:
    judged = judgement(unjudged=(Unjudged(rule="leg-length", missing="the via's height"),))
    got = held("leg-length", limit("leg-length", most=0.5), judged, Measures(length_mismatch_mm=0.1))
    assert got == ("undecided", None, None, "the via's height")


def test_a_kept_limit_has_the_figure_that_its_rule_compares() -> None:
    kept = judgement()
    given = limit("leg-length", most=0.5)
    assert held("leg-length", given, kept, Measures(length_mismatch_mm=-0.3)) == ("kept", 0.3, 0.5, "")
    rejection = limit("link-rejection", least=60.0)
    assert held("link-rejection", rejection, kept, None, point(84.0), point(71.0)) == ("kept", 71.0, 60.0, "")
    assert held("link-rejection", rejection, kept, None, point(84.0), point(None)) == ("kept", None, None, "")
    area = Measures(loop_area_mm2=30.0, coupled_mm=18.0, apart_mm=2.0)
    assert held("loop-area", limit("loop-area", most=50.0, width=2.0), kept, area) == ("kept", 30.0, 40.0, "")


def test_rules_that_look_for_places_have_no_single_figure() -> None:
    assert held("stub-length", limit("stub-length", most=1.0), judgement(), Measures(stub_plus_mm=0.4)) == (
        "kept",
        None,
        None,
        "",
    )


def test_limits_in_words() -> None:
    form = rule(spread="share", **{"for": "length"}, most="count")
    assert says(limit("x", spread=0.2, most=2.0, **{"for": 5.0}), form) == "for 5 mm, most 2, spread 20 %"
    assert says(limit("x"), form) == ""
