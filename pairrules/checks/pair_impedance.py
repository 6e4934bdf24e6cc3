"""The pair's differential impedance leaves its band.

What it judges
    `impedance_diff_ohm`, length-weighted over the sections where the legs run beside each other; with `for` also each
    stretch of such sections. The class's `breakout` at each end is left out of the stretches.

Why it matters
    A step of impedance reflects part of the signal, and a pair that does not match its termination reflects there.

Formula
    max(target (1 − tolerance), least) ≤ impedance_diff_ohm [ohm] ≤ min(target (1 + tolerance), most); where `for` is
    given the same of each section, but for stretches no longer than `for` [mm]. ρ = (Z2 − Z1)/(Z2 + Z1).

Source
    The interface's standard, named in the rule set. That makers agree on ±10 % is common practice, no source.

What to do
    Too high: wider tracks, a narrower gap, or reference copper nearer. Too low: the other way round. Which width or gap
    would do with all else as it is, is found by solving the cross-section again, in steps of 5 µm.

Example
    target 100 ohm, tolerance 10 %: the band is 90 to 110 ohm; 117.3 ohm is flagged.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from pairrules.balance.fitting_section import fitting_gap, fitting_width
from pairrules.balance.pair_electrical import PairElectrical, PairSection
from pairrules.checks.electrical_figures import figures, lacking
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts, place, spot
from pairrules.result import Finding, Place
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the weighted impedance, then the stretches longer than `for`, with the band."""
    given = limit.quantities
    if ("target" in given) != ("tolerance" in given):
        return Undecided(missing="the limit needs a tolerance to its target impedance, and a target to its tolerance")
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    impedance = electrical.impedance_diff_ohm
    if impedance is None:
        return lacking(electrical, "sections", "the pair's impedance is not known")
    least, most = given.get("least", -math.inf), given.get("most", math.inf)
    if "target" in given:
        least = max(least, given["target"] * (1 - given["tolerance"]))
        most = min(most, given["target"] * (1 + given["tolerance"]))
    stretches = _outside(subject, electrical, least, most)
    if _is_out(impedance, least, most):
        return (_finding(subject, limit, impedance, (least, most), stretches[:1], whole=True),)
    longer = [one for one in stretches if "for" in given and one.length_mm > given["for"] + TOLERANCE]
    if longer:
        return (_finding(subject, limit, longer[0].worst, (least, most), longer, whole=False),)
    return ()


@dataclass(frozen=True, slots=True, kw_only=True)
class _Out:
    """Sections one after the other on one side of the band; `length_mm` of plus, breakouts left out."""

    first: PairSection
    last: PairSection
    length_mm: float
    worst: float
    high: bool


def _is_out(impedance: float, least: float, most: float) -> bool:
    return impedance < least - TOLERANCE or impedance > most + TOLERANCE


def _outside(subject: Subject, electrical: PairElectrical, least: float, most: float) -> list[_Out]:
    """Stretches outside the band, longest first."""
    sections = [one for one in electrical.sections if one.leg == "both"]
    whole = max((one.plus_mm[1] for one in electrical.sections), default=0.0)
    first_mm, last_mm = subject.breakout_mm, whole - subject.breakout_mm
    found: list[_Out] = []
    before: PairSection | None = None
    for one in sections:
        length = min(one.plus_mm[1], last_mm) - max(one.plus_mm[0], first_mm)
        impedance = one.impedance_diff_ohm
        if length <= 0 or impedance is None or not _is_out(impedance, least, most):
            before = None
            continue
        high = impedance > most
        if before is not None and found[-1].high == high and one.plus_mm[0] - before.plus_mm[1] <= TOLERANCE:
            last = found.pop()
            worst = (max if high else min)(last.worst, impedance)
            found.append(_Out(first=last.first, last=one, length_mm=last.length_mm + length, worst=worst, high=high))
        else:
            found.append(_Out(first=one, last=one, length_mm=length, worst=impedance, high=high))
        before = one
    return sorted(found, key=lambda out: (-out.length_mm, out.first.plus_mm[0]))


def _finding(
    subject: Subject, limit: Limit, measured: float, band: tuple[float, float], stretches: list[_Out], *, whole: bool
) -> Finding:
    least, most = band
    high = measured > most
    bound = most if high else least
    said, allowed = amounts(measured, bound, "ohm")
    longest = next(iter(stretches), None)
    if whole:
        message = f"the pair has {said} over its coupled length; {allowed} at {'most' if high else 'least'} is allowed"
    else:
        more = f", and on {len(stretches) - 1} more" if len(stretches) > 1 else ""
        message = (
            f"the pair has {said} on a stretch of {stretches[0].length_mm:.2f} mm{more}; "
            f"{allowed} at {'most' if high else 'least'} is allowed"
        )
    what = "widen the legs or bring them closer together" if high else "narrow the legs or part them"
    advice = f"{what}: it is {abs(measured / bound - 1):.0%} too {'high' if high else 'low'}"
    at: tuple[Place, ...] = ()
    if longest is not None:
        ends = [
            place(subject.board, section.layer, *xy)
            for section, xy in ((longest.first, longest.first.start), (longest.last, longest.last.end))
        ]
        at = tuple(ends)
        of = longest.first
        advice += (
            f" between {spot(subject.board, ends[0])} and {spot(subject.board, ends[1])}, "
            f"where plus is {of.width_plus_mm:.3f} mm and minus {of.width_minus_mm:.3f} mm wide, "
            f"{of.gap_mm:.3f} mm apart"
        )
        advice += _fitted(of, limit.quantities.get("target"), band)
    return Finding(
        rule=limit.rule,
        severity=limit.severity,
        measured=measured,
        limit=bound,
        unit="ohm",
        message=message,
        advice=advice.replace("%", " %"),
        at=at,
        source=limit.source,
    )


def _fitted(section: PairSection, target: float | None, band: tuple[float, float]) -> str:
    """Which width or gap would do there, found by solving the section anew; "" where it cannot be drawn again."""
    if section.drawing is None:
        return ""
    ends = [end for end in band if math.isfinite(end)]
    aim = math.fsum(ends) / len(ends) if target is None else target
    said = [
        f"{what} of {found.value_mm:.3f} mm would have {found.impedance_ohm:.1f} ohm"
        for what, fitting in (("a width", fitting_width), ("a gap", fitting_gap))
        if (found := fitting(section.drawing, aim, band)) is not None
    ]
    return f"; all else as it is, {' and '.join(said)}" if said else "; no width or gap alone would do there"


RULE = Rule(
    summary="the differential impedance leaves its band",
    unit="ohm",
    quantities={
        "least": "resistance",
        "most": "resistance",
        "target": "resistance",
        "tolerance": "share",
        "for": "length",
    },
    required=("least", "most", "target"),
    judge=judge,
)
