"""The legs do not run on the same layers.

What it judges
    For each copper layer how much more track one leg has on it than the other, less what it is longer anyway; a layer
    that one leg does not use at all counts whole. The greatest amount is judged.

Why it matters
    On another layer a leg sees other dielectric and other reference copper: it runs at another speed and impedance, and
    the other leg does not run beside it.

Formula
    With p and m the track lengths of plus and minus on a layer [mm], d = p − m, and D the sum of d over the layers: the
    amount is |d| where p or m is 0 but both legs have track, |d| − |D| where d and D have one sign, |d| otherwise. The
    greatest ≤ most [mm]. A leg that is merely longer, on the same layer, is so judged by `leg-length` alone.

Source
    Common practice, no source.

What to do
    Let both legs change layer at the same place.

Example
    plus 30 mm on TOP and 10 mm on BOTTOM, minus 40 mm on TOP, most 1.0 mm: 10.00 mm > 1.00 mm, flagged.
"""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np

from pairrules.checks.routed_legs import both_legs
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts, layer_name, place
from pairrules.geometry.pair_geometry import TRACK, LegRoute
from pairrules.result import Finding, Place
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the legs' track lengths layer by layer."""
    found = both_legs(subject)
    if isinstance(found, Undecided):
        return found
    plus, minus = found
    on_plus, on_minus = dict(plus.layers), dict(minus.layers)
    differences = _differences(on_plus, on_minus)
    most = limit.quantities["most"]
    # On a tie the layer that one leg uses alone explains more than the one it is missing from.
    worst = max(
        differences,
        key=lambda n: (round(abs(differences[n]), 6), n not in on_plus or n not in on_minus, -n),
        default=-1,
    )
    if worst < 0 or abs(differences[worst]) <= most + TOLERANCE:
        return ()
    longer, shorter, leg = ("plus", "minus", plus) if differences[worst] > 0 else ("minus", "plus", minus)
    layer = layer_name(subject.board, worst)
    measured, allowed = amounts(abs(differences[worst]), most, "mm")
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=abs(differences[worst]),
            limit=most,
            unit="mm",
            message=f"{longer} runs {measured} more on {layer} than {shorter}; {allowed} is allowed",
            advice=f"let both legs change layer at the same place, so that {shorter} runs beside {longer} on {layer}",
            at=_where(subject, leg, worst),
            source=limit.source,
        ),
    )


def _differences(on_plus: Mapping[int, float], on_minus: Mapping[int, float]) -> dict[int, float]:
    """What plus has more on each layer [mm], less what it is longer in all; negative where minus has more."""
    total = math.fsum(on_plus.values()) - math.fsum(on_minus.values())
    found = {}
    for layer in sorted({*on_plus, *on_minus}):
        plus, minus = on_plus.get(layer, 0.0), on_minus.get(layer, 0.0)
        own = plus - minus
        if plus and minus and own * total > 0:
            own = math.copysign(max(abs(own) - abs(total), 0.0), own)
        found[layer] = own
    return found


def _where(subject: Subject, leg: LegRoute, layer: int) -> tuple[Place, ...]:
    """Where the leg's track on the layer begins and ends."""
    rows = np.flatnonzero((leg.pieces.kind == TRACK) & (leg.pieces.layer == layer))
    if not len(rows):
        return ()
    first, last = leg.pieces.start[rows[0]], leg.pieces.end[rows[-1]]
    return place(subject.board, layer, first[0], first[1]), place(subject.board, layer, last[0], last[1])


RULE = Rule(
    summary="the legs run on different layers",
    unit="mm",
    quantities={"most": "length"},
    required=("most",),
    judge=judge,
    models=("routes",),
)
