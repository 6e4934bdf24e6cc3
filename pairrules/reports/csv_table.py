"""The result as a table for spreadsheets: one row a pair, comma separated, units in the headings."""

from __future__ import annotations

import csv
import io

from pairrules.reports.report import Look, Report
from pairrules.reports.safe_text import safe
from pairrules.result import SEVERITIES, Measures, PairResult, Result

_ABOUT = ("board", "pair", "plus", "minus", "class", "found by", "source", "load", "routed", "verdict")
_UNITS = ("mm2", "mm", "ps", "ohm", "pf", "nh")
_UNIT_NAMES = {"pf": "pF", "nh": "nH"}


def render(result: Result, look: Look) -> str:
    """A heading and one row a pair; empty where a figure is unknown. Source: RFC 4180, with plain line feeds."""
    del look
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    counts = [f"{severity} findings" for severity in SEVERITIES]
    writer.writerow(
        [*_ABOUT, *(_heading(key) for key in Measures.__dataclass_fields__), *counts, "findings", "missing"]
    )
    for pair in result.pairs:
        writer.writerow(_row(result, pair))
    return out.getvalue()


def join(texts: tuple[str, ...]) -> str:
    """One heading, then the rows of every board."""
    head = texts[0].split("\n", 1)[0]
    return head + "\n" + "".join(text.split("\n", 1)[1] for text in texts)


def _row(result: Result, pair: PairResult) -> list[str]:
    about = (
        result.board.file,
        pair.name,
        pair.plus,
        pair.minus,
        pair.klass or "",
        pair.found_by,
        pair.source,
        pair.load,
        pair.routed,
        pair.verdict,
    )
    figures = [_figure(getattr(pair.measures, key)) for key in Measures.__dataclass_fields__]
    standing = [finding for finding in pair.findings if not finding.waived]
    counts = [str(sum(finding.severity == severity for finding in standing)) for severity in SEVERITIES]
    findings = "; ".join(f"{finding.rule}: {finding.message}" for finding in pair.findings)
    missing = "; ".join(dict.fromkeys((*(rule.missing for rule in pair.unjudged), *pair.missing)))
    return [*(_text(cell) for cell in about), *figures, *counts, _text(findings), _text(missing)]


def _figure(value: float | None) -> str:
    if value is None:
        return ""
    return str(value) if isinstance(value, int) else f"{round(value, 9) + 0.0:.9g}"


def _text(cell: str) -> str:
    """A text cell that no spreadsheet takes for a formula: the apostrophe makes it text.

    Source: the leading characters that start a formula or end a cell, common practice, no source.
    """
    clean = safe(cell)
    return f"'{clean}" if cell.startswith(("=", "+", "-", "@", "\t", "\r")) else clean


def _heading(key: str) -> str:
    name, _, unit = key.rpartition("_")
    if unit not in _UNITS:
        return key.replace("_", " ")
    return f"{name.replace('_', ' ')} [{_UNIT_NAMES.get(unit, unit)}]"


REPORT = Report(
    name="csv", summary="one row a pair, for spreadsheets", commands=("check", "measure"), render=render, join=join
)
