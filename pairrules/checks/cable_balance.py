"""The cable turns too much of the common mode into signal.

What it judges
    `cable_db` of the balance: the conversion that remains when all but the cable is made symmetric, at each frequency
    of the class. A class that names no cable has none.

Why it matters
    Unequal capacitance of a pair's cores to earth and unequal resistance convert along the whole cable, often more than
    the board does.

Formula
    −20 log |V_plus − V_minus|/|V_c| [dB] ≥ least [dB] at each frequency, V_c the common e.m.f., V_plus and V_minus at
    the load. The least of all frequencies is told.

Source
    Unbalance of resistance and capacitance as IEC 61156-5 defines them (recalled, not re-read); conversion from the
    cable's chain matrix.

What to do
    Take a cable of less unbalance, a shorter one, or a lower source impedance.

Example
    100 m with 1.6 pF/m more on plus behind 50 ohm at 1 kHz: 2π f R ΔC = 5.0e-5, 86 dB; with least 90 dB flagged.
"""

from __future__ import annotations

from pairrules.checks.cause_balance import judge_cause
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the cable's conversion with `least`."""
    none = subject.klass is not None and subject.klass.cable is None
    return judge_cause(subject, limit, cause="cable", none=none)


RULE = Rule(
    summary="the cable is unbalanced", unit="dB", quantities={"least": "ratio"}, required=("least",), judge=judge
)
