"""A comparison as JSON, version 1."""

from __future__ import annotations

import json
from typing import Any

from pairrules.comparison.compare import Comparison, FigureChange, PairChange
from pairrules.comparison.findings_matched import FindingChange
from pairrules.result import BoardSummary, Finding

COMPARISON_VERSION = 1


def as_json(comparison: Comparison) -> str:
    """One object; unknown figures are `null`."""
    plain = {
        "pairrules_comparison": COMPARISON_VERSION,
        "old": _board(comparison.old),
        "new": _board(comparison.new),
        "worse": comparison.worse,
        "pairs": [_pair(pair) for pair in comparison.pairs],
        "summary": comparison.summary,
    }
    return json.dumps(plain, indent=2, allow_nan=False) + "\n"


def _board(board: BoardSummary) -> dict[str, Any]:
    return {"file": board.file, "sha256": board.sha256, "name": board.name}


def _pair(pair: PairChange) -> dict[str, Any]:
    return {
        "name": pair.name or None,
        "old_name": pair.old_name or None,
        "matched_by": pair.matched_by or None,
        "change": pair.change,
        "worse": pair.worse,
        "old_verdict": pair.old_verdict or None,
        "new_verdict": pair.new_verdict or None,
        "findings": [_finding(one) for one in pair.findings],
        "figures": [_figure(one) for one in pair.figures],
        "notes": [{"change": change, "message": message} for change, message in pair.notes],
    }


def _finding(one: FindingChange) -> dict[str, Any]:
    told = one.new or one.old
    assert told is not None
    return {
        "rule": told.rule,
        "change": one.change,
        "why": one.why,
        "severity": told.severity,
        "waived": told.waived,
        "unit": told.unit,
        "limit": _number(told.limit),
        "old_measured": _measured(one.old),
        "new_measured": _measured(one.new),
        "message": told.message,
        "at": [{"layer": at.layer, "x_mm": _number(at.x_mm), "y_mm": _number(at.y_mm)} for at in told.at],
    }


def _figure(one: FigureChange) -> dict[str, Any]:
    return {
        "figure": one.figure,
        "frequency_hz": _number(one.frequency_hz),
        "change": one.change,
        "old": _number(one.old),
        "new": _number(one.new),
    }


def _measured(finding: Finding | None) -> float | None:
    return None if finding is None else _number(finding.measured)


def _number(value: float | None) -> float | None:
    if value is None or isinstance(value, int):
        return value
    return round(float(value), 9) + 0.0
