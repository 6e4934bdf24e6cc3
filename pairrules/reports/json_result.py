"""The result as JSON, version 1 of the result's interface."""

from __future__ import annotations

import json
from typing import Any

from pairrules.reports.report import Look, Report
from pairrules.result import RESULT_VERSION, Finding, Measures, PairResult, Result, WaiverState


def render(result: Result, look: Look) -> str:
    """One object. Keys in the interface's order, numbers to 1e-9, unknown figures `null`, other than ASCII escaped."""
    del look
    return json.dumps(as_plain(result), indent=2, allow_nan=False) + "\n"


def join(texts: tuple[str, ...]) -> str:
    """A list with one object for each board, in the order given."""
    return "[\n" + ",\n".join(text.rstrip("\n") for text in texts) + "\n]\n"


def as_plain(result: Result) -> dict[str, Any]:
    """The result as plain dicts, lists, strings and numbers."""
    board = result.board
    return {
        "pairrules_result": RESULT_VERSION,
        "tool": {"name": "pairrules", "version": result.version},
        "board": {
            "file": board.file,
            "sha256": board.sha256,
            "format": board.format,
            "revision": board.revision,
            "units": board.units,
            "name": board.name,
            "complete": board.complete,
            "missing": list(board.missing),
        },
        "pairs": [_pair(pair) for pair in result.pairs],
        "unpaired": list(result.unpaired),
        "waivers": [_waiver(waiver) for waiver in result.waivers],
        "summary": result.summary,
    }


def _pair(pair: PairResult) -> dict[str, Any]:
    return {
        "name": pair.name,
        "plus": pair.plus,
        "minus": pair.minus,
        "class": pair.klass,
        "found_by": pair.found_by,
        "nets_plus": list(pair.nets_plus),
        "nets_minus": list(pair.nets_minus),
        "source": pair.source,
        "load": pair.load,
        "ends_plus": list(pair.ends_plus),
        "ends_minus": list(pair.ends_minus),
        "series": [{"ref": part.ref, "value": part.value, "leg": part.leg} for part in pair.series],
        "routed": pair.routed,
        "verdict": pair.verdict,
        "measures": {key: _number(getattr(pair.measures, key)) for key in Measures.__dataclass_fields__},
        "balance": [
            {key: _number(getattr(point, key)) for key in type(point).__dataclass_fields__} for point in pair.balance
        ],
        "findings": [_finding(finding) for finding in pair.findings],
        "unjudged": [{"rule": rule.rule, "missing": rule.missing} for rule in pair.unjudged],
        "missing": list(pair.missing),
        "assumed": list(pair.assumed),
        "quasi_static_hz": _number(pair.quasi_static_hz),
    }


def _finding(finding: Finding) -> dict[str, Any]:
    return {
        "rule": finding.rule,
        "severity": finding.severity,
        "waived": finding.waived,
        "fingerprint": finding.fingerprint,
        "measured": _number(finding.measured),
        "limit": _number(finding.limit),
        "unit": finding.unit,
        "message": finding.message,
        "at": [{"layer": at.layer, "x_mm": _number(at.x_mm), "y_mm": _number(at.y_mm)} for at in finding.at],
        "advice": finding.advice,
        "source": finding.source,
        **({"baseline": finding.baseline} if finding.baseline else {}),
    }


def _waiver(waiver: WaiverState) -> dict[str, Any]:
    return {key: getattr(waiver, key) for key in WaiverState.__dataclass_fields__}


def _number(value: float | None) -> float | int | None:
    """Nine decimals are far below anything measured and hide what the order of a sum leaves; −0 is 0."""
    if value is None or isinstance(value, int):
        return value
    return round(float(value), 9) + 0.0


REPORT = Report(
    name="json",
    summary="the whole result, for other programs",
    commands=("check", "measure"),
    render=render,
    join=join,
)
