"""The legs run apart for too long.

What it judges
    `apart_mm`: the greater of the two legs' track lengths along which the other leg does not run beside it (same
    layer, within reach, turned less than 30 degrees). The class's `breakout` at each end of each leg is
    left out, and what lies in it told apart.

Why it matters
    Where the legs run apart they enclose a loop that a magnetic field drives, each sees its own neighbours, and the
    pair's impedance is another one.

Formula
    apart_mm [mm] ≤ most [mm], and apart_mm ≤ share × track length of that leg [mm]; where both are given both hold.

Source
    Common practice, no source.

What to do
    Lead the legs side by side on the stretches named; where they must part around a pad or via, let both part alike.

Example
    Legs of 41.2 mm track, apart over 3.2 mm, most 2.0 mm: 3.20 mm > 2.00 mm, flagged.
"""

from __future__ import annotations

import math

from pairrules.checks.routed_legs import both_legs, unrouted
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.stretches import alone, in_breakout
from pairrules.checks.wording import TOLERANCE, amounts, spot
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the leg that runs alone for longer with `most` and with its `share` of that leg's track."""
    geometry, given = subject.geometry, limit.quantities
    found = both_legs(subject)
    if isinstance(found, Undecided):
        return found
    if geometry.apart_mm is None or geometry.profile_plus is None or geometry.profile_minus is None:
        return unrouted(subject)
    plus, minus = found
    on_plus, on_minus = (
        alone(subject.board, profile, breakout_mm=subject.breakout_mm)
        for profile in (geometry.profile_plus, geometry.profile_minus)
    )
    plus_mm, minus_mm = (math.fsum(stretch.length_mm for stretch in stretches) for stretches in (on_plus, on_minus))
    # Legs that part alike differ by rounding only: plus is told, wherever the board lies.
    if plus_mm >= minus_mm - TOLERANCE:
        name, leg, profile, stretches, apart_mm = "plus", plus, geometry.profile_plus, on_plus, plus_mm
    else:
        name, leg, profile, stretches, apart_mm = "minus", minus, geometry.profile_minus, on_minus, minus_mm
    allowed_mm = min(given.get("most", math.inf), given.get("share", math.inf) * leg.track_mm)
    if apart_mm <= allowed_mm + TOLERANCE:
        return ()
    measured, allowed = amounts(apart_mm, allowed_mm, "mm")
    left_out = in_breakout(alone(subject.board, profile), stretches, subject.breakout_mm)
    spots = [f"{spot(subject.board, s.first)} to {spot(subject.board, s.last)}" for s in stretches[:3]]
    rest = f" and {len(stretches) - 3} more" if len(stretches) > 3 else ""
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=apart_mm,
            limit=allowed_mm,
            unit="mm",
            message=f"{name} runs {measured} without the other leg beside it; {allowed} is allowed{left_out}",
            advice=f"lead the legs side by side from {'; from '.join(spots)}{rest}"
            if spots
            else "lead the legs side by side",
            at=tuple(place for stretch in stretches for place in (stretch.first, stretch.last)),
            source=limit.source,
        ),
    )


RULE = Rule(
    summary="the legs run apart",
    unit="mm",
    quantities={"most": "length", "share": "share"},
    required=("most", "share"),
    judge=judge,
)
