"""The parts on the two legs stand in different places along the way.

What it judges
    For the two parts of each series step, and for parts that hang on one leg and their partners on the other: how far
    along its leg's track each one stands from the source end, and the difference of the two.

Why it matters
    Each part is a step of impedance. Where the steps do not meet the signal at the same time on both legs, the pair is
    unbalanced in between, however alike the parts are.

Formula
    |along_plus − along_minus| [mm] ≤ most [mm], each the track length from the source end to the part.

Source
    Common practice, no source.

What to do
    Set both parts side by side, square to the pair.

Example
    C1 12.0 mm from the source on plus, C2 15.5 mm on minus, most 1.0 mm: 3.50 mm > 1.00 mm, flagged.
"""

from __future__ import annotations

from pairrules.balance.pair_electrical import PairElectrical
from pairrules.checks.electrical_figures import figures
from pairrules.checks.leg_parts import PartPair, part_pairs, spot_of
from pairrules.checks.routed_legs import both_legs
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the places of both parts of each pair of parts; the worst is told."""
    pairs = [pair for pair in part_pairs(subject.board, subject.link) if pair.whole]
    if not pairs:
        return ()
    legs = both_legs(subject)
    if isinstance(legs, Undecided):
        return legs
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    most = limit.quantities["most"]
    known = [(abs(along[0] - along[1]), pair, along) for pair in pairs if (along := _along(electrical, pair))]
    offset, pair, along = max(known, key=lambda found: found[0], default=(0.0, pairs[0], (0.0, 0.0)))
    if offset <= most + TOLERANCE:
        lost = next((pair for pair in pairs if _along(electrical, pair) is None), None)
        if lost is None:
            return ()
        refs = " and ".join(subject.board.parts[part].ref for part in (lost.plus, lost.minus))
        return Undecided(missing=f"where {refs} meet their legs is not known")
    measured, allowed = amounts(offset, most, "mm")
    plus, minus = (subject.board.parts[part].ref for part in (pair.plus, pair.minus))
    others = sum(1 for found in known if found[0] > most + TOLERANCE) - 1
    more = f", and {others} more such pairs" if others > 1 else ", and one more such pair" if others else ""
    nearer, farther = (plus, minus) if along[0] < along[1] else (minus, plus)
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=offset,
            limit=most,
            unit="mm",
            message=f"{plus} and {minus} stand {measured} apart along their legs{more}; {allowed} is allowed",
            advice=f"set {plus} and {minus} side by side: {nearer} stands {min(along):.2f} mm from the source end, "
            f"{farther} {max(along):.2f} mm",
            at=(*spot_of(subject.board, pair.plus), *spot_of(subject.board, pair.minus)),
            source=limit.source,
        ),
    )


def _along(electrical: PairElectrical, pair: PartPair) -> tuple[float, float] | None:
    """Track length from the source end to the parts of plus and of minus."""
    where = {(one.part, one.leg): one.along_mm for one in (*electrical.series, *electrical.hung)}
    plus, minus = where.get((pair.plus, "plus")), where.get((pair.minus, "minus"))
    return None if plus is None or minus is None else (plus, minus)


RULE = Rule(
    summary="the parts on the legs stand apart",
    unit="mm",
    quantities={"most": "length"},
    required=("most",),
    judge=judge,
    models=("parts", "routes"),
)
