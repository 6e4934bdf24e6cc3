"""The load's common-mode impedance is too low for its source's imbalance.

What it judges
    The lesser of the legs' load impedances in common mode (resistance and capacitance to reference together) at each
    frequency of the class, against what the difference of the source resistances calls for.

Why it matters
    Source imbalance is given from outside, be it contacts, wires or sensors; a high common-mode impedance at the load
    is what makes it harmless.

Formula
    load_ohm [ohm] ≥ ΔR · 10^(rejection/20), and ≥ least [ohm] where given. ΔR is |plus − minus| of the source
    resistances [ohm]; where these are equal, twice the class's source tolerance times their mean.

Source
    Ott, "Electromagnetic Compatibility Engineering", chapter 4 (from memory): ΔZs/Zc.

What to do
    Buffer the inputs (instrumentation amplifier), or couple them by a transformer; raise bias resistors; lower input
    capacitances.

Example
    10 ohm of imbalance, rejection 60 dB: 10 kohm a leg are needed; 8 kohm is flagged.
"""

from __future__ import annotations

import math

from pairrules.balance.pair_electrical import PairElectrical
from pairrules.checks.electrical_figures import figures, hertz, lacking, ohms, wanted_points
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts
from pairrules.result import Finding
from pairrules.settings.limit import Limit

_NO_LOAD = "the pair's class gives no load"


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the load's impedance with what the source's imbalance calls for, and with `least`."""
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    points = wanted_points(subject, electrical)
    if isinstance(points, Undecided):
        return points
    if any(math.isnan(one.load_ohm) for one in points):
        return lacking(electrical, "balance", _NO_LOAD)
    needed, because = limit.quantities.get("least", 0.0), ""
    unknown = None
    if "rejection" in limit.quantities:
        difference = _source_difference(subject, electrical)
        if isinstance(difference, Undecided):
            unknown = difference
        else:
            rejection = limit.quantities["rejection"]
            called_for = difference * 10 ** (rejection / 20)
            if called_for > needed:
                needed = called_for
                because = f" for {rejection:.4g} dB with sources {ohms(difference)} apart"
    worst = min(points, key=lambda one: one.load_ohm)
    if worst.load_ohm >= needed * (1 - TOLERANCE):
        return unknown or ()
    measured, required = amounts(worst.load_ohm, needed, "ohm")
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=worst.load_ohm,
            limit=needed,
            unit="ohm",
            message=f"a leg of the load has {measured} to reference at {hertz(worst.frequency_hz)}; "
            f"{required} are required{because}",
            advice=_advice(needed),
            source=limit.source,
        ),
    )


def _source_difference(subject: Subject, electrical: PairElectrical) -> float | Undecided:
    """By how much the source resistances differ [ohm]."""
    if electrical.source_ohm is None:
        return lacking(electrical, "balance", "the pair's class gives no source")
    plus, minus = electrical.source_ohm
    if abs(plus - minus) > TOLERANCE:
        return abs(plus - minus)
    source = None if subject.klass is None else subject.klass.source
    tolerance = None if source is None else source.values.get("tolerance")
    if not tolerance:
        return Undecided(missing="the source's legs are given as equal and without a tolerance")
    return tolerance * (plus + minus)


def _advice(needed: float) -> str:
    return (
        f"raise each leg's impedance to reference to {ohms(needed)}: buffered inputs of an instrumentation amplifier "
        "or a transformer-coupled input would meet it"
    )


RULE = Rule(
    summary="the load's common-mode impedance is too low",
    unit="ohm",
    quantities={"rejection": "ratio", "least": "resistance"},
    required=("rejection", "least"),
    judge=judge,
    models=("balance",),
)
