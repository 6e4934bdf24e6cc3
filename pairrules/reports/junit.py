"""The result as test cases in the XML that build servers read: one suite a board, one case a pair.

Source: the dialect's elements and attributes most servers accept, common practice; there is no standard.
"""

from __future__ import annotations

from xml.etree import ElementTree as ET

from pairrules.reports.report import Look, Report
from pairrules.reports.safe_text import safe
from pairrules.result import Finding, PairResult, Result

BASELINES = {"unchanged": "stood before; ", "worse": "worse than before; ", "new": "new; "}
_COUNTS = ("tests", "failures", "errors", "skipped")


def render(result: Result, look: Look) -> str:
    """A flagged pair is a failure; an undecided or waived one is skipped, with the reason; the rest have passed."""
    del look
    board = safe(result.board.file)
    suite = ET.Element("testsuite", name=board)
    for pair in result.pairs:
        case = ET.SubElement(suite, "testcase", classname=board, name=safe(pair.name))
        if pair.verdict == "flag":
            _failure(case, pair)
        elif pair.verdict in {"undecided", "waived"}:
            ET.SubElement(case, "skipped", message=_skipped(result, pair))
    lacking = [safe(text) for text in result.board.missing]
    if result.unpaired:
        names = ", ".join(safe(net) for net in result.unpaired)
        lacking.append(f"named like half a pair, the other half is missing: {names}")
    lacking += [
        f"waiver of {safe(one.rule)} for {safe(one.pair)}: {safe(one.why)}"
        for one in result.waivers
        if one.state != "held"
    ]
    if lacking:
        ET.SubElement(suite, "system-out").text = "\n".join(lacking)
    return _document([suite])


def join(texts: tuple[str, ...]) -> str:
    """All suites in one document, in the order given."""
    # Only documents of our own making are read here.
    return _document([suite for text in texts for suite in ET.fromstring(text)])


def unreadable(file: str, why: str, version: str) -> str:
    """A suite with one case that is an error."""
    del version
    suite = ET.Element("testsuite", name=safe(file))
    case = ET.SubElement(suite, "testcase", classname=safe(file), name="board file")
    ET.SubElement(case, "error", message=safe(why), type="unreadable").text = safe(why)
    return _document([suite])


def _document(suites: list[ET.Element]) -> str:
    whole = ET.Element("testsuites", name="pairrules")
    for suite in suites:
        cases = suite.findall("testcase")
        counts = (
            len(cases),
            *(sum(case.find(tag) is not None for case in cases) for tag in ("failure", "error", "skipped")),
        )
        for key, count in zip(_COUNTS, counts, strict=True):
            suite.set(key, str(count))
        whole.append(suite)
    for key in _COUNTS:
        whole.set(key, str(sum(int(suite.get(key, "0")) for suite in suites)))
    ET.indent(whole)
    return f'<?xml version="1.0" encoding="UTF-8"?>\n{ET.tostring(whole, encoding="unicode")}\n'


def _failure(case: ET.Element, pair: PairResult) -> None:
    standing = [finding for finding in pair.findings if not finding.waived]
    first = standing[0]
    more = f" (and {len(standing) - 1} more)" if len(standing) > 1 else ""
    failure = ET.SubElement(case, "failure", message=f"{first.rule}: {safe(first.message)}{more}", type=first.severity)
    lines = [line for finding in standing for line in _lines(finding)]
    lines += [f"undecided {one.rule}: {safe(one.missing)}" for one in pair.unjudged]
    failure.text = "\n".join(lines)


def _lines(finding: Finding) -> list[str]:
    before = BASELINES.get(finding.baseline, "")
    lines = [f"{finding.severity} {finding.rule}: {before}{safe(finding.message)}"]
    lines += [f"  at {safe(at.layer)} ({at.x_mm:.3f}, {at.y_mm:.3f}) mm" for at in finding.at]
    if finding.advice:
        lines.append(f"  to do: {safe(finding.advice)}")
    if finding.source:
        lines.append(f"  limit from: {safe(finding.source)}")
    return lines


def _skipped(result: Result, pair: PairResult) -> str:
    if pair.verdict == "waived":
        given = {one.rule: one.reason for one in result.waivers if one.state == "held" and one.pair == pair.name}
        told = [
            f"{finding.rule}: {safe(finding.message)}"
            + (f" ({safe(given[finding.rule])})" if finding.rule in given else "")
            for finding in pair.findings
        ]
        return "waived: " + "; ".join(told)
    reasons = [f"{one.rule}: {safe(one.missing)}" for one in pair.unjudged] or [safe(text) for text in pair.missing]
    return "undecided: " + ("; ".join(reasons) or "no rule judged it")


REPORT = Report(
    name="junit",
    summary="JUnit XML, one case a pair, for build servers",
    commands=("check",),
    render=render,
    join=join,
    unreadable=unreadable,
)
