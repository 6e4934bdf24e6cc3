"""The result in the Static Analysis Results Interchange Format, for servers that show findings beside a change.

Source: OASIS, Static Analysis Results Interchange Format (SARIF) Version 2.1.0, 2020. Sections are named where obeyed.
"""

from __future__ import annotations

import json
from typing import Any

from pairrules.reports.file_uri import file_uri
from pairrules.reports.report import Look, Report
from pairrules.reports.safe_text import safe
from pairrules.result import Finding, PairResult, Result, RuleInfo, Unjudged

SCHEMA = "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json"
LEVELS = {"blocker": "error", "review": "warning", "note": "note"}
NO_RULE = "undecided-pair"
"""Stands for a pair that no rule was asked about: a result without a rule's id would be none that servers keep."""

BASELINES = {"new": "new", "worse": "updated", "unchanged": "unchanged"}
_FINGERPRINT = "pairrulesFinding/v1"


def render(result: Result, look: Look) -> str:
    """One log with one run: every finding, and every rule that could not judge as a result of kind "open"."""
    del look
    return _log([_run(result)])


def join(texts: tuple[str, ...]) -> str:
    """One log with a run for each board, in the order given."""
    return _log([run for text in texts for run in json.loads(text)["runs"]])


def unreadable(file: str, why: str, version: str) -> str:
    """A log whose run did not come about, with the reason."""
    notification = {"level": "error", "message": {"text": _text(why)}, "locations": [_file(file)]}
    return _log(
        [
            {
                "tool": {"driver": {"name": "pairrules", "version": version}},
                "invocations": [{"executionSuccessful": False, "toolExecutionNotifications": [notification]}],
            }
        ]
    )


def _log(runs: list[dict[str, Any]]) -> str:
    return json.dumps({"$schema": SCHEMA, "version": "2.1.0", "runs": runs}, indent=2, allow_nan=False) + "\n"


def _run(result: Result) -> dict[str, Any]:
    board = result.board
    infos = {info.name: info for info in result.rules}
    used = {f.rule for pair in result.pairs for f in pair.findings} | {
        u.rule for pair in result.pairs for u in _open(pair)
    }
    rules = sorted(infos.keys() | used)
    index = {name: place for place, name in enumerate(rules)}
    results = [
        one
        for pair in result.pairs
        for one in (
            *(_finding(result, pair, finding, index) for finding in pair.findings),
            *(_undecided(result, pair, unjudged, index) for unjudged in _open(pair)),
        )
    ]
    return {
        "tool": {
            "driver": {
                "name": "pairrules",
                "version": result.version,
                "rules": [_rule(name, infos.get(name)) for name in rules],
            }
        },
        "invocations": [{"executionSuccessful": True, "toolExecutionNotifications": _notifications(result)}],
        "artifacts": [
            {
                "location": {"uri": file_uri(board.file)},
                "roles": ["analysisTarget"],
                "hashes": {"sha-256": board.sha256},
            }
        ],
        "results": results,
        "properties": {"format": safe(board.format), "units": safe(board.units), "summary": result.summary},
    }


def _rule(name: str, info: RuleInfo | None) -> dict[str, Any]:
    if info is None:
        summary = "no rule judged the pair" if name == NO_RULE else name
        return {"id": name, "shortDescription": {"text": _text(summary)}}
    parts = dict(info.help)
    described = parts.get("What it judges", "")
    rule: dict[str, Any] = {"id": name, "shortDescription": {"text": _text(info.summary)}}
    if described:
        rule["fullDescription"] = {"text": _text(described)}
    if info.help:
        rule["help"] = {"text": "\n\n".join(f"{title}\n{_text(text)}" for title, text in info.help)}
    if info.unit:
        rule["properties"] = {"unit": info.unit}
    return rule


def _finding(result: Result, pair: PairResult, finding: Finding, index: dict[str, int]) -> dict[str, Any]:
    advice = f"\nTo do: {_text(finding.advice)}" if finding.advice else ""
    plain = {
        "ruleId": finding.rule,
        "ruleIndex": index[finding.rule],
        "kind": "fail",
        "level": LEVELS[finding.severity],
        "message": {"text": f"{_text(pair.name)}: {_text(finding.message)}{advice}"},
        **_locations(result, pair),
        # Section 3.27.23: where any result tells of suppressions, all do; empty means that nothing suppresses it.
        "suppressions": [_suppression(result, pair, finding)] if finding.waived else [],
        "properties": {
            "measured": _number(finding.measured),
            "limit": _number(finding.limit),
            "unit": finding.unit,
            "limitSource": safe(finding.source),
            "places": [
                {"layer": safe(at.layer), "x_mm": _number(at.x_mm), "y_mm": _number(at.y_mm)} for at in finding.at
            ],
        },
    }
    if finding.fingerprint:
        plain["partialFingerprints"] = {_FINGERPRINT: finding.fingerprint}
    if finding.baseline:
        plain["baselineState"] = BASELINES[finding.baseline]
    return plain


