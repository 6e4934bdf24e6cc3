"""The result for a change request's comment: a short table, the details folded away.

Source: GitHub Flavored Markdown's tables, common practice beyond it; `details` is HTML that servers let through.
"""

from __future__ import annotations

import re

from pairrules.board.coordinates import coordinates
from pairrules.reports.cautions import CAUTIONS
from pairrules.reports.report import Look, Report
from pairrules.reports.safe_text import safe
from pairrules.result import SEVERITIES, Finding, PairResult, Result

ROWS = 50
"""Pairs told of in the table; comments longer than some 65 000 characters are refused by servers."""
DETAILS = 20
_PLACES = 4
BASELINES = {"unchanged": "stood before; ", "worse": "worse than before; ", "new": "new; "}
_WORDS = (("flag", "flagged"), ("undecided", "undecided"), ("waived", "waived"), ("pass", "passed"))
_MARKED = re.compile(r"[&<>|`*_\[\]\\~!${}@#]|:(?=\S)")
_UNCALLED = {"@": "@&#8203;", "#": "&#35;&#8203;"}
_BARE_LINK = re.compile(r"(www)\.", re.IGNORECASE)
_CHANGE = re.compile(r"\b(?=[0-9a-f]*[a-f])(?=[0-9a-f]*[0-9])([0-9a-f]{6})([0-9a-f]{1,34})\b")
"""What servers take for the short name of a change."""


def render(result: Result, look: Look) -> str:
    """A heading with the counts; flagged and undecided pairs, worst first; the findings of each, folded."""
    del look
    told = sorted((pair for pair in result.pairs if pair.verdict in {"flag", "undecided"}), key=_worst_first)
    lines = [f"### Pairs of {_name(result.board.file)}", "", _counts(result)]
    if told:
        lines += ["", "| pair | verdict | worst | what |", "| --- | --- | --- | --- |"]
        lines += [_row(pair) for pair in told[:ROWS]]
        if len(told) > ROWS:
            lines += ["", f"and {len(told) - ROWS} more pairs, flagged or undecided"]
    flagged = [pair for pair in told if pair.verdict == "flag"]
    for pair in flagged[:DETAILS]:
        lines += ["", *_details(result, pair)]
    if len(flagged) > DETAILS:
        lines += ["", f"The details of {len(flagged) - DETAILS} more flagged pairs are left out."]
    lacking = [_text(text) for text in result.board.missing]
    if result.unpaired:
        names = ", ".join(_name(net) for net in result.unpaired[:ROWS])
        lacking.append(f"named like half a pair, the other half is missing: {names}")
    if lacking:
        lines += ["", "<details><summary>What the file lacks</summary>", "", *(f"- {text}" for text in lacking)]
        lines += ["", "</details>"]
    lapsed = [one for one in result.waivers if one.state != "held"]
    if lapsed:
        lines += ["", "Waivers that do not hold:", ""]
        lines += [f"- {_text(one.rule)} of {_name(one.pair)}: {_text(one.why)}" for one in lapsed]
    return "\n".join([*lines, "", f"<sub>{CAUTIONS}</sub>"]) + "\n"


def unreadable(file: str, why: str, version: str) -> str:
    """A heading and the reason."""
    del version
    return f"### Pairs of {_name(file)}\n\nThe board could not be read: {_text(why)}\n"


def _counts(result: Result) -> str:
    summary = result.summary
    counts = ", ".join(f"{summary[key]} {word}" for key, word in _WORDS if summary[key]) or "no pairs"
    return f"{summary['pairs']} pairs: {counts}" if summary["pairs"] else counts


def _worst_first(pair: PairResult) -> tuple[bool, int, int, str]:
    """Pairs whose findings all stood before come after the other flagged ones, undecided ones last."""
    standing = _standing(pair)
    ranks = [SEVERITIES.index(finding.severity) for finding in standing]
    stood = all(finding.baseline == "unchanged" for finding in standing)
    return (stood, min(ranks, default=len(SEVERITIES)), -len(ranks), pair.name)


def _standing(pair: PairResult) -> list[Finding]:
    return [finding for finding in pair.findings if not finding.waived]


def _row(pair: PairResult) -> str:
    standing = _standing(pair)
    if standing:
        more = f" (and {len(standing) - 1} more)" if len(standing) > 1 else ""
        what = f"{standing[0].rule}: {_message(standing[0])}{more}"
        return f"| {_name(pair.name)} | flagged | {standing[0].severity} | {what} |"
    reasons = dict.fromkeys((*(one.missing for one in pair.unjudged), *pair.missing))
    return f"| {_name(pair.name)} | undecided | | {_text(next(iter(reasons), 'no rule judged it'))} |"


def _details(result: Result, pair: PairResult) -> list[str]:
    klass = f", class {_name(pair.klass)}" if pair.klass else ""
    lines = [
        f"<details><summary>{_name(pair.name)}: {_name(pair.plus)} and {_name(pair.minus)}{klass}</summary>",
        "",
    ]
    for finding in _standing(pair):
        lines.append(f"- **{finding.severity}** {finding.rule}: {_message(finding)}")
        if finding.at:
            spots = [
                f"{_name(at.layer)} {_text(coordinates(at.x_mm, at.y_mm, result.board.units))}".strip()
                for at in finding.at[:_PLACES]
            ]
            more = f", and {len(finding.at) - _PLACES} more" if len(finding.at) > _PLACES else ""
            lines.append(f"  - at {', '.join(spots)}{more}")
        if finding.advice:
            lines.append(f"  - to do: {_text(finding.advice)}")
        if finding.source:
            lines.append(f"  - limit from: {_text(finding.source)}")
    lines += [f"- undecided {one.rule}: {_text(one.missing)}" for one in pair.unjudged]
    return [*lines, "", "</details>"]


def _message(finding: Finding) -> str:
    return BASELINES.get(finding.baseline, "") + _text(finding.message)


def _text(text: str) -> str:
    """Text in which nothing is markup, a link, a mention, or a reference to an issue or a change.

    Characters written as entities are never markup (CommonMark 0.31, section 2.5, from memory). Servers look for
    mentions in what has been rendered, so that an entity alone does not stop them: a space without width does.
    """
    marked = _MARKED.sub(lambda found: _UNCALLED.get(found[0]) or f"&#{ord(found[0])};", safe(text))
    return _BARE_LINK.sub(r"\1&#46;", _CHANGE.sub(r"\1&#8203;\2", marked))


def _name(name: str) -> str:
    """A name from the file as code: servers look for no mentions there, and it can be copied as it is."""
    if not name:
        return ""
    inside = re.sub(r"[^A-Za-z0-9 .,/-]", lambda found: f"&#{ord(found[0])};", safe(name))
    return "<code>" + _BARE_LINK.sub(r"\1&#46;", inside) + "</code>"


REPORT = Report(
    name="markdown",
    summary="a short table with folded details, for the comment on a change",
    commands=("check",),
    render=render,
    unreadable=unreadable,
)
