"""The tracks turn too much of the common mode into signal.

What it judges
    `trace_db` of the balance: the conversion that remains when all but the tracks and the parts in series with them is
    made symmetric, at each frequency of the class.

Why it matters
    Legs of unequal length, width, neighbours, reference cover or series parts answer the same common mode unequally.

Formula
    −20 log |V_plus − V_minus|/|V_c| [dB] ≥ least [dB] at each frequency, V_c the common e.m.f., V_plus and V_minus at
    the load. The least of all frequencies is told.

Source
    Chain matrices of a two-conductor line over reference: Paul, "Analysis of Multiconductor Transmission Lines" (from
    memory).

What to do
    Remove what makes the legs unlike: the greatest of the differences named, and the section named.

Example
    1 pF more from plus to reference behind 50 ohm at 10 MHz: 2π f R ΔC = 0.0031, 50 dB; with least 60 dB flagged.
"""

from __future__ import annotations

from pairrules.checks.cause_balance import judge_cause
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the tracks' conversion with `least`."""
    return judge_cause(subject, limit, cause="trace", none=False)


RULE = Rule(
    summary="the tracks are unbalanced", unit="dB", quantities={"least": "ratio"}, required=("least",), judge=judge
)
