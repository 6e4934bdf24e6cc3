"""A leg behind a series capacitor has no direct-current path, or another one than its partner.

What it judges
    Behind the last series capacitor of each leg: the resistance of all its resistors to a reference or supply net, and
    whether the receiver itself gives a path.

Why it matters
    Without a path the input's own current charges the capacitor until the input leaves its range. With unequal paths
    the legs' load resistances differ, and the input current makes an offset.

Formula
    resistance [ohm] finite on each leg, or a path in the receiver; |a − b| / ((a + b)/2) ≤ most (a share) where given,
    a and b the legs' resistances.

Source
    Common practice, no source (amplifier handbooks).

What to do
    Add a resistor from each leg, behind its capacitor, to the bias voltage, both of one value.

Example
    plus has 100 kohm to ground behind C1, minus nothing behind C2: flagged.
"""

from __future__ import annotations

import math

from pairrules.balance.pair_electrical import BiasPath, PairElectrical
from pairrules.board.part_values import part_value
from pairrules.checks.electrical_figures import figures, lacking, ohms
from pairrules.checks.leg_parts import spot_of, told
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Look for the paths behind series capacitors, then compare them."""
    if not _capacitors(subject):
        return ()
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    if not electrical.bias:
        return lacking(electrical, "bias", "the direct-current paths behind the series capacitors are not known")
    bare = [one for one in electrical.bias if one.resistance == math.inf and not one.by_load]
    unwritten = [one for one in electrical.bias if one.resistance is None]
    if bare:
        # A leg alone without resistors is wrong whatever the receiver has; for both it depends on the receiver.
        if len(bare) == len(electrical.bias) and not _load_given(subject):
            return Undecided(
                missing="whether the receiver gives the legs behind their series capacitors a direct-current path is "
                "not known; the pair's class gives no load"
            )
        return (_bare(subject, limit, bare),)
    if unwritten:
        return Undecided(missing=_unwritten(subject, unwritten[0]))
    return _unequal(subject, limit, electrical)


def _capacitors(subject: Subject) -> bool:
    parts = subject.board.parts
    on = {part for step in subject.link.series for part in (step.plus, step.minus) if part >= 0}
    return any(part_value(parts[part].ref, parts[part].value).kind == "capacitor" for part in on)


def _load_given(subject: Subject) -> bool:
    return subject.klass is not None and subject.klass.load is not None


def _bare(subject: Subject, limit: Limit, bare: list[BiasPath]) -> Finding:
    board = subject.board
    legs = " and ".join(f"{one.leg} behind {told(board, one.capacitor)}" for one in bare)
    return Finding(
        rule=limit.rule,
        severity=limit.severity,
        measured=None,
        limit=None,
        unit="%",
        message=f"{legs} {'have' if len(bare) > 1 else 'has'} no direct-current path",
        advice="add a resistor of one value from each leg, behind its capacitor, to the bias voltage or reference",
        at=tuple(place for one in bare for place in spot_of(board, one.capacitor)),
        source=limit.source,
    )


def _unwritten(subject: Subject, path: BiasPath) -> str:
    refs = ", ".join(subject.board.parts[part].ref for part in path.parts)
    return f"the values of the resistors behind the capacitor of {path.leg} ({refs}) are not all known"


def _unequal(subject: Subject, limit: Limit, electrical: PairElectrical) -> tuple[Finding, ...] | Undecided:
    most = limit.quantities.get("most")
    values = {one.leg: one.resistance for one in electrical.bias if one.resistance is not None}
    if most is None or len(values) < 2:
        return ()
    plus, minus = values["plus"], values["minus"]
    if math.isinf(plus) and math.isinf(minus):
        return ()
    if math.isinf(plus) or math.isinf(minus):
        has, lacks = ("minus", "plus") if math.isinf(plus) else ("plus", "minus")
        return (
            Finding(
                rule=limit.rule,
                severity=limit.severity,
                measured=None,
                limit=None,
                unit="%",
                message=f"{has} has {ohms(min(plus, minus))} of resistors behind its series capacitor, {lacks} none",
                advice=f"give {lacks} the same resistors, or remove those of {has}",
                at=tuple(place for one in electrical.bias for place in spot_of(subject.board, one.capacitor)),
                source=limit.source,
            ),
        )
    share = abs(plus - minus) / ((plus + minus) / 2)
    if share <= most + TOLERANCE:
        return ()
    measured, allowed = amounts(100 * share, 100 * most, "%")
    return (
        Finding(
            rule=limit.rule,
            severity=limit.severity,
            measured=100 * share,
            limit=100 * most,
            unit="%",
            message=f"the direct-current paths behind the series capacitors differ by {measured} "
            f"(plus {ohms(plus)}, minus {ohms(minus)}); {allowed} is allowed",
            advice="give both legs resistors of one value",
            at=tuple(place for one in electrical.bias for part in one.parts for place in spot_of(subject.board, part)),
            source=limit.source,
        ),
    )


RULE = Rule(
    summary="a direct-current path is missing or unequal",
    unit="%",
    quantities={"most": "share"},
    required=(),
    judge=judge,
    models=("parts",),
)
