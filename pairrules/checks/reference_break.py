"""A leg leaves its reference copper, or changes from one reference net to another.

What it judges
    For each leg the longest contiguous track length with reference copper neither on the next copper layer above nor on
    that below; and each place where the reference net changes while the leg stays on its layer.

Why it matters
    The common mode's return current follows the copper next to the leg. Where that ends it goes around, encloses a
    loop, and couples to all else that crosses the gap; where just one leg loses it, common mode turns into signal.

Formula
    length of a stretch without reference copper [mm] ≤ most [mm]. A change of net is flagged whatever its length.

Source
    Common practice, no source.

What to do
    Close the reference copper there, or lead both legs around the gap; keep the pair over one reference net.

Example
    A slot 4 mm wide in the ground plane below both legs, most 1 mm: 4.00 mm > 1.00 mm, flagged.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.checks.leg_line import leg_line
from pairrules.checks.routed_legs import both_legs, unrouted
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TIE_DIGITS, TOLERANCE, amounts, place, spot
from pairrules.geometry.pair_geometry import LegRoute
from pairrules.geometry.reference_cover import UNKNOWN, Cover
from pairrules.result import Finding, Place
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Find the stretches without reference copper, and the changes of net."""
    legs = both_legs(subject)
    if isinstance(legs, Undecided):
        return legs
    plus, minus = subject.geometry.cover_plus, subject.geometry.cover_minus
    if plus is None or minus is None:
        return unrouted(subject)
    covers = (plus, minus)
    missing = plus.missing or minus.missing
    if missing and not subject.reference:
        return Undecided(missing=missing.rstrip("."))
    bare = [_bare(subject, name, cover) for name, cover in zip(_LEGS, covers, strict=True)]
    most = limit.quantities["most"]
    longer = sorted(
        (one for leg in bare for one in leg if one.length_mm > most + TOLERANCE),
        key=lambda b: -round(b.length_mm, TIE_DIGITS),
    )
    findings = []
    if longer:
        findings.append(_gap_finding(subject, limit, legs, longer, bare))
    changes = [change for name, cover in zip(_LEGS, covers, strict=True) for change in _changes(subject, name, cover)]
    if changes:
        findings.append(_change_finding(subject, limit, changes))
    if missing and not findings:
        return Undecided(missing=missing.rstrip("."))
    return tuple(findings)


_LEGS = ("plus", "minus")


@dataclass(frozen=True, slots=True, kw_only=True)
class _Bare:
    """A stretch of a leg without reference copper; s_from, s_to [mm] of track length."""

    leg: str
    s_from: float
    s_to: float
    first: Place
    last: Place

    @property
    def length_mm(self) -> float:
        return self.s_to - self.s_from


@dataclass(frozen=True, slots=True, kw_only=True)
class _Change:
    """A place where a leg's reference net changes. before, after: net names."""

    leg: str
    before: str
    after: str
    where: Place


def _bare(subject: Subject, name: str, cover: Cover) -> list[_Bare]:
    rows = np.flatnonzero(cover.uncovered)
    if not len(rows):
        return []
    apart = np.flatnonzero((np.diff(rows) > 1) | (cover.s_from[rows[1:]] - cover.s_to[rows[:-1]] > TOLERANCE)) + 1
    found = []
    for group in np.split(rows, apart):
        a, b = group[0], group[-1]
        found.append(
            _Bare(
                leg=name,
                s_from=float(cover.s_from[a]),
                s_to=float(cover.s_to[b]),
                first=place(subject.board, int(cover.layer[a]), *cover.start[a]),
                last=place(subject.board, int(cover.layer[b]), *cover.end[b]),
            )
        )
    return found


