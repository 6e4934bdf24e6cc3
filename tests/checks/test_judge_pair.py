"""What the rules' answers add up to, and the fingerprints of what they find."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from pairrules.board import Board
from pairrules.checks.fingerprint import copper_digest
from pairrules.checks.held_limits import held_limits
from pairrules.checks.judge_pair import Judgement, judge_pair, verdict
from pairrules.checks.rule import Subject, all_rules
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


def digest(of: Subject) -> str:
    return copper_digest(of.board, of.link)


def moved(board: Board, dx: float, dy: float) -> Board:
    by = np.array([dx, dy])
    tracks, vias, pads = board.tracks, board.vias, board.pads
    return replace(
        board,
        tracks=replace(tracks, start=tracks.start + by, end=tracks.end + by, centre=tracks.centre + by),
        vias=replace(vias, at=vias.at + by),
        pads=replace(pads, at=pads.at + by),
    )


@pytest.mark.parametrize("by", [(100.0, -37.0), (0.0127, 2.54), (1e-4 / 3, 7.7777777), (-1234.5678, 0.1)])
def test_moving_the_board_leaves_the_fingerprint(by: tuple[float, float]) -> None:
    # 0.5 mil and half a micrometre: the grids on which rounding is at an edge.
    grids = {"plus": [[[0, 0], [10.0127, 0.0005], [20.0005, 0]]], "minus": [[[0, 0.5], [20, 0.5]]]}
    here = subject(grids)
    assert copper_digest(moved(here.board, *by), here.link) == digest(here)


def test_drawing_order_and_direction_leave_it() -> None:
    cut = {"plus": [[[0, 0], [10, 0]], [[10, 0], [20, 0]]], "minus": [[[0, 0.5], [20, 0.5]]]}
    turned = cut | {"plus": [[[20, 0], [10, 0]], [[10, 0], [0, 0]]], "ends_plus": [[0, 0], [20, 0]]}
    assert digest(subject(cut)) == digest(subject(turned))


@pytest.mark.parametrize(
    "other",
    [
        {"plus": [[[0, 0], [10, 0], [10, -1.01], [12, -1.01], [12, 0], [20, 0]]]},
        {"plus": [{"points": PLUS[0], "width": 0.21}]},
        {"vias": [{"net": "A_P", "at": [10, 0]}]},
    ],
)
def test_other_copper_has_another(other: dict[str, Any]) -> None:
    assert digest(subject(CASE | other)) != digest(subject(CASE))


def test_each_rule_has_its_own() -> None:
    case = CASE | {"minus": [{"points": [[0, 0.5], [20, 0.5]], "width": 0.3}]}
    marks = [finding.fingerprint for finding in judged(case).findings]
    assert len(marks) == 2 and len(set(marks)) == 2 and all(len(mark) == 32 for mark in marks)
