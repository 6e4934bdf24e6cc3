"""The legs of a pair differ in length.

What it judges
    The magnitude of `length_mismatch_mm`: centre-line length of plus's route less that of minus's, pad centre to pad
    centre, via barrels included.

Why it matters
    What was common to both legs arrives at different times and stays as a difference: of a common-mode wave the share
    sin(π f Δτ) turns into signal, and the signal the other way radiates.

Formula
    |length_plus_mm − length_minus_mm| [mm] ≤ most [mm], with what the settings' `pin_lengths` add to each leg.
    Barrels of unknown height cancel where both legs pass the same ones. Where most is said as a time, or a share of
    one, it is that time over the pair's delay per length.

Source
    Conversion by skew: mode definitions of Bockelman and Eisenstadt, IEEE Trans. MTT 43 (1995), from memory; the sine
    follows from them for matched, loss-free legs. The amount allowed depends on the signal's edge: it stands in the
    rule set.

What to do
    Lengthen the shorter leg where the difference arises (usually the inner side of a bend or the shorter way into a
    pad), not at the far end.

Example
    plus 41.20 mm, minus 40.10 mm, most 0.50 mm: 1.10 mm > 0.50 mm, flagged; add 1.10 mm to minus.
"""

from __future__ import annotations

from collections import Counter

import numpy as np

from pairrules.board.columns import Floats, Ints
from pairrules.checks.routed_legs import both_legs
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.steepest_stretch import MOST, steepest_stretch
from pairrules.checks.wording import TOLERANCE, amounts, place, spot
from pairrules.geometry.pair_geometry import LegRoute, Pieces
from pairrules.result import Finding, Place
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the difference of the legs' lengths with `most`."""
    found = both_legs(subject)
    if isinstance(found, Undecided):
        return found
    plus, minus = found
    if _unknown_barrels(subject, plus) != _unknown_barrels(subject, minus):
        return Undecided(
            missing="the legs pass different vias, and the stackup does not say how long their barrels are"
        )
    pins = subject.pins.difference("mm")
    if pins is None:
        return Undecided(missing="pins add a time to the legs, and the pair's velocity is unknown")
    mismatch, most = plus.length_mm - minus.length_mm + pins, limit.quantities["most"]
    if abs(mismatch) <= most + TOLERANCE:
        return ()
    longer, shorter = ("plus", "minus") if mismatch > 0 else ("minus", "plus")
    measured, allowed = amounts(abs(mismatch), most, "mm")
    advice = f"add {measured} to {shorter}"
    at: tuple[Place, ...] = ()
    found_at = _where(subject, plus, minus, mismatch)
    if found_at is not None:
        grown, at = found_at
        first, last = (spot(subject.board, one) for one in at)
        advice += (
            f", or take it out of {longer}, between {first} and {last}: {min(grown, abs(mismatch)):.2f} mm of the "
            "difference arises there"
        )
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=abs(mismatch),
            limit=most,
            unit="mm",
            message=f"{longer} is {measured} longer than {shorter}{subject.pins.told('mm')}; {allowed} is allowed",
            advice=advice,
            at=at,
            source=limit.source,
        ),
    )


def _unknown_barrels(subject: Subject, leg: LegRoute) -> Counter[tuple[int, int]]:
    """How often the leg passes each barrel (upper and lower layer) whose height is not known."""
    if leg.barrels_known:
        return Counter()
    spans = [(min(via.enter, via.leave), max(via.enter, via.leave)) for via in leg.vias]
    return Counter(span for span in spans if np.isnan(subject.board.stackup.barrel_mm(*span)))


def _where(
    subject: Subject, plus: LegRoute, minus: LegRoute, mismatch: float
) -> tuple[float, tuple[Place, Place]] | None:
    """How much of the difference arises on the shortest stretch that makes most of it [mm], and where that lies.

    The legs are compared at both ends of each stretch where they run side by side: the point on plus against the
    nearest point on minus, each measured from its own source end.
    """
    profile = subject.geometry.profile_plus
    if profile is None or not profile.coupled.any():
        return None
    rows = np.repeat(np.flatnonzero(profile.coupled), 2)
    points = profile.start[rows].copy()
    points[1::2] = profile.end[rows[1::2]]
    along = _length_to(plus.pieces, profile.piece[rows], points)
    running = along - _length_to(minus.pieces, profile.other[rows], points)
    along = np.concatenate([[0.0], np.maximum.accumulate(along), [plus.length_mm]])
    running = np.sign(mismatch) * np.concatenate([[0.0], running, [plus.length_mm - minus.length_mm]])
    stretch = steepest_stretch(along, running, MOST * abs(mismatch))
    if stretch is None:
        return None
    points = np.vstack([plus.pieces.start[:1], points, plus.pieces.end[-1:]])
    layers = profile.layer[rows][[0, *range(len(rows)), -1]]
    first, last = (place(subject.board, int(layers[one]), *points[one]) for one in stretch)
    return float(running[stretch[1]] - running[stretch[0]]), (first, last)


def _length_to(pieces: Pieces, row: Ints, points: Floats) -> Floats:
    """Length [mm] from the leg's source end to the point of piece `row` nearest each of `points` (k, 2)."""
    lengths = np.nan_to_num(pieces.length)
    before = np.concatenate([[0.0], np.cumsum(lengths)])[row]
    start, end, centre, sweep = pieces.start[row], pieces.end[row], pieces.centre[row], pieces.sweep[row]
    chord = end - start
    square = np.maximum((chord**2).sum(axis=1), TOLERANCE**2)
    straight = ((points - start) * chord).sum(axis=1) / square
    turned = np.arctan2(*(points - centre).T[::-1]) - np.arctan2(*(start - centre).T[::-1])
    full = np.where(sweep == 0, 1.0, sweep)
    # The angle counted in the arc's own direction, from −π so that a point just before the start is not a full turn on.
    forward = (np.sign(full) * turned + np.pi) % (2 * np.pi) - np.pi
    forward = np.where(forward < -(2 * np.pi - np.abs(full)) / 2, forward + 2 * np.pi, forward)
    share = np.where(sweep == 0, straight, forward / np.abs(full))
    result: Floats = before + np.clip(share, 0.0, 1.0) * lengths[row]
    return result


RULE = Rule(
    summary="the legs differ in length",
    unit="mm",
    quantities={"most": "length"},
    required=("most",),
    judge=judge,
    timed=("most",),
)
