"""The gap between the legs leaves its band for longer than allowed.

What it judges
    The gap, track edge to track edge, along the coupled length of plus. Its band is the pair's own median gap give or
    take `spread`, or the absolute `least` and `most`; where both are given both hold. The class's `breakout` at each
    end is left out, and what lies in it told apart; stretches no longer than `for` are excused.

Why it matters
    Coupling and odd-mode impedance follow the gap. A stretch that is wider or narrower reflects, and where the legs
    also part from one another unevenly, common mode turns into signal there.

Formula
    max(gap_median (1 − spread), least) ≤ gap(s) ≤ min(gap_median (1 + spread), most), all [mm], for all s but
    stretches no longer than `for` [mm]. Between the ends and the middle of a stretch of the profile the gap is taken
    as linear.

Source
    Common practice, no source. Exempting short stretches at pads and vias is trade practice against false alarms.

What to do
    Bring the legs back to their usual gap between the two places named, or let the class allow a longer breakout with
    `for`.

Example
    Median 0.15 mm, spread 20 %, for 1.0 mm: the band is 0.12 to 0.18 mm; a gap of 0.30 mm over 4.2 mm is flagged,
    over 0.8 mm it is not.
"""

from __future__ import annotations

import math

from pairrules.checks.routed_legs import unrouted
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.stretches import Stretch, in_breakout, narrower, wider
from pairrules.checks.wording import TOLERANCE, amounts, decimals, spot
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Find the stretches outside the band that are longer than `for`: one finding for too wide, one for too narrow."""
    geometry, given = subject.geometry, limit.quantities
    profile, median = geometry.profile_plus, geometry.gap_median_mm
    if profile is None:
        return unrouted(subject)
    if median is None:
        return Undecided(missing="the legs run nowhere beside one another within reach, so there is no gap to judge")
    least, most = given.get("least", -math.inf), given.get("most", math.inf)
    if "spread" in given:
        least = max(least, median * (1 - given["spread"]))
        most = min(most, median * (1 + given["spread"]))
    excused = given.get("for", 0.0) + TOLERANCE
    band = _band(least, most)
    findings = []
    for beyond, bound in ((narrower, least), (wider, most)):
        judged = beyond(subject.board, profile, bound, breakout_mm=subject.breakout_mm)
        stretches = [stretch for stretch in judged if stretch.length_mm > excused]
        if stretches:
            left_out = in_breakout(beyond(subject.board, profile, bound), judged, subject.breakout_mm)
            findings.append(_finding(subject, limit, stretches, bound, band, left_out))
    return tuple(findings)


def _finding(
    subject: Subject, limit: Limit, stretches: list[Stretch], bound: float, band: str, left_out: str
) -> Finding:
    longest, board = stretches[0], subject.board
    worst = (max if longest.worst > bound else min)(stretch.worst for stretch in stretches)
    measured, _ = amounts(worst, bound, "mm")
    narrow = worst < bound
    more = f", and on {len(stretches) - 1} more stretches" if len(stretches) > 1 else ""
    more = more.replace("1 more stretches", "1 more stretch")
    excused = limit.quantities.get("for", 0.0)
    at_most = f", and another gap for {excused:.2f} mm at most" if excused else ""
    return Finding(
        rule=limit.rule,
        severity=limit.severity,
        measured=worst,
        limit=bound,
        unit="mm",
        message=f"the gap {'falls' if narrow else 'grows'} to {measured}, outside its band over "
        f"{longest.length_mm:.2f} mm{more}; {band} is allowed{at_most}{left_out}",
        advice=f"{'part the legs' if narrow else 'bring the legs together'} to {band} between "
        f"{spot(board, longest.first)} and {spot(board, longest.last)}",
        at=tuple(place for stretch in stretches for place in (stretch.first, stretch.last)),
        source=limit.source,
    )


def _band(least: float, most: float) -> str:
    if math.isinf(most):
        return f"{least:.{decimals(least)}f} mm or more"
    if math.isinf(least):
        return f"{most:.{decimals(most)}f} mm or less"
    digits = max(decimals(least), decimals(most))
    return f"{least:.{digits}f} to {most:.{digits}f} mm"


RULE = Rule(
    summary="the gap leaves its band",
    unit="mm",
    quantities={"spread": "share", "least": "length", "most": "length", "for": "length"},
    required=("spread", "least", "most"),
    judge=judge,
    models=("spacing",),
)
