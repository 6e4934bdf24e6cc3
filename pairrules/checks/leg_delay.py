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

import numpy as np

from pairrules.balance.pair_electrical import PairElectrical
from pairrules.checks.electrical_figures import PS_PER_MM, figures, lacking, ps_per_mm
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.steepest_stretch import MOST, steepest_stretch
from pairrules.checks.wording import TOLERANCE, amounts, place, spot
from pairrules.result import Finding, Place
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
    at: tuple[Place, ...] = ()
    found_at = _where(subject, electrical, mismatch)
    if found_at is not None:
        grown, at = found_at
        first, last = (spot(subject.board, one) for one in at)
        advice += f", between {first} and {last}: {min(grown, abs(mismatch)):.2f} ps of the difference arises there"
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


def _where(subject: Subject, electrical: PairElectrical, mismatch: float) -> tuple[float, tuple[Place, Place]] | None:
    """How much of the difference arises on the shortest stretch that makes most of it [ps], and where that lies."""
    sections = electrical.sections
    lengths = np.array([[last - first for first, last in (one.plus_mm, one.minus_mm)] for one in sections])
    if not len(lengths):
        return None
    delay = np.array([one.delay for one in sections]) * PS_PER_MM
    along = np.concatenate([[0.0], np.cumsum(lengths.max(axis=1))])
    running = np.sign(mismatch) * np.concatenate([[0.0], np.cumsum((lengths[:, 0] - lengths[:, 1]) * delay)])
    stretch = steepest_stretch(along, running, MOST * abs(mismatch))
    if stretch is None:
        return None
    first, last = sections[stretch[0]], sections[stretch[1] - 1]
    ends = place(subject.board, first.layer, *first.start), place(subject.board, last.layer, *last.end)
    return float(running[stretch[1]] - running[stretch[0]]), ends


RULE = Rule(
    summary="the legs differ in delay",
    unit="ps",
    quantities={"most": "time"},
    required=("most",),
    judge=judge,
    timed=("most",),
)