def _suppression(result: Result, pair: PairResult, finding: Finding) -> dict[str, Any]:
    """The waiver. SARIF knows no day on which a suppression ends, so that it stands among the properties."""
    plain: dict[str, Any] = {"kind": "external", "status": "accepted"}
    for waiver in result.waivers:
        if waiver.state == "held" and (waiver.rule, waiver.pair) == (finding.rule, pair.name):
            plain["justification"] = safe(waiver.reason)
            plain["properties"] = {"who": safe(waiver.who), "until": waiver.until}
    return plain


def _undecided(result: Result, pair: PairResult, unjudged: Unjudged, index: dict[str, int]) -> dict[str, Any]:
    return {
        "ruleId": unjudged.rule,
        "ruleIndex": index[unjudged.rule],
        # Section 3.27.10: with a kind other than "fail" the level is "none".
        "kind": "open",
        "level": "none",
        "message": {"text": f"{_text(pair.name)}: undecided, {_text(unjudged.missing)}"},
        **_locations(result, pair),
        "suppressions": [],
    }


def _open(pair: PairResult) -> tuple[Unjudged, ...]:
    """What could not be judged; of a pair that no rule was asked about, why."""
    if pair.unjudged or pair.verdict != "undecided":
        return pair.unjudged
    return (Unjudged(rule=NO_RULE, missing="; ".join(pair.missing) or "no rule judged it"),)


def _locations(result: Result, pair: PairResult) -> dict[str, Any]:
    """Where plus's copper stands in the file, and, as a related place, where minus's does."""
    file = result.board.file
    first, second = pair.line_plus, pair.line_minus
    name, plus, minus = safe(pair.name), safe(pair.plus), safe(pair.minus)
    logical = [
        {"name": name, "fullyQualifiedName": name, "kind": "pair"},
        *({"name": net, "fullyQualifiedName": f"{name}/{net}", "kind": "net"} for net in (plus, minus)),
    ]
    found: dict[str, Any] = {"locations": [_file(file, first or second) | {"logicalLocations": logical}]}
    if first and second:
        related = _file(file, second) | {"id": 1, "message": {"text": f"copper of {_text(pair.minus)}"}}
        found["relatedLocations"] = [related]
    return found


def _file(file: str, line: int = 0) -> dict[str, Any]:
    physical: dict[str, Any] = {"artifactLocation": {"uri": file_uri(file)}}
    if line > 0:
        physical["region"] = {"startLine": line}
    return {"physicalLocation": physical}


def _notifications(result: Result) -> list[dict[str, Any]]:
    """What the file lacked, pair by pair too, nets that look like half a pair, and waivers that do not hold."""
    texts = [*(_text(one) for one in result.board.missing)]
    if result.unpaired:
        names = ", ".join(_text(net) for net in result.unpaired)
        texts.append(f"named like half a pair, the other half is missing: {names}")
    texts += [f"{_text(pair.name)}: {_text(one)}" for pair in result.pairs for one in pair.missing]
    lapsed = [
        f"waiver of {_text(one.rule)} for {_text(one.pair)}: {_text(one.why)}"
        for one in result.waivers
        if one.state != "held"
    ]
    return [
        {"level": level, "message": {"text": text}}
        for level, all_of in (("warning", lapsed), ("note", texts))
        for text in dict.fromkeys(all_of)
    ]


def _text(text: str) -> str:
    """Text of a message: nothing hidden, no link, no placeholder.

    Section 3.11.5: a literal brace is doubled. Section 3.11.6: "[…](…)" would be a link; a space parts the two.
    """
    return safe(text).replace("](", "] (").replace("{", "{{").replace("}", "}}")


def _number(value: float | None) -> float | int | None:
    if value is None or isinstance(value, int):
        return value
    return round(float(value), 9) + 0.0


REPORT = Report(
    name="sarif",
    summary="SARIF 2.1.0, for servers that show findings beside a change",
    commands=("check",),
    render=render,
    join=join,
    unreadable=unreadable,
)
