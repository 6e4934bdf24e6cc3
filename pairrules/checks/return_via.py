"""A leg changes layer without a via nearby for its return current.

What it judges
    At each via of a leg's route whose reference changes with the layer: the distance to the nearest via or plated hole
    of a reference net that joins the reference copper before it with that after it.

Why it matters
    The common mode's return current has to change planes with the leg. Without a way nearby it spreads between the
    planes, couples into other vias there and raises the common-mode impedance on one place of the way.

Formula
    distance from the leg's via to the nearest joining via [mm], centre to centre, ≤ most [mm]. Where both sides of the
    via have the same reference copper nothing has to be joined.

Source
    Common practice, no source.

What to do
    Set a via of the reference net beside each pair of signal vias, at equal distance from both legs.

Example
    From TOP over GND1 to BOTTOM over GND2, nearest ground via 4.2 mm away, most 2 mm: flagged.
"""

from __future__ import annotations

import math

from pairrules.balance.pair_electrical import LayerChange
from pairrules.checks.electrical_figures import figures, lacking
from pairrules.checks.routed_legs import both_legs
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TIE_DIGITS, TOLERANCE, amounts, layer_name, place, spot
from pairrules.result import Finding
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare each change's distance to its return via with `most`."""
    legs = both_legs(subject)
    if isinstance(legs, Undecided):
        return legs
    if not any(leg.vias for leg in legs):
        return ()
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    if "changes" in electrical.missing:
        return lacking(electrical, "changes", "")
    most = limit.quantities["most"]
    far = [one for one in electrical.changes if one.return_mm > most + TOLERANCE]
    if not far:
        if any(math.isnan(one.return_mm) for one in electrical.changes):
            return Undecided(missing="the reference copper beside a layer change is not known")
        return ()
    return (_finding(subject, limit, sorted(far, key=lambda one: -round(one.return_mm, TIE_DIGITS))),)


def _finding(subject: Subject, limit: Limit, far: list[LayerChange]) -> Finding:
    board, most, worst = subject.board, limit.quantities["most"], far[0]
    where = place(board, worst.enter, worst.x_mm, worst.y_mm)
    more = f", and at {len(far) - 1} more" if len(far) > 1 else ""
    joined = " and ".join(dict.fromkeys(layer_name(board, layer) for layer in (*worst.before, *worst.after)))
    around = f"within {most:.2f} mm of {spot(board, where)}"
    if math.isinf(worst.return_mm):
        message = f"no via joins the reference of {worst.leg} on both sides of its layer change{more}"
        message += f"; one within {most:.2f} mm is required"
    else:
        measured, allowed = amounts(worst.return_mm, most, "mm")
        message = f"the nearest return via is {measured} from a layer change of {worst.leg}{more}; {allowed} is allowed"
    advice = f"set a via of the reference net {around}" + (f" that joins {joined}" if " and " in joined else "")
    return Finding(
        rule=limit.rule,
        severity=limit.severity,
        measured=None if math.isinf(worst.return_mm) else worst.return_mm,
        limit=most,
        unit="mm",
        message=message,
        advice=advice,
        at=tuple(place(board, one.enter, one.x_mm, one.y_mm) for one in far),
        source=limit.source,
    )


RULE = Rule(
    summary="a layer change lacks its return via",
    unit="mm",
    quantities={"most": "length"},
    required=("most",),
    judge=judge,
    models=("routes", "reference-cover"),
)
