"""The source turns too much of the common mode into signal.

What it judges
    `source_db` of the balance: the conversion that remains when all but the source network is made symmetric, at each
    frequency of the class.

Why it matters
    Unequal source resistances form unequal dividers with the load. However good the receiver, it cannot tell the
    difference that arises there from the signal.

Formula
    −20 log |V_plus − V_minus|/|V_c| [dB] ≥ least [dB] at each frequency, V_c the common e.m.f. behind both source
    impedances, V_plus and V_minus at the load. The least of all frequencies is told.

Source
    Ott, "Electromagnetic Compatibility Engineering", chapter 4 (from memory): ΔZs/Zc.

What to do
    Make the legs' source impedances equal, or raise the receiver's common-mode impedance.

Example
    350 and 351 ohm into 1 Mohm each: 1 ohm/1 Mohm, 120 dB; with least 130 dB flagged.
"""

from __future__ import annotations

from pairrules.checks.cause_balance import judge_cause
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the source's conversion with `least`."""
    return judge_cause(subject, limit, cause="source", none=False)


RULE = Rule(
    summary="the source is unbalanced", unit="dB", quantities={"least": "ratio"}, required=("least",), judge=judge
)
