"""A leg is not routed from end to end.

What it judges
    Whether the copper of each leg leads from the pad of its source end to the pad of its load end.

Why it matters
    A broken leg carries nothing, and no figure of a broken pair means anything.

Formula
    none: a leg with copper that does not lead from end to end is flagged; undecided where the file is known to lack
    copper layers, or where an end of the link is not known. A leg without any copper is left to `half-pair`, and
    undecided here.

Source
    Common practice, no source.

What to do
    Close the leg between the places named, or export all copper layers.

Example
    Track of minus ends 0.4 mm short of its pad at (30.0, 12.5): flagged with that place.
"""

from __future__ import annotations

from pairrules.checks.routed_legs import has_copper, unrouted
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import place, spot
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Flag a broken leg where the file shows all the copper there is."""
    geometry, link, board = subject.geometry, subject.link, subject.board
    if geometry.routed == "complete":
        return ()
    if geometry.routed == "none":
        return Undecided(missing="neither leg has copper in the file")
    if not geometry.broken and not link.missing:
        return unrouted(subject)
    hops = {"plus": link.hops_plus, "minus": link.hops_minus}
    for leg, chain in sorted(hops.items(), reverse=True):
        if not chain or any(not hop.start or not hop.end for hop in chain):
            return unrouted(subject) if link.missing else Undecided(missing=f"an end of {leg} is not known")
    if not board.complete:
        lacking = next((text for text in board.missing if "layer" in text), "copper layers are missing from the file")
        return Undecided(missing=f"a leg breaks off, perhaps only in the file: {lacking.rstrip('.')}")
    # A leg without any copper is no broken one: `half-pair` tells of it.
    broken = [
        leg
        for leg, route in (("plus", geometry.plus), ("minus", geometry.minus))
        if route is None and has_copper(subject, hops[leg])
    ]
    if not broken:
        return unrouted(subject)
    gaps = [gap for gap in geometry.broken if gap[0] in broken]
    at = tuple(place(board, layer, x, y) for _, layer, x, y in gaps)
    spots = "; ".join(f"{leg} at {spot(board, where)}" for (leg, *_), where in zip(gaps[:4], at[:4], strict=True))
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=None,
            limit=None,
            unit="",
            message="neither leg is routed from end to end"
            if len(broken) == 2
            else f"{broken[0]} is not routed from end to end",
            advice=f"close the copper where it breaks off: {spots}"
            if spots
            else f"close the copper of {' and '.join(broken)}",
            at=at,
            source=limit.source,
        ),
    )


RULE = Rule(
    summary="a leg is not routed from end to end",
    unit="",
    quantities={},
    required=(),
    judge=judge,
    models=("routes",),
)
