"""The legs pass different numbers of vias.

What it judges
    The difference of `vias_plus` and `vias_minus`: how often each leg's route goes through a plated hole to another
    layer.

Why it matters
    Each via adds length, inductance and capacitance. One leg with more of them is slower there and sees the reference
    planes differently; equal length in plan does not make up for it.

Formula
    |vias_plus − vias_minus| ≤ most (a count).

Source
    Common practice, no source.

What to do
    Give both legs the same layer changes at the same place, or keep both on one layer.

Example
    plus 2, minus 1, most 0: flagged.
"""

from __future__ import annotations

from pairrules.checks.routed_legs import both_legs
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import layer_name, place, spot
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the legs' counts of vias."""
    found = both_legs(subject)
    if isinstance(found, Undecided):
        return found
    # A pin's plated hole that the route passes is a layer change too, but no via.
    plus, minus = ([use for use in leg.vias if use.via >= 0] for leg in found)
    difference, most = abs(len(plus) - len(minus)), limit.quantities["most"]
    if difference <= most:
        return ()
    more, fewer, vias = ("plus", "minus", plus) if len(plus) > len(minus) else ("minus", "plus", minus)
    board = subject.board
    at = tuple(place(board, via.enter, via.x_mm, via.y_mm) for via in vias)
    changes = "; ".join(
        f"{spot(board, where)} to {layer_name(board, via.leave)}" for where, via in zip(at[:4], vias[:4], strict=True)
    )
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=float(difference),
            limit=most,
            unit="",
            message=f"plus passes {_vias(len(plus))}, minus {len(minus)}; a difference of {most:.0f} is allowed",
            advice=f"give {fewer} the same layer changes as {more} or take {_vias(difference)} out of {more}, "
            f"which changes layer at {changes}",
            at=at,
            source=limit.source,
        ),
    )


def _vias(count: int) -> str:
    return f"{count} via" if count == 1 else f"{count} vias"


RULE = Rule(
    summary="the legs pass different numbers of vias",
    unit="",
    quantities={"most": "count"},
    required=("most",),
    judge=judge,
)
