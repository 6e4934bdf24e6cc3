"""Moving, turning, mirroring a board or writing it in other units or another format changes no verdict and no figure.

Lengths and areas of copper agree to 1e-6 relatively or 1e-6 mm. Figures that rest on solved cross-sections agree to
1e-3: where the cuts fall, and to which hundredth of a micrometre a section is rounded before it is solved, may change
with the rounding of the coordinates, and with it what a section stands for.
"""

from __future__ import annotations

import json
import math
import re
from collections.abc import Callable, Iterable, Mapping
from dataclasses import astuple, fields
from functools import cache

import pytest

from fixtures.board_drawing import Tree
from fixtures.ipc2581_writer import to_ipc2581
from fixtures.moved_boards import in_units, mirrored, moved, turned
from fixtures.three_pairs import three_pairs, three_pairs_settings
from pairrules.checks.fingerprint import same_copper
from pairrules.checks.rule import all_rules
from pairrules.pipeline import check
from pairrules.result import Finding, Measures, PairResult, Result

Point = tuple[float, float]
Write = Callable[[Tree], bytes]
BY = (13.3701, -107.4499)

SOLVED = {"ps", "ohm", "pf", "nh"}
"""Units of figures that rest on solved cross-sections; so do dB, V and shares of findings."""
SMALLEST = {"ps": 1e-2, "ohm": 1e-4, "pf": 1e-3, "nh": 1e-2}
"""What a difference of the legs may change by where the legs are alike: a thousandth of a hundredth of a leg's own."""
NUMBER = re.compile(r"[0-9.]+")
FLOOR_DB = -250.0
"""Below this a conversion is what rounding leaves of two legs that are alike."""


def as_json(board: Tree) -> bytes:
    return json.dumps(board).encode()


def inch(board: Tree) -> bytes:
    return to_ipc2581(board, units="INCH")


def micron(board: Tree) -> bytes:
    return to_ipc2581(board, revision="B", units="MICRON")


def here(x: float, y: float) -> Point:
    return x, y


# Name to the board's change, how it is written, and where a place of the first board then lies [mm].
CHANGES: Mapping[str, tuple[Callable[[Tree], Tree], Write, Callable[[float, float], Point]]] = {
    "moved": (lambda board: moved(board, *BY), as_json, lambda x, y: (x + BY[0], y + BY[1])),
    "turned": (turned, as_json, lambda x, y: (-y, x)),
    "mirrored": (mirrored, as_json, lambda x, y: (-x, y)),
    "in um": (lambda board: in_units(board, "um"), as_json, here),
    "in mil": (lambda board: in_units(board, "mil"), as_json, here),
    "in inch": (lambda board: in_units(board, "in"), as_json, here),
    "as XML": (lambda board: board, to_ipc2581, here),
    "moved as XML in inch": (lambda board: moved(board, *BY), inch, lambda x, y: (x + BY[0], y + BY[1])),
    "turned as XML in micron": (turned, micron, lambda x, y: (-y, x)),
    "mirrored, in mil, as XML in inch": (lambda board: in_units(mirrored(board), "mil"), inch, lambda x, y: (-x, y)),
}


Checked = Callable[[str], Result]


@pytest.fixture(scope="module")
def checked(tmp_path_factory: pytest.TempPathFactory) -> Checked:
    """The board after a change, by the change's name; as it was drawn for ""."""

    @cache
    def result(change: str) -> Result:
        alter, write, _ = CHANGES[change] if change else (lambda board: board, as_json, here)
        folder = tmp_path_factory.mktemp("board")
        (folder / "board").write_bytes(write(alter(three_pairs())))
        (folder / "pairrules.yaml").write_text(three_pairs_settings(), encoding="utf-8")
        return check(folder / "board")

    return result


@pytest.fixture
def first(checked: Checked) -> Result:
    return checked("")


