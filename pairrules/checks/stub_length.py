"""A stub branches off a leg.

What it judges
    Each connected branch of track that leaves a leg's route and does not carry it on: its total length.

Why it matters
    An open branch reflects, and loads the one leg that has it with capacitance the other does not have.

Formula
    length of each stub [mm] ≤ most [mm]; most said as a time, or a share of one, is that time over the pair's delay per
    length. The unused part of a via's barrel is none of it.

Source
    Common practice, no source (trade: below a tenth of the rise time times the velocity).

What to do
    Remove the stub, or lead the route through the pad at its end.

Example
    A test pad 3.0 mm off plus's route, most 1.0 mm: 3.00 mm > 1.00 mm, flagged.
"""

from __future__ import annotations

from pairrules.checks.routed_legs import legs, unrouted
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts, place, spot
from pairrules.geometry.pair_geometry import LegRoute
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """One finding for each leg with a stub longer than `most`; a broken leg leaves a clean other one undecided."""
    known = legs(subject)
    findings = tuple(finding for name, leg in known for finding in _judge_leg(subject, limit, name, leg))
    if not findings and len(known) < 2:
        return unrouted(subject)
    return findings


def _judge_leg(subject: Subject, limit: Limit, name: str, leg: LegRoute) -> tuple[Finding, ...]:
    most = limit.quantities["most"]
    stubs = [stub for stub in leg.stubs if stub.length_mm > most + TOLERANCE]
    if not stubs:
        return ()
    at = tuple(place(subject.board, stub.layer, stub.x_mm, stub.y_mm) for stub in stubs)
    measured, allowed = amounts(stubs[0].length_mm, most, "mm")
    count = "a stub" if len(stubs) == 1 else f"{len(stubs)} stubs, the longest"
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=stubs[0].length_mm,
            limit=most,
            unit="mm",
            message=f"{name} has {count} of {measured}; {allowed} is allowed",
            advice=f"remove the branch that leaves {name} at {spot(subject.board, at[0])}, "
            "or lead the route through its end",
            at=at,
            source=limit.source,
        ),
    )


RULE = Rule(
    summary="a stub branches off a leg",
    unit="mm",
    quantities={"most": "length"},
    required=("most",),
    judge=judge,
    timed=("most",),
    models=("routes",),
)
