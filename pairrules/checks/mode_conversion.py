"""The pair converts between common and differential mode more than its mask allows.

What it judges
    `conversion_loss_db` of the balance: how far below the link's differential gain its conversion lies, the receiver's
    own left out; at each frequency within the class's mask, or at each frequency against a flat `least`.

Why it matters
    Interface standards give such masks because converted common mode is received as noise, and converted signal
    radiates from the cable.

Formula
    −20 log(|conversion|/|A_d|) [dB] ≥ mask(f) [dB], the mask straight over log f between its points, and ≥ least [dB]
    where given. The worst margin of all frequencies is told.

Source
    Masks: the interface's standard, named in the rule set. Mixed-mode parameters: Bockelman and Eisenstadt, IEEE Trans.
    MTT 43 (1995) (from memory). A mask for a whole port or cable segment leaves a board only part of what it allows.

What to do
    Equalise the legs where the tracks convert most, or see to source and load where these do.

Example
    43 dB at 20 MHz falling to 23 dB at 200 MHz asks 32.6 dB at 66 MHz; 30.0 dB there is flagged.
"""

from __future__ import annotations

import math

from pairrules.balance.conversion import FLOOR_DB
from pairrules.balance.load_models import rejection_at
from pairrules.balance.pair_electrical import BalanceAt
from pairrules.balance.remedies import LOSS
from pairrules.checks.balance_advice import solved_advice
from pairrules.checks.cause_balance import greatest_cause
from pairrules.checks.electrical_figures import figures, hertz, lacking, most_tilted
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts, spot
from pairrules.result import Finding, Place
from pairrules.settings.limit import Limit

_EDGE = 1e-9
"""Relative: a frequency this near an end of the mask lies within it."""


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the conversion loss with mask and `least`."""
    mask = () if subject.klass is None else subject.klass.mask
    flat = limit.quantities.get("least")
    if not mask and flat is None:
        return Undecided(missing="neither the pair's class has a mask nor the limit a least ratio")
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    if not electrical.balance:
        return lacking(electrical, "balance", "the balance of the link is not known")
    lost, worst = None, None
    required_db: dict[float, float] = {}
    for point in electrical.balance:
        asked = [] if flat is None else [flat]
        at = point.frequency_hz
        if mask and mask[0][0] * (1 - _EDGE) <= at <= mask[-1][0] * (1 + _EDGE):
            asked.append(float(rejection_at(mask, at)[0]))
        if not asked:
            continue
        loss = _loss(point)
        if loss is None:
            lost = lost or point
            continue
        required_db[at] = max(asked)
        if worst is None or loss - max(asked) < worst[0]:
            worst = (loss - max(asked), max(asked), point)
    if worst is not None and worst[0] < -TOLERANCE:
        _, required, point = worst
        loss = required + worst[0]
        # A mask between its points is no whole figure; two decimals show it well enough.
        measured, allowed = amounts(loss, round(required, 2), "dB")
        where = most_tilted(subject, electrical)
        places: tuple[Place, ...] = () if where is None else (where,)
        cause = greatest_cause(point)
        advice = "make the legs alike in length, width, surroundings and parts"
        if cause is not None and cause[0] != "trace":
            advice = f"begin with the {cause[0]}, which converts most ({cause[1]:.1f} dB), then {advice}"
        solved = solved_advice(subject, electrical, required_db, figure=LOSS)
        if solved is not None:
            said, places = solved
            advice = f"the {cause[0]} converts most ({cause[1]:.1f} dB); {said}" if cause else said
        elif where is not None:
            advice += f"; their capacitances differ most from {spot(subject.board, where)} on"
        return (
            Finding(
                rule=limit.rule,
                severity=limit.severity,
                measured=loss,
                limit=required,
                unit="dB",
                message=f"conversion lies {measured} below the signal at {hertz(point.frequency_hz)}; "
                f"{allowed} are required",
                advice=advice,
                at=places,
                source=limit.source,
            ),
        )
    if not required_db and lost is None:
        return Undecided(missing="the balance is known at no frequency within the mask of the pair's class")
    if lost is not None:
        return lacking(electrical, "balance", f"the conversion loss at {hertz(lost.frequency_hz)} is not known")
    return ()


def _loss(point: BalanceAt) -> float | None:
    """The conversion loss [dB]; inf where nothing converts at all, so that there is no ratio."""
    if point.conversion_loss_db is None and point.total_db is not None and point.total_db <= FLOOR_DB + TOLERANCE:
        return math.inf
    return point.conversion_loss_db


RULE = Rule(
    summary="the pair converts between its modes",
    unit="dB",
    quantities={"least": "ratio"},
    required=(),
    judge=judge,
    models=("balance",),
)
