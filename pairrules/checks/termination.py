"""The pair's termination is missing, has another value than its impedance, or stands too far away.

What it judges
    The resistor between the legs, or two of them that meet in a middle net, at the load. Where the board has none
    there, the resistance that the class's load has between its legs counts.

Why it matters
    What the end does not take up runs back as a reflection, and a termination far from the load leaves a stub behind
    it.

Formula
    |R − Z| / Z ≤ tolerance, Z = impedance_diff_ohm [ohm], R the resistors at the load in parallel [ohm]; track length
    from the termination to the load ≤ most [mm]. Without `most` a termination is at the load where it stands nearer to
    the load than to the source. ρ = (R − Z)/(R + Z).

Source
    Reflection at an end: textbook (from memory). How near is near enough follows from the edge: common practice, no
    source.

What to do
    Fit a resistor of the pair's impedance between the legs right at the load's pins.

Example
    120 ohm at a pair of 98 ohm, tolerance 15 %: 22.4 % off, flagged.
"""

from __future__ import annotations

import math

from pairrules.balance.pair_electrical import PairElectrical, Termination
from pairrules.checks.electrical_figures import figures, lacking, ohms
from pairrules.checks.leg_parts import spot_of
from pairrules.checks.routed_legs import both_legs
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts
from pairrules.result import Finding
from pairrules.settings.limit import Limit
from pairrules.settings.network_models import LoadSpec


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Find the termination at the load, then compare its place and its value."""
    legs = both_legs(subject)
    if isinstance(legs, Undecided):
        return legs
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    if "terminations" in electrical.missing:
        return lacking(electrical, "terminations", "")
    most = limit.quantities.get("most", math.inf)
    halves = [one for one in electrical.terminations if one.to_load_mm <= one.to_source_mm + TOLERANCE]
    near = [
        one for one in (electrical.terminations if most < math.inf else halves) if one.to_load_mm <= most + TOLERANCE
    ]
    if near:
        refs = ", ".join(_refs(subject, one) for one in near)
        unwritten = next((one for one in near if one.resistance is None), None)
        if unwritten is not None:
            return Undecided(missing=f"the value of the termination {_refs(subject, unwritten)} is not known")
        conductance = math.fsum(1 / one.resistance for one in near if one.resistance)
        resistance = 1 / conductance if conductance else 0.0
        return _judge_value(subject, limit, electrical, resistance, refs, near)
    # A resistor in the load's half of the pair is its termination, however far off; what the class says of the load
    # stands in only where the board has none.
    load = None if subject.klass is None else subject.klass.load
    inside = math.inf if load is None else _between_legs(load)
    if math.isfinite(inside) and not halves:
        impedance = electrical.impedance_diff_ohm
        if impedance is None:
            return lacking(electrical, "sections", "the pair's impedance is not known")
        if inside <= _ENDS * impedance:
            return _judge_value(subject, limit, electrical, inside, "the load itself", [])
    return (_missing(subject, limit, electrical, inside),)


_ENDS = 10.0
"""An input of more than so many times the pair's impedance is no termination: it reflects over eight tenths."""


def _between_legs(load: LoadSpec) -> float:
    """Resistance [ohm] that a load of the settings has from leg to leg; inf where it has none."""
    values = load.values
    if load.kind == "transformer":
        return values.get("resistance", math.inf)
    conductance = math.fsum(1 / values[key] for key in ("across.resistance", "across") if values.get(key))
    # Both legs' resistances to reference lie in series between the legs.
    legs = [values.get("plus.resistance"), values.get("minus.resistance")]
    if "resistance" in values:
        legs = [values["resistance"], values["resistance"]]
    if legs[0] is not None and legs[1] is not None:
        conductance += 1 / (legs[0] + legs[1])
    return 1 / conductance if conductance else math.inf


def _refs(subject: Subject, one: Termination) -> str:
    return " and ".join(subject.board.parts[part].ref for part in one.parts)


def _missing(subject: Subject, limit: Limit, electrical: PairElectrical, inside: float) -> Finding:
    impedance = electrical.impedance_diff_ohm
    value = "the pair's impedance" if impedance is None else f"about {impedance:.0f} ohm"
    load = subject.board.parts[subject.link.load].ref if subject.link.load >= 0 else "the load"
    fit = f"fit {value} between the legs right at {load}"
    if not electrical.terminations:
        own = f", which has {ohms(inside)} between the legs" if math.isfinite(inside) else ""
        return _finding(limit, f"nothing terminates the pair at {load}{own}", fit, subject, [])
    nearest = min(electrical.terminations, key=lambda one: one.to_load_mm)
    refs = _refs(subject, nearest)
    most = limit.quantities.get("most")
    measured, said = amounts(nearest.to_load_mm, most or 0.0, "mm")
    bound = "it stands nearer to the source" if most is None else f"{said} is allowed"
    message = f"the termination {refs} stands {measured} from {load}; {bound}"
    return _finding(limit, message, f"move {refs} to {load}, or {fit}", subject, [nearest])


def _judge_value(
    subject: Subject,
    limit: Limit,
    electrical: PairElectrical,
    resistance: float,
    what: str,
    parts: list[Termination],
) -> tuple[Finding, ...] | Undecided:
    tolerance = limit.quantities.get("tolerance")
    if tolerance is None:
        return ()
    impedance = electrical.impedance_diff_ohm
    if impedance is None:
        return lacking(electrical, "sections", "the pair's impedance is not known")
    share = abs(resistance - impedance) / impedance
    if share <= tolerance + TOLERANCE:
        return ()
    measured, allowed = amounts(100 * share, 100 * tolerance, "%")
    finding = _finding(
        limit,
        f"{what} ends the pair of {impedance:.1f} ohm with {ohms(resistance)}, {measured} off; {allowed} is allowed",
        f"fit about {impedance:.0f} ohm between the legs at the load, or draw the pair for {ohms(resistance)}",
        subject,
        parts,
        measured=100 * share,
        allowed=100 * tolerance,
    )
    return (finding,)


def _finding(
    limit: Limit,
    message: str,
    advice: str,
    subject: Subject,
    terminations: list[Termination],
    *,
    measured: float | None = None,
    allowed: float | None = None,
) -> Finding:
    return Finding(
        rule=limit.rule,
        severity=limit.severity,
        measured=measured,
        limit=allowed,
        unit="%",
        message=message,
        advice=advice,
        at=tuple(place for one in terminations for part in one.parts for place in spot_of(subject.board, part)),
        source=limit.source,
    )


RULE = Rule(
    summary="the pair is not terminated as it should be",
    unit="%",
    quantities={"tolerance": "share", "most": "length"},
    required=("tolerance", "most"),
    judge=judge,
    models=("parts",),
)
