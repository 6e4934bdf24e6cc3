"""Results read back: all that was written comes again; damage becomes one line with its place."""

from __future__ import annotations

import json
from typing import Any

import pytest

from pairrules.comparison.saved_result import is_result, read_result
from pairrules.errors import UsageError
from pairrules.reports.json_result import as_plain, render
from pairrules.reports.report import Look
from pairrules.result import BalancePoint
from tests.reports.results import finding, pair, result, undecided

POINT = BalancePoint(
    frequency_hz=50.0, source_db=-92.0, trace_db=-130.0, cable_db=None, load_db=-88.0, total_db=-84.0, rejection_db=84.0
)
WHOLE = result(
    pair(findings=(finding(), finding(measured=None, limit=None, waived=True)), verdict="flag", balance=(POINT,)),
    pair("OUT", klass=None, ends_plus=("J1.1", "U1.2"), ends_minus=("J1.2", "U1.3")),
    undecided(),
    unpaired=("CLK_P",),
)


def test_what_was_written_comes_again() -> None:
    text = render(WHOLE, Look())
    again = read_result(text.encode(), "r.json")
    assert render(again, Look()) == text


def test_a_list_of_one_is_one() -> None:
    assert read_result(json.dumps([as_plain(WHOLE)]).encode(), "r.json").unpaired == ("CLK_P",)


def test_an_older_result_lacks_what_was_added_since() -> None:
    plain = as_plain(WHOLE)
    del plain["board"]["name"], plain["waivers"]
    for one in plain["pairs"]:
        for key in ("ends_plus", "ends_minus", "series", "unjudged", "source", "load", "missing"):
            del one[key]
    again = read_result(json.dumps(plain).encode(), "r.json")
    assert again.pairs[1].ends_plus == () and again.pairs[1].source == ""


@pytest.mark.parametrize(
    ("path", "value", "line"),
    [
        (("pairrules_result",), 2, "r.json: pairrules_result: is a result of version 2; version 1 is read here"),
        (("board", "complete"), 1, "r.json: board.complete: is neither true nor false; "),
        (("pairs",), {}, "r.json: pairs: is no list; "),
        (("pairs", 0), 5, "r.json: pairs[0]: is no object; "),
        (("pairs", 0, "name"), None, "r.json: pairs[0].name: is no text; "),
        (
            ("pairs", 0, "verdict"),
            "fine",
            "r.json: pairs[0].verdict: is 'fine', none of pass, flag, waived, undecided; ",
        ),
        (("pairs", 0, "measures", "gap_min_mm"), "wide", "r.json: pairs[0].measures.gap_min_mm: is no number; "),
        (("pairs", 0, "measures", "vias_plus"), 1.5, "r.json: pairs[0].measures.vias_plus: is no whole number; "),
        (
            ("pairs", 0, "findings", 1, "measured"),
            10**400,
            "r.json: pairs[0].findings[1].measured: is no finite number; ",
        ),
        (("pairs", 1, "nets_plus"), [1], "r.json: pairs[1].nets_plus: holds something else than texts; "),
    ],
)
def test_damage_is_told_with_its_place(path: tuple[str | int, ...], value: object, line: str) -> None:
    plain: Any = as_plain(WHOLE)
    holder = plain
    for step in path[:-1]:
        holder = holder[step]
    holder[path[-1]] = value
    again = "" if line.endswith("here") else "write it again with `pairrules check --format json`"
    with pytest.raises(UsageError) as caught:
        read_result(json.dumps(plain).encode(), "r.json")
    assert str(caught.value) == line + again


@pytest.mark.parametrize(
    ("text", "line"),
    [
        ('{"pairrules_result": 1', "r.json: line 1: this is no whole JSON text; "),
        ('{"pairrules_result": NaN}', "r.json: this is no whole JSON text; "),
        ("[" * 100_000, "r.json: this is no whole JSON text; "),
        ('{"pairrules_result": 1}', "r.json: the result: lacks 'board'; "),
        ("[]", "r.json: holds the results of 0 boards; give one board's result"),
    ],
)
def test_what_is_no_result(text: str, line: str) -> None:
    again = "" if line.endswith("result") else "write it again with `pairrules check --format json`"
    with pytest.raises(UsageError) as caught:
        read_result(text.encode(), "r.json")
    assert str(caught.value) == line + again


def test_results_and_boards_are_told_apart() -> None:
    assert is_result(render(WHOLE, Look()).encode()) and is_result(b'\xef\xbb\xbf [{"pairrules_result": 1}]')
    assert (
        not is_result(b'{"pairrules_board": 1}') and not is_result(b'<a b="pairrules_result"/>') and not is_result(b"")
    )
