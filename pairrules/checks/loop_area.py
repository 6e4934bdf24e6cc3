"""The legs enclose too much area.

What it judges
    `loop_area_mm2`: the area between the two centre lines seen from above, lobe by lobe without sign.

Why it matters
    A magnetic field through the area induces a differential voltage 2π f B A: one that no balance of the receiver
    removes, since it is differential from the start.

Formula
    loop_area_mm2 [mm²] ≤ most [mm²], or ≤ width [mm] × (coupled_mm + apart_mm) [mm], the pair's length; where both
    are given both hold.

Source
    Pickup V = ω B A cos θ: H. W. Ott, Electromagnetic Compatibility Engineering (2009), chapter 2, from memory. The
    amount allowed follows from the field and the signal of the class: it stands in the rule set.

What to do
    Bring the legs closer where they stand widest apart, first at the ends and around parts in series.

Example
    14.4 mm², most 10 mm²: flagged. In 3 A/m at 50 Hz (3.77 µT) 14.4 mm² pick up 0.017 µV.
"""

from __future__ import annotations

import math

from pairrules.checks.routed_legs import unrouted
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.stretches import alone
from pairrules.checks.wording import TOLERANCE, amounts, spot
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the area with `most` and with `width` times the pair's length."""
    geometry, given = subject.geometry, limit.quantities
    if geometry.loop_area_mm2 is None:
        return unrouted(subject)
    allowed_mm2 = given.get("most", math.inf)
    if "width" in given:
        if geometry.coupled_mm is None or geometry.apart_mm is None:
            return unrouted(subject)
        allowed_mm2 = min(allowed_mm2, given["width"] * (geometry.coupled_mm + geometry.apart_mm))
    if geometry.loop_area_mm2 <= allowed_mm2 + TOLERANCE:
        return ()
    measured, allowed = amounts(geometry.loop_area_mm2, allowed_mm2, "mm²")
    profile = geometry.profile_plus
    widest = alone(subject.board, profile)[:1] if profile is not None else ()
    advice = "bring the legs closer together where they stand widest apart"
    if widest:
        advice += f": {spot(subject.board, widest[0].first)} to {spot(subject.board, widest[0].last)}"
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=geometry.loop_area_mm2,
            limit=allowed_mm2,
            unit="mm2",
            message=f"the legs enclose {measured}; {allowed} is allowed",
            advice=advice,
            at=tuple(place for stretch in widest for place in (stretch.first, stretch.last)),
            source=limit.source,
        ),
    )


RULE = Rule(
    summary="the legs enclose too much area",
    unit="mm2",
    quantities={"most": "area", "width": "length"},
    required=("most", "width"),
    judge=judge,
)
