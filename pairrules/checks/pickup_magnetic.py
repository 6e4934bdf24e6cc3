"""A magnetic field induces too much between the legs.

What it judges
    The differential voltage that the class's uniform field (`pickup`) induces in the loop which the legs enclose, the
    heights of their layers counted in.

Why it matters
    Fields of transformers, motors and supply lines act on the loop itself: no balance rejects what they induce there.

Formula
    V = 2π f B A [V] ≤ most [V], A the vector area of the legs' closed path along the field, or its whole amount where
    the field's direction is not given. Lobes of crossing legs cancel.

Source
    Ott, "Electromagnetic Compatibility Engineering", chapter 2 (from memory). Fields: the class, such as IEC 61000-4-8.

What to do
    Bring the legs together where they run apart, or let them cross halfway.

Example
    3 A/m (3.77 µT) at 50 Hz through 1 cm²: 0.118 µV; most 0.1 µV, flagged.
"""

from __future__ import annotations

import math

from pairrules.checks.electrical_figures import figures, lacking
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.stretches import alone
from pairrules.checks.wording import amounts, spot
from pairrules.result import Finding
from pairrules.settings.limit import Limit

_MICROVOLT = 1e6
_SAME = 1e-9
"""Relative: a voltage this near its limit meets it."""


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the induced voltage with `most`."""
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    voltage, most = electrical.magnetic_v, limit.quantities["most"]
    if voltage is None:
        return lacking(electrical, "pickup", "the pair's class names no magnetic field to bear")
    if voltage <= most * (1 + _SAME):
        return ()
    measured, allowed = amounts(voltage * _MICROVOLT, most * _MICROVOLT, "µV")
    advice = "bring the legs closer together"
    if electrical.area_mm2 is not None:
        x, y, z = electrical.area_mm2
        area = math.hypot(x, y, z)
        advice = f"shrink the loop of {area:.4g} mm² to {area * most / voltage:.4g} mm²"
        if math.hypot(x, y) > abs(z):
            advice += ", which stands upright between layers: run both legs on one layer"
    profile = subject.geometry.profile_plus
    apart = () if profile is None else alone(subject.board, profile)[:1]
    advice += "".join(
        f"; the legs run apart from {spot(subject.board, s.first)} to {spot(subject.board, s.last)}" for s in apart
    )
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=voltage * _MICROVOLT,
            limit=most * _MICROVOLT,
            unit="µV",
            message=f"the field of its class induces {measured} between the legs; {allowed} is allowed",
            advice=advice,
            at=tuple(place for stretch in apart for place in (stretch.first, stretch.last)),
            source=limit.source,
        ),
    )


RULE = Rule(
    summary="a magnetic field induces too much",
    unit="µV",
    quantities={"most": "voltage"},
    required=("most",),
    judge=judge,
    models=("magnetic-pickup",),
)
