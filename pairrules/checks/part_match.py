"""The parts on the two legs differ.

What it judges
    Parts in series, and parts that hang on one leg (to a reference or another net), leg against leg at the same place
    of the link: whether both legs have one, of one kind (letters of the designator), value and package.

Why it matters
    Unlike parts make unlike legs, whatever the copper: unequal coupling capacitors convert near their corner frequency,
    unequal filter capacitors over the whole band.

Formula
    |a − b| / ((a + b)/2) ≤ most (a share, 0 where not given), a and b the values in ohm, farad or henry. Kind and
    package have to be the same.

Source
    Common practice, no source. That both coupling capacitors of a lane have one value, size and place is recommended
    for PCI Express (base specification's design guidance, recalled, not re-read).

What to do
    Fit the same part on both legs; add the one that is missing, or remove its partner.

Example
    C1 100n and C2 220n in series: 120 nF of 160 nF, 75 %; flagged.
"""

from __future__ import annotations

from dataclasses import dataclass

from pairrules.board.board import Board
from pairrules.board.part_values import part_value
from pairrules.checks.leg_parts import PartPair, letters, part_pairs, spot_of, told
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts
from pairrules.result import Finding
from pairrules.settings.limit import Limit

_SHOWN = 3


@dataclass(frozen=True, slots=True, kw_only=True)
class _Unlike:
    """A difference in words; `share` where it is one of values."""

    pair: PartPair
    text: str
    advice: str
    share: float | None = None


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the parts of each place; one finding tells all that differ."""
    board, most = subject.board, limit.quantities.get("most", 0.0)
    unlike, unknown = [], []
    for pair in part_pairs(board, subject.link):
        found = _compare(board, pair, most)
        if isinstance(found, Undecided):
            unknown.append(found)
        elif found is not None:
            unlike.append(found)
    if not unlike:
        return unknown[0] if unknown else ()
    # Values first, greatest first: they are what converts.
    unlike.sort(key=lambda one: -1.0 if one.share is None else -100 * one.share)
    share = unlike[0].share
    allowed = "" if share is None else f"; {amounts(100 * share, 100 * most, '%')[1]} is allowed"
    more = f"; and {len(unlike) - _SHOWN} more" if len(unlike) > _SHOWN else ""
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=None if share is None else 100 * share,
            limit=None if share is None else 100 * most,
            unit="%",
            message="; ".join(one.text for one in unlike[:_SHOWN]) + more + allowed,
            advice="; ".join(dict.fromkeys(one.advice for one in unlike[:_SHOWN])),
            at=tuple(
                place
                for one in unlike
                for part in (one.pair.plus, one.pair.minus)
                if part >= 0
                for place in spot_of(board, part)
            ),
            source=limit.source,
        ),
    )


def _compare(board: Board, pair: PartPair, most: float) -> _Unlike | Undecided | None:
    where = "on the leg" if pair.hung else "in series"
    if not pair.whole:
        has, lacks = ("plus", "minus") if pair.plus >= 0 else ("minus", "plus")
        part = max(pair.plus, pair.minus)
        return _Unlike(
            pair=pair,
            text=f"{has} has {told(board, part)} {where}, {lacks} has no such part",
            advice=f"give {lacks} the same part as {board.parts[part].ref}, or remove that one",
        )
    plus, minus = board.parts[pair.plus], board.parts[pair.minus]
    both = f"{told(board, pair.plus)} and {told(board, pair.minus)} {where}"
    advice = f"fit the same part as {plus.ref} and {minus.ref}"
    if letters(board, pair.plus) != letters(board, pair.minus):
        return _Unlike(pair=pair, text=f"{both} are parts of different kind", advice=advice)
    if plus.value != minus.value or not plus.value:
        share = _apart(plus.ref, plus.value, minus.ref, minus.value)
        if isinstance(share, Undecided):
            return share
        if share > most + TOLERANCE:
            measured = amounts(100 * share, 100 * most, "%")[0]
            return _Unlike(pair=pair, text=f"{both} differ by {measured}", advice=advice, share=share)
    if plus.package and minus.package and plus.package != minus.package:
        return _Unlike(pair=pair, text=f"{both} differ in package", advice=advice)
    if not plus.package or not minus.package:
        lost = plus.ref if not plus.package else minus.ref
        return Undecided(missing=f"the package of {lost} is not in the file")
    return None


def _apart(plus_ref: str, plus: str, minus_ref: str, minus: str) -> float | Undecided:
    """The relative difference of two values."""
    values = []
    for ref, text in ((plus_ref, plus), (minus_ref, minus)):
        value = part_value(ref, text).value
        if not text:
            return Undecided(missing=f"the value of {ref} is not in the file")
        if value is None:
            return Undecided(missing=f"the value of {ref}, {text!r}, is not understood")
        values.append(value)
    mean = sum(values) / 2
    return abs(values[0] - values[1]) / mean if mean else 0.0


RULE = Rule(
    summary="the parts on the legs differ",
    unit="%",
    quantities={"most": "share"},
    required=(),
    judge=judge,
    models=("parts",),
)
