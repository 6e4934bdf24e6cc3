"""Which finding of a pair stood before, and whether it is worse than it was."""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from dataclasses import dataclass

from pairrules.comparison.rounding import WITHIN_REACH, step
from pairrules.result import SEVERITIES, Finding


@dataclass(frozen=True, slots=True, kw_only=True)
class FindingChange:
    """One finding then and now.

    Parameters
    ----------
    change: "appeared", "worse", "better", "same", "waived" (it was not before) or "vanished".
    why: what makes it so, where the figures do not.
    old, new: `None` where there was or is none.
    """

    change: str
    old: Finding | None
    new: Finding | None
    why: str = ""


def findings_matched(old: Sequence[Finding], new: Sequence[Finding]) -> tuple[FindingChange, ...]:
    """Every new finding in its order, then old ones that are gone.

    Findings of one rule on the same side of its limit are held against each other worst to worst, since places move.
    A waived finding counts for nothing; one that was waived and stands now appears anew.
    """
    before: dict[Hashable, list[Finding]] = {}
    for finding in sorted(old, key=_badness, reverse=True):
        before.setdefault(_kind(finding), []).append(finding)
    answers: dict[int, FindingChange] = {}
    for place in sorted(range(len(new)), key=lambda i: _badness(new[i]), reverse=True):
        others = before.get(_kind(new[place]), [])
        answers[place] = _change(others.pop(0) if others else None, new[place])
    left = {id(finding) for findings in before.values() for finding in findings}
    gone = [FindingChange(change="vanished", old=one, new=None) for one in old if id(one) in left]
    return (*(answers[place] for place in range(len(new))), *gone)


def _change(old: Finding | None, new: Finding) -> FindingChange:
    if old is None:
        return FindingChange(change="appeared", old=None, new=new)
    if new.waived:
        return FindingChange(change="same" if old.waived else "waived", old=old, new=new)
    if old.waived:
        return FindingChange(change="appeared", old=old, new=new, why="was waived before")
    unit = "mm within reach" if new.rule in WITHIN_REACH else new.unit
    more = step(_value(old), _value(new), unit) * (-1 if _side(new) == "least" else 1)
    rank = SEVERITIES.index(old.severity) - SEVERITIES.index(new.severity)
    if more > 0:
        return FindingChange(change="worse", old=old, new=new)
    if rank > 0:
        return FindingChange(change="worse", old=old, new=new, why=f"was a {old.severity} before")
    return FindingChange(change="better" if more < 0 or rank < 0 else "same", old=old, new=new)


def _kind(finding: Finding) -> Hashable:
    return finding.rule, finding.unit, _side(finding)


def _side(finding: Finding) -> str:
    """Which bound of the limit is broken: "most", "least", or "" where no numbers are compared."""
    if finding.measured is None or finding.limit is None:
        return ""
    return "most" if _value(finding) >= finding.limit else "least"


def _value(finding: Finding) -> float:
    """What is compared with the limit: a difference without its sign, a ratio with it; 0 where there is none."""
    if finding.measured is None:
        return 0.0
    signed = finding.unit == "dB" or (finding.limit or 0.0) < 0
    return finding.measured if signed else abs(finding.measured)


def _badness(finding: Finding) -> float:
    return -_value(finding) if _side(finding) == "least" else _value(finding)
