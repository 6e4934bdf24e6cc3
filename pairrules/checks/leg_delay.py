"""The legs of a pair differ in delay.

What it judges
    The magnitude of `delay_mismatch_ps`: travel time along plus less that along minus, each section at its odd mode's
    velocity.

Why it matters
    It is the delay, not the length, that turns common mode into signal and signal into common mode: legs of equal
    length on different layers arrive at different times.

Formula
    |delay_mismatch_ps| [ps] ≤ most [ps], with what the settings' `pin_lengths` add to each leg; most may be a share
    of the class's rise time or unit interval. A delay Δτ converts sin(π f Δτ).

Source
    Conversion by skew: mode definitions of Bockelman and Eisenstadt, IEEE Trans. MTT 43 (1995), from memory; the sine
    follows from them for matched, loss-free legs. The amount allowed depends on the signal's edge: it stands in the
    rule set.

What to do
    Lengthen the faster leg where the difference arises, not at the far end.

Example
    plus 275.2 ps, minus 268.0 ps, most 5 ps: 7.20 ps > 5.00 ps, flagged.
"""

from __future__ import annotations

from pairrules.balance.pair_electrical import PairElectrical, PairSection
from pairrules.checks.electrical_figures import PS_PER_MM, figures, lacking, ps_per_mm
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts, place, spot
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the difference of the legs' delays with `most`."""
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    plus, minus = electrical.delay_plus_ps, electrical.delay_minus_ps
    if plus is None or minus is None:
        return lacking(electrical, "sections", "the legs' delays are not known")
    pins = subject.pins.difference("ps")
    if pins is None:
        return Undecided(missing="pins add a length to the legs, and the pair's velocity is unknown")
    mismatch, most = plus - minus + pins, limit.quantities["most"]
    if abs(mismatch) <= most + TOLERANCE:
        return ()
    later, earlier = ("plus", "minus") if mismatch > 0 else ("minus", "plus")
    measured, allowed = amounts(abs(mismatch), most, "ps")
    advice = f"delay {earlier} by {measured}"
    slowness = ps_per_mm(electrical, (earlier,))
    if slowness:
        advice += f", about {abs(mismatch) / slowness:.2f} mm more track"
    where = _greatest_share(electrical, mismatch)
    at = () if where is None else (place(subject.board, where.layer, *where.start),)
    if at:
        advice += f", best near {spot(subject.board, at[0])} where most of the difference arises"
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=abs(mismatch),
            limit=most,
            unit="ps",
            message=f"{later} is {measured} slower than {earlier}{subject.pins.told('ps')}; {allowed} is allowed",
            advice=advice,
            at=at,
            source=limit.source,
        ),
    )


def _lengths(section: PairSection) -> tuple[float, float]:
    return section.plus_mm[1] - section.plus_mm[0], section.minus_mm[1] - section.minus_mm[0]


def _greatest_share(electrical: PairElectrical, mismatch: float) -> PairSection | None:
    """The section that makes at least half of the mismatch [ps]; `None` where no single one does."""
    for section in electrical.sections:
        plus, minus = _lengths(section)
        if (plus - minus) * section.delay * PS_PER_MM / mismatch >= 1 / 2:
            return section
    return None


RULE = Rule(
    summary="the legs differ in delay",
    unit="ps",
    quantities={"most": "time"},
    required=("most",),
    judge=judge,
    timed=("most",),
)
