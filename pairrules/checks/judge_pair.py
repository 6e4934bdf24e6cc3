"""All limits of a pair's class judged, and the verdict they add up to."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from pairrules.checks.fingerprint import copper_digest, fingerprint
from pairrules.checks.pin_lengths import NOTHING, PinExtra
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.timed_limit import in_own_unit
from pairrules.geometry.board_copper import BoardCopper
from pairrules.result import SEVERITIES, Finding, Unjudged
from pairrules.settings.limit import Limit


@dataclass(frozen=True, slots=True, kw_only=True)
class Judgement:
    """What the rules said of one pair.

    Parameters
    ----------
    findings: worst severity first, then by rule. unjudged: rules that could not judge.
    judged: names of the rules that did judge. limits: as they were judged, by rule; a time as the length it comes to.
    pins: what the pair's pins add, and the rules on length and delay count in.
    """

    findings: tuple[Finding, ...]
    unjudged: tuple[Unjudged, ...]
    judged: tuple[str, ...]
    limits: Mapping[str, Limit] = field(default_factory=dict)
    pins: PinExtra = NOTHING


def judge_pair(
    subject: Subject, limits: Mapping[str, Limit], rules: Mapping[str, Rule], copper: BoardCopper | None = None
) -> Judgement:
    """Every rule that has a limit, in the order of their names. `copper`: the board's, where it is at hand."""
    findings: list[Finding] = []
    unjudged: list[Unjudged] = []
    judged: list[str] = []
    applied = dict(limits)
    for name in sorted(limits):
        limit = in_own_unit(subject, limits[name], rules[name])
        if isinstance(limit, Undecided):
            unjudged.append(Unjudged(rule=name, missing=limit.missing))
            continue
        applied[name] = limit
        answer = rules[name].judge(subject, limit)
        if isinstance(answer, Undecided):
            unjudged.append(Unjudged(rule=name, missing=answer.missing))
        else:
            judged.append(name)
            findings.extend(answer)
    if findings:
        digest = copper_digest(subject, copper or BoardCopper(subject.board, subject.reference))
        findings = [replace(finding, fingerprint=fingerprint(finding.rule, subject, digest)) for finding in findings]
    findings.sort(key=lambda finding: SEVERITIES.index(finding.severity))
    return Judgement(
        findings=tuple(findings), unjudged=tuple(unjudged), judged=tuple(judged), limits=applied, pins=subject.pins
    )


def verdict(judgement: Judgement, routed: str, *, whole: bool = True) -> str:
    """What the judgement adds up to.

    "flag" where an unwaived finding stands; else "undecided" where a rule could not judge, none did, a leg is broken,
    or what was judged may not be the whole pair; else "waived" where findings stand that are all waived; else "pass".
    """
    if any(not finding.waived for finding in judgement.findings):
        return "flag"
    if judgement.unjudged or not judgement.judged or routed != "complete" or not whole:
        return "undecided"
    return "waived" if judgement.findings else "pass"
