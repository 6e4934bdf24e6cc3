"""Which findings are waived: those whose waiver names rule and pair, is not past its end, and is of this copper."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace
from datetime import date

from pairrules.checks.fingerprint import VERSION, same_copper, version_of
from pairrules.checks.judge_pair import Judgement
from pairrules.result import WaiverState
from pairrules.settings.waivers import Waiver


def waive(
    judgement: Judgement, waivers: Sequence[Waiver], today: date, *, name: str = ""
) -> tuple[Judgement, tuple[WaiverState, ...]]:
    """A pair's judgement with its waived findings marked, and what became of each of its waivers.

    Parameters
    ----------
    waivers: those that are of this pair. today: a waiver holds through its last day. name: of the pair.
    """
    findings = list(judgement.findings)
    states = []
    for waiver in waivers:
        own = [i for i, finding in enumerate(findings) if finding.rule == waiver.rule]
        state, why = _state(waiver, [findings[i].fingerprint for i in own], judgement, today)
        if state == "held":
            for i in own:
                findings[i] = replace(findings[i], waived=True)
        states.append(state_of(waiver, state, why, name=name))
    return replace(judgement, findings=tuple(findings)), tuple(states)


def left_over(waivers: Iterable[Waiver]) -> tuple[WaiverState, ...]:
    """The states of waivers that are of no pair of the board."""
    return tuple(state_of(one, "gone", "no pair has this name, or a net of this name") for one in waivers)


def state_of(waiver: Waiver, state: str, why: str, *, name: str = "") -> WaiverState:
    """A waiver's state as the result tells it. `name`: of the pair it is of, where one is."""
    return WaiverState(
        rule=waiver.rule,
        pair=name or " and ".join(waiver.pair),
        state=state,
        why=why,
        reason=waiver.reason,
        who=waiver.who,
        until=waiver.until.isoformat(),
        line=waiver.line,
        fingerprint=waiver.fingerprint,
    )


def _state(waiver: Waiver, marks: list[str], judgement: Judgement, today: date) -> tuple[str, str]:
    if not marks:
        missing = next((one.missing for one in judgement.unjudged if one.rule == waiver.rule), None)
        if missing is not None:
            return "undecided", f"the rule could not judge: {missing}"
        if waiver.rule in judgement.judged:
            return "gone", "the rule finds nothing any more; take the waiver out"
        return "gone", "no limit of this rule holds for the pair; take the waiver out"
    if today > waiver.until:
        return "expired", f"it held until {waiver.until.isoformat()}; mend the finding or waive it again"
    if all(same_copper(mark, waiver.fingerprint) for mark in marks):
        return "held", ""
    if version_of(waiver.fingerprint) != VERSION:
        return "changed", "its fingerprint was made by another version of pairrules; waive the finding again"
    return "changed", "the copper is not what it was given for; look again, then mend the finding or waive it again"
