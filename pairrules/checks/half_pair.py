"""One leg of the pair has no copper.

What it judges
    Whether exactly one leg has any track, via or filled copper on its nets, and the leg without is not complete by
    its pads alone.

Why it matters
    A signal with one leg is not balanced at all; usually a net was renamed or forgotten.

Formula
    none: copper on one leg and none on the other is flagged. Where the file is known to lack copper layers it is
    undecided.

Source
    Common practice, no source.

What to do
    Route the missing leg, or name the net that really is the other leg in the settings (`pairs`).

Example
    DATA_P has 32 tracks, DATA_N none: flagged.
"""

from __future__ import annotations

from pairrules.checks.routed_legs import has_copper, unrouted
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Look for a leg without copper beside one with."""
    geometry, link, board = subject.geometry, subject.link, subject.board
    if geometry.plus is not None and geometry.minus is not None:
        return ()
    copper = {"plus": has_copper(subject, link.hops_plus), "minus": has_copper(subject, link.hops_minus)}
    if all(copper.values()):
        return ()
    if not any(copper.values()):
        return unrouted(subject)
    has, lacks = sorted(copper, key=lambda name: not copper[name])
    lost = board.nets[link.plus if lacks == "plus" else link.minus]
    if (geometry.plus if lacks == "plus" else geometry.minus) is not None:
        return ()
    if not board.complete:
        return Undecided(missing=f"{lacks} ({lost}) has no copper in the file, which lacks copper layers it may run on")
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=None,
            limit=None,
            unit="",
            message=f"{lacks} ({lost}) has no copper, yet {has} is drawn",
            advice=f"route {lost}, or name the net that is the other leg under `pairs` in the settings",
            source=limit.source,
        ),
    )


RULE = Rule(
    summary="one leg has no copper",
    unit="",
    quantities={},
    required=(),
    judge=judge,
    models=("routes",),
)
