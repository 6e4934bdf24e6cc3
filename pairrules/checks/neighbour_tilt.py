"""Copper beside one leg only.

What it judges
    Stretches along which foreign copper on the legs' own layer stands nearer than `gap` to one leg's outer side, while
    the other leg's outer side has none within twice that; and, where the cross-sections are solved, stretches whose
    capacitances to reference differ by more than `share`. The class's `breakout` at each end is left out of the first.

Why it matters
    A pour, track or pad beside one leg adds capacitance to that leg alone: common mode turns into signal, and the
    neighbour's own signal reaches one leg more than the other.

Formula
    contiguous length with outer gap < gap [mm] on one leg and > 2 gap on the other ≤ for [mm]; the same where
    |C11 − C22|/(C11 + C22) > share. Without `for` no such stretch is allowed.

Source
    Common practice, no source.

What to do
    Move the copper away from the leg, cut the pour back, or give the other leg the same neighbour.

Example
    Ground pour 0.15 mm beside plus over 12 mm, nothing beside minus, gap 0.2 mm, for 5 mm: 12.00 mm > 5.00 mm, flagged.
"""

from __future__ import annotations

import numpy as np

from pairrules.checks.electrical_figures import figures, lacking
from pairrules.checks.leg_line import LegLine, leg_line
from pairrules.checks.one_sided import OneSided, one_sided
from pairrules.checks.routed_legs import both_legs, unrouted
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TIE_DIGITS, TOLERANCE, amounts, place, spot
from pairrules.geometry.measure import LEAST_BESIDE_MM
from pairrules.result import Finding, Place
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Look for copper beside one leg, then for unequal capacitances: at most one finding of each."""
    answers = [
        one(subject, limit) for key, one in (("gap", _judge_gap), ("share", _judge_share)) if key in limit.quantities
    ]
    found = [finding for answer in answers if not isinstance(answer, Undecided) for finding in answer]
    if found:
        return tuple(found)
    return next((answer for answer in answers if isinstance(answer, Undecided)), ())


def _judge_gap(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    legs = both_legs(subject)
    if isinstance(legs, Undecided):
        return legs
    geometry, gap = subject.geometry, limit.quantities["gap"]
    if geometry.neighbours_plus is None or geometry.neighbours_minus is None:
        return Undecided(missing="foreign copper beside the legs was not looked for")
    if geometry.profile_plus is None or geometry.profile_minus is None:
        return unrouted(subject)
    beside = (geometry.neighbours_plus, geometry.neighbours_minus)
    spacing = (geometry.profile_plus, geometry.profile_minus)
    within = max(geometry.reach_mm or 0.0, LEAST_BESIDE_MM)
    if 2 * gap > within + TOLERANCE:
        return Undecided(
            missing=f"foreign copper was looked for within {within:.2f} mm of the legs, twice the limit's gap is "
            f"{2 * gap:.2f} mm"
        )
    plus, minus = (leg_line(leg.pieces) for leg in legs)
    if plus is None or minus is None:
        return ()
    excused = limit.quantities.get("for", 0.0)
    found: list[tuple[OneSided, str, LegLine]] = []
    for name, own, other, sides, along in (
        ("plus", plus, minus, beside, spacing[0]),
        ("minus", minus, plus, beside[::-1], spacing[1]),
    ):
        stretches = one_sided(own, other, *sides, along, gap_mm=gap, breakout_mm=subject.breakout_mm)
        found += [(one, name, own) for one in stretches if one.length_mm > excused + TOLERANCE]
    if not found:
        return ()
    found.sort(key=lambda one: -round(one[0].length_mm, TIE_DIGITS))
    return (_gap_finding(subject, limit, found),)


def _ends(subject: Subject, stretch: OneSided, line: LegLine) -> tuple[Place, ...]:
    at, _, layer = line.at(np.array([stretch.s_from, stretch.s_to]))
    return tuple(place(subject.board, int(one), *xy) for one, xy in zip(layer, at, strict=True))


def _gap_finding(subject: Subject, limit: Limit, found: list[tuple[OneSided, str, LegLine]]) -> Finding:
    board, (longest, leg, line) = subject.board, found[0]
    other = "minus" if leg == "plus" else "plus"
    net = board.nets[longest.net] if longest.net >= 0 else "copper of no net"
    excused = limit.quantities.get("for", 0.0)
    measured, allowed = amounts(longest.length_mm, excused, "mm")
    more = f", and on {len(found) - 1} more" if len(found) > 1 else ""
    first, last = _ends(subject, longest, line)
    return Finding(
        rule=limit.rule,
        severity=limit.severity,
        measured=longest.length_mm,
        limit=excused,
        unit="mm",
        message=f"{net} lies {longest.gap:.2f} mm beside {leg} over {measured}{more}, where {other} has nothing within "
        f"{2 * limit.quantities['gap']:.2f} mm; {allowed} is allowed",
        advice=f"move {net} {2 * limit.quantities['gap']:.2f} mm away from {leg}, or give {other} the same neighbour, "
        f"between {spot(board, first)} and {spot(board, last)}",
        at=tuple(where for one, _, of in found for where in _ends(subject, one, of)),
        source=limit.source,
    )


def _judge_share(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    if not electrical.sections:
        return lacking(electrical, "sections", "the pair's cross-sections are not solved")
    share, excused = limit.quantities["share"], limit.quantities.get("for", 0.0)
    runs: list[list[int]] = []
    before = None
    for index, section in enumerate(electrical.sections):
        if section.leg != "both" or abs(section.capacitance_tilt) <= share + TOLERANCE:
            continue
        if before is not None and section.plus_mm[0] - electrical.sections[before].plus_mm[1] <= TOLERANCE:
            runs[-1].append(index)
        else:
            runs.append([index])
        before = index
    lengths = [(electrical.sections[run[-1]].plus_mm[1] - electrical.sections[run[0]].plus_mm[0], run) for run in runs]
    longer = sorted(((length, run) for length, run in lengths if length > excused + TOLERANCE), key=lambda one: -one[0])
    if not longer:
        return ()
    length, run = longer[0]
    worst = max((electrical.sections[index] for index in run), key=lambda one: abs(one.capacitance_tilt))
    first, last = electrical.sections[run[0]], electrical.sections[run[-1]]
    measured, allowed = amounts(length, excused, "mm")
    greater, less = ("plus", "minus") if worst.capacitance_tilt > 0 else ("minus", "plus")
    at = (place(subject.board, first.layer, *first.start), place(subject.board, last.layer, *last.end))
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=length,
            limit=excused,
            unit="mm",
            message=f"{greater} has more capacitance than {less} over {measured}, by up to "
            f"{100 * abs(worst.capacitance_tilt):.2f} % of their sum; more than {100 * share:.2f} % is allowed over "
            f"{allowed}",
            advice=f"take copper away from {greater} or give {less} the same surroundings between "
            f"{spot(subject.board, at[0])} and {spot(subject.board, at[1])}",
            at=at,
            source=limit.source,
        ),
    )


RULE = Rule(
    summary="copper beside one leg only",
    unit="mm",
    quantities={"gap": "length", "share": "share", "for": "length"},
    required=("gap", "share"),
    judge=judge,
    models=("neighbours",),
)
