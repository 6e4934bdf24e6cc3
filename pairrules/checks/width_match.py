"""The legs differ in track width.

What it judges
    The difference of `width_plus_mm` and `width_minus_mm`, each the length-weighted median of its leg's track widths.

Why it matters
    A wider leg has more capacitance to reference and less resistance and inductance: the legs load a common-mode
    voltage differently and part of it turns into signal.

Formula
    |width_plus_mm − width_minus_mm| [mm] ≤ most [mm].

Source
    Common practice, no source.

What to do
    Draw both legs in the same width.

Example
    plus 0.20 mm, minus 0.15 mm, most 0.01 mm: 0.05 mm > 0.01 mm, flagged.
"""

from __future__ import annotations

from pairrules.checks.routed_legs import both_legs
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts, place
from pairrules.geometry.pair_geometry import TRACK, LegRoute
from pairrules.result import Finding, Place
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the legs' median widths."""
    found = both_legs(subject)
    if isinstance(found, Undecided):
        return found
    plus, minus = found
    if plus.width_mm is None or minus.width_mm is None:
        without = " and ".join(name for name, leg in (("plus", plus), ("minus", minus)) if leg.width_mm is None)
        return Undecided(missing=f"{without} has no drawn track, so it has no width to compare")
    difference, most = abs(plus.width_mm - minus.width_mm), limit.quantities["most"]
    if difference <= most + TOLERANCE:
        return ()
    wider, leg = ("plus", plus) if plus.width_mm > minus.width_mm else ("minus", minus)
    measured, allowed = amounts(difference, most, "mm")
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=difference,
            limit=most,
            unit="mm",
            message=f"{wider} is {measured} wider than the other leg "
            f"(plus {plus.width_mm:.3f} mm, minus {minus.width_mm:.3f} mm); {allowed} is allowed",
            advice=f"draw both legs {min(plus.width_mm, minus.width_mm):.3f} mm or both {leg.width_mm:.3f} mm wide",
            at=_first_track(subject, leg),
            source=limit.source,
        ),
    )


def _first_track(subject: Subject, leg: LegRoute) -> tuple[Place, ...]:
    """Where the track that has the leg's usual width begins."""
    pieces = leg.pieces
    for row in range(len(pieces)):
        if pieces.kind[row] == TRACK and abs(pieces.width[row] - (leg.width_mm or 0.0)) <= TOLERANCE:
            return (place(subject.board, int(pieces.layer[row]), *pieces.start[row]),)
    return ()


RULE = Rule(
    summary="the legs differ in width", unit="mm", quantities={"most": "length"}, required=("most",), judge=judge
)
