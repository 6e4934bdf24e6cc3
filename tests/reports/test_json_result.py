"""The JSON result against its schema, and what it does to numbers and text."""

from __future__ import annotations

import json

import jsonschema

from pairrules.reports.json_result import REPORT
from pairrules.reports.report import Look
from pairrules.result import BalancePoint, Measures
from pairrules.schemas import schema_text
from tests.reports.results import finding, pair, result, undecided


def test_it_fits_its_schema() -> None:
    point = BalancePoint(
        frequency_hz=1e3,
        source_db=-92.0,
        trace_db=-130.0,
        cable_db=None,
        load_db=-88.0,
        total_db=-84.0,
        rejection_db=84.0,
    )
    lost = undecided()
    bare = pair("LOST", verdict="undecided", routed="partial", unjudged=lost.unjudged, measures=Measures(), klass=None)
    whole = result(pair("A", balance=(point,)), pair("IN", verdict="flag", findings=(finding(),)), bare)
    plain = json.loads(REPORT.render(whole, Look()))
    jsonschema.Draft202012Validator(json.loads(schema_text("result"))).validate(plain)
    assert plain["summary"] == {"pairs": 3, "pass": 1, "flag": 1, "waived": 0, "undecided": 1}
    assert plain["pairs"][1]["class"] == "sensor" and plain["pairs"][2]["class"] is None
    assert plain["pairs"][0]["balance"][0]["cable_db"] is None
    assert plain["pairs"][1]["findings"][0]["at"] == [{"layer": "TOP", "x_mm": 12.7, "y_mm": 25.4}]


def test_rounding_of_sums_does_not_show() -> None:
    noisy = Measures(length_plus_mm=0.1 + 0.2, length_mismatch_mm=-1e-12, vias_plus=2)
    measures = json.loads(REPORT.render(result(pair(measures=noisy)), Look()))["pairs"][0]["measures"]
    assert measures["length_plus_mm"] == 0.3
    assert str(measures["length_mismatch_mm"]) == "0.0"
    assert measures["vias_plus"] == 2 and isinstance(measures["vias_plus"], int)
    assert measures["length_minus_mm"] is None


def test_text_is_ascii_and_comes_back_whole() -> None:
    evil = "A\x1b\u202e\ud800µ\n"
    text = REPORT.render(result(pair(evil)), Look())
    assert text.isascii() and "\x1b" not in text
    assert json.loads(text)["pairs"][0]["name"] == evil


def test_several_boards_are_a_list_in_order() -> None:
    texts = tuple(REPORT.render(result(file=name), Look()) for name in ("b.json", "a.json"))
    assert [one["board"]["file"] for one in json.loads(REPORT.join(texts))] == ["b.json", "a.json"]
