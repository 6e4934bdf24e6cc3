"""The schema of results: a whole result passes, one with a fault does not."""

from __future__ import annotations

import copy
import json
from dataclasses import fields
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from pairrules.result import SEVERITIES, BalancePoint, Measures
from pairrules.schemas import schema_text

SCHEMA = json.loads(schema_text("result"))
VALIDATOR = Draft202012Validator(SCHEMA)


def whole() -> dict[str, Any]:
    """A result of two pairs: one flagged, one broken off."""
    finding = {
        "rule": "leg-length", "severity": "review", "waived": False, "fingerprint": "0123abcd", "measured": 1.8,
        "limit": 1.25, "unit": "mm", "message": "plus is 1.80 mm longer than minus; 1.25 mm is allowed",
        "at": [{"layer": "TOP", "x_mm": 12.0, "y_mm": 30.5}], "advice": "add 1.80 mm to minus",
    }  # fmt: skip
    measures = {field.name: 1 for field in fields(Measures)}
    flagged = {
        "name": "IN", "plus": "IN_P", "minus": "IN_N", "class": None, "found_by": "net name", "nets_plus": ["IN_P"],
        "nets_minus": ["IN_N"], "routed": "complete", "verdict": "flag", "measures": measures,
        "balance": [{field.name: -80.0 if field.name != "frequency_hz" else 50.0 for field in fields(BalancePoint)}],
        "findings": [finding],
    }  # fmt: skip
    broken = flagged | {
        "name": "OUT", "class": "bus", "routed": "partial", "verdict": "undecided",
        "measures": dict.fromkeys(measures), "balance": [], "findings": [],
    }  # fmt: skip
    return copy.deepcopy({
        "pairrules_result": 1,
        "tool": {"name": "pairrules", "version": "0.1.0"},
        "board": {"file": "board.json", "sha256": "0" * 64, "format": "plain JSON", "revision": "1", "units": "mm",
                  "complete": True, "missing": []},
        "pairs": [flagged, broken],
        "unpaired": ["CLK_P"],
        "summary": {"pairs": 2, "pass": 0, "flag": 1, "waived": 0, "undecided": 1},
    })  # fmt: skip


def test_whole_result_passes() -> None:
    VALIDATOR.validate(whole())


def test_members_may_be_added() -> None:
    result = whole() | {"more": 1}
    result["pairs"][0]["more"] = {"a": 1}
    result["pairs"][0]["measures"]["more_mm"] = 1
    result["pairs"][0]["findings"][0]["source"] = "common practice, no source"
    VALIDATOR.validate(result)


@pytest.mark.parametrize(
    ("path", "value"),
    [
        (("pairrules_result",), 2),
        (("tool", "name"), "another"),
        (("board", "sha256"), "0" * 63),
        (("board", "complete"), None),
        (("board", "missing"), "nothing"),
        (("pairs", 0, "routed"), "mostly"),
        (("pairs", 0, "verdict"), "fail"),
        (("pairs", 0, "measures", "length_plus_mm"), -1),
        (("pairs", 0, "measures", "length_plus_mm"), "41.2"),
        (("pairs", 0, "measures", "vias_plus"), 1.5),
        (("pairs", 0, "balance", 0, "frequency_hz"), None),
        (("pairs", 0, "findings", 0, "severity"), "error"),
        (("pairs", 0, "findings", 0, "rule"), "Leg Length"),
        (("pairs", 0, "findings", 0, "at"), [{"layer": "TOP", "x_mm": 1.0}]),
        (("pairs", 0, "findings"), []),
        (("pairs", 0, "findings", 0, "waived"), True),
        (("pairs", 0, "class"), 1),
        (("pairs", 1, "verdict"), "pass"),
        (("pairs", 1, "measures", "length_mismatch_mm"), 0.0),
        (("summary", "pass"), -1),
    ],
    ids=lambda part: "/".join(map(str, part)) if isinstance(part, tuple) else None,
)
def test_fault_is_refused(path: tuple[str | int, ...], value: object) -> None:
    result: Any = whole()
    holder = result
    for step in path[:-1]:
        holder = holder[step]
    assert holder[path[-1]] != value
    holder[path[-1]] = value
    assert not VALIDATOR.is_valid(result)


def test_schema_knows_every_figure_and_no_other() -> None:
    definitions = SCHEMA["$defs"]
    assert set(definitions["measures"]["properties"]) == {field.name for field in fields(Measures)}
    assert set(definitions["balance"]["properties"]) == {field.name for field in fields(BalancePoint)}
    assert definitions["finding"]["properties"]["severity"]["enum"] == list(SEVERITIES)
    assert all("description" in figure for figure in definitions["measures"]["properties"].values())
