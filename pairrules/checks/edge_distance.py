"""A leg runs too near the edge of its reference copper.

What it judges
    For each leg the distance, seen from above, from its centre line to the edge of the reference copper that covers it:
    of the copper above and below the farther edge, where both cover it. The antipad of a via is such an edge. A piece
    of track that crosses an edge is left out here: `reference-break` judges it.

Why it matters
    Near the edge the leg's field goes around it. The outer leg has less capacitance to reference than the inner one,
    and common mode turns into signal.

Formula
    distance [mm] ≥ least [mm] on every piece of track.

Source
    Common practice, no source (trade: three times the height over the copper).

What to do
    Move the pair inward, or let the reference copper reach farther.

Example
    plus 0.30 mm from the edge of the plane over 12 mm, least 0.60 mm: flagged.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from pairrules.board.columns import Bools
from pairrules.checks.routed_legs import both_legs, unrouted
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TIE_DIGITS, TOLERANCE, amounts, layer_name, place, spot
from pairrules.geometry.reference_cover import UNKNOWN, Cover
from pairrules.result import Finding, Place
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Find the stretches nearer to the edge than `least`; the nearest is told."""
    legs = both_legs(subject)
    if isinstance(legs, Undecided):
        return legs
    covers = {"plus": subject.geometry.cover_plus, "minus": subject.geometry.cover_minus}
    least = limit.quantities["least"]
    near: list[_Near] = []
    missing = ""
    for name, cover in covers.items():
        if cover is None:
            return unrouted(subject)
        found, unsure = _near(subject, name, cover, least)
        near += found
        missing = missing or cover.missing or unsure
    if near:
        return (_finding(subject, limit, sorted(near, key=lambda one: round(one.distance, TIE_DIGITS))),)
    return Undecided(missing=missing.rstrip(".")) if missing else ()


@dataclass(frozen=True, slots=True, kw_only=True)
class _Near:
    """A stretch that comes near an edge somewhere.

    Parameters: length_mm: of its track, which may reach far beyond the place. distance: its least [mm]; where: there.
    copper: layer of the reference copper.
    """

    leg: str
    length_mm: float
    distance: float
    where: Place
    copper: str


def _near(subject: Subject, name: str, cover: Cover, least: float) -> tuple[list[_Near], str]:
    """Stretches nearer than `least`, and why others could not be judged ("" where all could)."""
    board = subject.board
    distance = np.fmax(cover.edge_above, cover.edge_below)
    # NaN, where nothing covers the leg, fails both.
    low: Bools = (distance > TOLERANCE) & (distance < least - TOLERANCE)
    unsure = low & ((cover.above == UNKNOWN) | (cover.below == UNKNOWN))
    rows = np.flatnonzero(low & ~unsure)
    found = []
    if len(rows):
        apart = np.flatnonzero((np.diff(rows) > 1) | (cover.s_from[rows[1:]] - cover.s_to[rows[:-1]] > TOLERANCE)) + 1
        for group in np.split(rows, apart):
            worst = group[int(np.argmin(distance[group]))]
            above = not cover.edge_above[worst] < distance[worst] and not np.isnan(cover.edge_above[worst])
            at = cover.edge_above_at[worst] if above else cover.edge_below_at[worst]
            layer = int(cover.layer[worst])
            found.append(
                _Near(
                    leg=name,
                    length_mm=float(cover.s_to[group[-1]] - cover.s_from[group[0]]),
                    distance=float(distance[worst]),
                    where=place(board, layer, *at),
                    copper=layer_name(board, layer - 1 if above else layer + 1),
                )
            )
    names = " and ".join(board.copper[one] for one in np.unique(cover.layer[unsure]))
    return found, f"the copper layer next to {names} is not in the file; its edge may be farther away" if names else ""


def _finding(subject: Subject, limit: Limit, near: list[_Near]) -> Finding:
    worst, least = near[0], limit.quantities["least"]
    measured, required = amounts(worst.distance, least, "mm")
    more = (
        f", and on {len(near) - 1} more stretches" if len(near) > 2 else ", and on one more stretch" if near[1:] else ""
    )
    return Finding(
        rule=limit.rule,
        severity=limit.severity,
        measured=worst.distance,
        limit=least,
        unit="mm",
        message=f"{worst.leg} comes within {measured} of the edge of its reference copper on {worst.copper}, "
        f"somewhere on {worst.length_mm:.2f} mm of track{more}; {required} is required",
        advice=f"move the pair inward or let the copper on {worst.copper} reach farther at "
        f"{spot(subject.board, worst.where)}",
        at=tuple(one.where for one in near),
        source=limit.source,
    )


RULE = Rule(
    summary="a leg runs near the edge of its reference copper",
    unit="mm",
    quantities={"least": "length"},
    required=("least",),
    judge=judge,
    models=("reference-cover",),
)
