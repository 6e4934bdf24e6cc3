"""A swinging neighbour couples too much into the pair.

What it judges
    The greatest differential voltage that a neighbour named by the class (`pickup`, `aggressors`) couples into the legs
    through its unequal capacitances to them.

Why it matters
    A neighbour beside one leg reaches that leg more than the other; the difference is signal.

Formula
    For small RC: V = ΔC R dV/dt [V] ≤ most [V], ΔC the difference of the neighbour's capacitances to the legs, R what a
    leg has to reference; in general the ramp response of both legs' RC high-pass.

Source
    Ott, "Electromagnetic Compatibility Engineering", chapter 2 (from memory).

What to do
    Move the neighbour away, or past both legs alike; lead grounded copper between.

Example
    0.05 pF more to plus, 50 ohm, 3.3 V in 1 ns: 8.25 mV; most 5 mV, flagged.
"""

from __future__ import annotations

from pairrules.checks.electrical_figures import figures, lacking
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import amounts, place, spot
from pairrules.result import Finding, Place
from pairrules.settings.limit import Limit

_MILLIVOLT = 1e3
_SAME = 1e-9
"""Relative: a voltage this near its limit meets it."""


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the coupled voltage with `most`."""
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    voltage, most = electrical.electric_v, limit.quantities["most"]
    if voltage is None:
        return lacking(electrical, "electric", "the pair's class names no neighbour that swings")
    if voltage <= most * (1 + _SAME):
        return ()
    measured, allowed = amounts(voltage * _MILLIVOLT, most * _MILLIVOLT, "mV")
    name = electrical.aggressor or "a neighbour"
    at = _beside(subject, electrical.aggressor)
    along = f", above all from {spot(subject.board, at[0])} to {spot(subject.board, at[1])}" if at else ""
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=voltage * _MILLIVOLT,
            limit=most * _MILLIVOLT,
            unit="mV",
            message=f"{name} couples {measured} between the legs; {allowed} is allowed",
            advice=f"lead {name} farther from the pair, or past both legs alike{along}",
            at=at,
            source=limit.source,
        ),
    )


def _beside(subject: Subject, net: str) -> tuple[Place, ...]:
    """Ends of the longest section that has the net beside it; none where no section has."""
    electrical, board = subject.electrical, subject.board
    if electrical is None or net not in board.nets:
        return ()
    index = board.nets.index(net)
    beside = [one for one in electrical.sections if index in one.neighbours]
    if not beside:
        return ()
    longest = max(beside, key=lambda one: max(one.plus_mm[1] - one.plus_mm[0], one.minus_mm[1] - one.minus_mm[0]))
    return tuple(place(board, longest.layer, *xy) for xy in (longest.start, longest.end))


RULE = Rule(
    summary="a neighbour couples too much",
    unit="mV",
    quantities={"most": "voltage"},
    required=("most",),
    judge=judge,
    models=("electric-pickup",),
)