def test_the_board_has_what_could_change(first: Result) -> None:
    rules = {finding.rule for pair in first.pairs for finding in pair.findings}
    assert len(first.pairs) == 3 and len(rules) > 8
    assert {rule for pair in first.pairs for rule in (held.rule for held in pair.limits)} == set(all_rules())
    assert all(pair.routed == "complete" and pair.unjudged == () for pair in first.pairs)
    measures = [pair.measures for pair in first.pairs]
    assert any(abs(one.length_mismatch_mm or 0) > 0.5 for one in measures)
    assert any(one.vias_plus for one in measures) and any(one.reference_uncovered_mm for one in measures)
    assert any(pair.series for pair in first.pairs)


@pytest.mark.parametrize("change", CHANGES)
def test_verdicts_and_figures_stay(checked: Checked, first: Result, change: str) -> None:
    second, place = checked(change), CHANGES[change][2]
    assert [pair.plus for pair in second.pairs] == [pair.plus for pair in first.pairs]
    for one, other in zip(first.pairs, second.pairs, strict=True):
        assert (one.verdict, one.routed, one.unjudged, one.series) == (
            other.verdict,
            other.routed,
            other.unjudged,
            other.series,
        )
        assert (one.source, one.load, one.ends_plus, one.ends_minus) == (
            other.source,
            other.load,
            other.ends_plus,
            other.ends_minus,
        )
        same_measures(one, other)
        same_balance(one, other)
        assert [(f.rule, f.severity, f.unit) for f in one.findings] == [
            (f.rule, f.severity, f.unit) for f in other.findings
        ]
        for was, now in zip(one.findings, other.findings, strict=True):
            same_finding(was, now, place)


def same_measures(one: PairResult, other: PairResult) -> None:
    for field in fields(Measures):
        was, now = getattr(one.measures, field.name), getattr(other.measures, field.name)
        unit = field.name.rpartition("_")[2]
        if was is None or now is None:
            assert was is now, (one.name, field.name)
        elif unit in SOLVED:
            assert now == pytest.approx(was, rel=1e-3, abs=SMALLEST[unit]), (one.name, field.name)
        else:
            assert now == pytest.approx(was, rel=1e-6, abs=1e-6), (one.name, field.name)


def same_balance(one: PairResult, other: PairResult) -> None:
    for was, now in zip(one.balance, other.balance, strict=True):
        for before, after in zip(astuple(was), astuple(now), strict=True):
            assert (before is None) == (after is None)
            if before is not None and max(before, after) > FLOOR_DB:
                # A thousandth is 0.0087 dB; frequencies are the same anyhow.
                assert after == pytest.approx(before, abs=20 * math.log10(1 + 1e-3)), (one.name, was, now)


def same_finding(was: Finding, now: Finding, place: Callable[[float, float], Point]) -> None:
    """The same words and amounts, at places that lie where the first ones went to."""
    assert NUMBER.sub("#", now.message) == NUMBER.sub("#", was.message)
    geometric = was.unit in {"mm", "mm2"}
    for before, after in ((was.measured, now.measured), (was.limit, now.limit)):
        if before is None or after is None:
            assert before is after
        else:
            assert after == pytest.approx(before, rel=1e-6 if geometric else 1e-3, abs=1e-6)
    went = in_order((at.layer, *place(at.x_mm, at.y_mm)) for at in was.at)
    lie = in_order((at.layer, at.x_mm, at.y_mm) for at in now.at)
    assert [layer for layer, *_ in lie] == [layer for layer, *_ in went]
    assert [xy for _, *xy in lie] == [pytest.approx(xy, abs=1e-4) for _, *xy in went], was.rule


def in_order(places: Iterable[tuple[str, float, float]]) -> list[tuple[str, float, float]]:
    """Sorted as if there were no rounding."""
    return sorted(places, key=lambda at: (at[0], round(at[1], 4), round(at[2], 4)))


@pytest.mark.parametrize("change", [name for name in CHANGES if "mirrored" not in name])
def test_fingerprints_stay(checked: Checked, first: Result, change: str) -> None:
    second = checked(change)
    marks = [[finding.fingerprint for pair in result.pairs for finding in pair.findings] for result in (first, second)]
    assert len(marks[0]) == len(marks[1]) > 8
    for was, now in zip(*marks, strict=True):
        assert same_copper(was, now)