def _changes(subject: Subject, name: str, cover: Cover) -> list[_Change]:
    nets = subject.board.nets
    found = []
    before: set[int] = set()
    layer = -1
    for row in range(len(cover)):
        beside = {int(cover.above[row]), int(cover.below[row])}
        if UNKNOWN in beside or cover.layer[row] != layer:
            before = set()
        layer = int(cover.layer[row])
        now = {net for net in beside if net >= 0}
        if before and now and not before & now:
            where = place(subject.board, layer, *cover.start[row])
            found.append(_Change(leg=name, before=nets[min(before)], after=nets[min(now)], where=where))
        before = now or before
    return found


def _gap_finding(
    subject: Subject, limit: Limit, legs: tuple[LegRoute, LegRoute], longer: list[_Bare], bare: list[list[_Bare]]
) -> Finding:
    worst, most = longer[0], limit.quantities["most"]
    measured, allowed = amounts(worst.length_mm, most, "mm")
    more = f", and on {len(longer) - 1} more" if len(longer) > 1 else ""
    return Finding(
        rule=limit.rule,
        severity=limit.severity,
        measured=worst.length_mm,
        limit=most,
        unit="mm",
        message=f"{worst.leg} runs {measured} without reference copper above or below{more}; {allowed} is allowed"
        + _compared(subject, legs, worst, bare),
        advice=f"close the reference copper from {spot(subject.board, worst.first)} to "
        f"{spot(subject.board, worst.last)}, or lead both legs around the gap",
        at=tuple(where for one in longer for where in (one.first, one.last)),
        source=limit.source,
    )


def _compared(subject: Subject, legs: tuple[LegRoute, LegRoute], worst: _Bare, bare: list[list[_Bare]]) -> str:
    """What the other leg has there, in words; "" where it does not run beside this one."""
    own, other = _LEGS.index(worst.leg), 1 - _LEGS.index(worst.leg)
    lines = [leg_line(leg.pieces) for leg in legs]
    mine, theirs = lines[own], lines[other]
    if mine is None or theirs is None:
        return ""
    at, _, layer = mine.at(np.array([worst.s_from, worst.s_to]))
    first, last = theirs.facing(at, layer).tolist()
    if np.isnan(first) or np.isnan(last):
        return ""
    # Where the legs part, as on their ways to a connector, the nearest place of the other says nothing.
    reach = (subject.geometry.reach_mm or 0.0) + sum((leg.width_mm or 0.0) / 2 for leg in legs)
    if (np.hypot(*(theirs.at(np.array([first, last]))[0] - at).T) > reach + TOLERANCE).any():
        return ""
    first, last = sorted((first, last))
    beside = [one for one in bare[other] if one.s_from < last - TOLERANCE and one.s_to > first + TOLERANCE]
    if not beside:
        return f"; {_LEGS[other]} keeps its own there"
    # Zero where both legs lose it side by side, as they do at an edge square to the pair.
    lead = min(one.s_from for one in beside) - first
    if abs(lead) < _SQUARE_MM:
        return "; both legs lose it at once"
    earlier, later = (_LEGS[own], _LEGS[other]) if lead > 0 else (_LEGS[other], _LEGS[own])
    return f"; {earlier} loses it {abs(lead):.2f} mm before {later}"


_SQUARE_MM = 0.01
"""Legs that reach an edge within this of each other reach it at once."""


def _change_finding(subject: Subject, limit: Limit, changes: list[_Change]) -> Finding:
    one = changes[0]
    more = f", and at {len(changes) - 1} more" if len(changes) > 1 else ""
    return Finding(
        rule=limit.rule,
        severity=limit.severity,
        measured=None,
        limit=None,
        unit="mm",
        message=f"the reference of {one.leg} changes from {one.before} to {one.after}{more}",
        advice=f"keep the pair over one reference net, or join {one.before} and {one.after} beside it at "
        f"{spot(subject.board, one.where)}",
        at=tuple(change.where for change in changes),
        source=limit.source,
    )


RULE = Rule(
    summary="a leg leaves its reference copper",
    unit="mm",
    quantities={"most": "length"},
    required=("most",),
    judge=judge,
    models=("reference-cover",),
)
