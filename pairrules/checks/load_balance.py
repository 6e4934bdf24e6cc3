"""The load turns too much of the common mode into signal.

What it judges
    `load_db` of the balance: the conversion that remains when all but the load network is made symmetric, at each
    frequency of the class. What the receiver does behind its inputs is not in it.

Why it matters
    Unequal input resistances or capacitances form unequal dividers with equal sources.

Formula
    −20 log |V_plus − V_minus|/|V_c| [dB] ≥ least [dB] at each frequency, V_c the common e.m.f., V_plus and V_minus at
    the load. The least of all frequencies is told.

Source
    Derived from Ott, "Electromagnetic Compatibility Engineering", chapter 4 (from memory): (Zs/Zc)(ΔZc/Zc).

What to do
    Give both inputs the same resistance and capacitance to reference, or more impedance.

Example
    175 ohm a leg into 1 Mohm apart by 1 %: 175 ppm of 1 %, 115 dB; with least 120 dB flagged.
"""

from __future__ import annotations

from pairrules.checks.cause_balance import judge_cause
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the load's conversion with `least`."""
    return judge_cause(subject, limit, cause="load", none=False)


RULE = Rule(
    summary="the load is unbalanced", unit="dB", quantities={"least": "ratio"}, required=("least",), judge=judge
)
