"""The link rejects too little of the common mode.

What it judges
    `rejection_db` of the balance: what of the common mode all causes together turn into signal, referred to the link's
    input, the receiver's own rejection included where it is known; at each frequency of the class.

Why it matters
    It is what the disturbed signal shows: a rejection of 80 dB leaves a ten-thousandth of the common mode in it.

Formula
    −20 log(|conversion|/|A_d| + 10^(−R/20)) [dB] ≥ least [dB] at each frequency; A_d the link's differential gain, R
    the receiver's own rejection [dB]. The least of all frequencies is told.

Source
    Adding of causes: Pallàs-Areny and Webster, IEEE Trans. IM 40 (1991) 669 (from memory). How much is needed follows
    from the signal and its disturbance, not from a standard.

What to do
    Mend the greatest cause first: halving any other changes little. The value that would do is found by solving the
    link again with it changed, whichever leg has more.

Example
    5 V of common mode on a bridge of 20 mV full scale, 80 dB: 0.5 mV, 2.5 % of full scale; with least 100 dB flagged.
"""

from __future__ import annotations

from pairrules.balance.pair_electrical import BalanceAt
from pairrules.balance.remedies import REJECTION
from pairrules.checks.balance_advice import Advice, solved_advice
from pairrules.checks.cause_balance import EQUAL, greatest_cause
from pairrules.checks.electrical_figures import figures, hertz, lacking, wanted_points
from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts
from pairrules.result import Finding, Place
from pairrules.settings.limit import Limit


def judge(subject: Subject, limit: Limit) -> tuple[Finding, ...] | Undecided:
    """Compare the rejection with `least` at each frequency of the class."""
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    points = wanted_points(subject, electrical)
    if isinstance(points, Undecided):
        return points
    least = limit.quantities["least"]
    known = [(one.rejection_db, one) for one in points if one.rejection_db is not None]
    if known:
        rejection, worst = min(known, key=lambda found: found[0])
        if rejection < least - TOLERANCE:
            asked = {one.frequency_hz: least for _, one in known}
            return (_finding(limit, rejection, worst, solved_advice(subject, electrical, asked, figure=REJECTION)),)
    if len(known) == len(points):
        return ()
    lost = next(one for one in points if one.rejection_db is None)
    return lacking(electrical, "balance", f"the rejection at {hertz(lost.frequency_hz)} is not known")


def _finding(limit: Limit, rejection: float, worst: BalanceAt, solved: Advice | None) -> Finding:
    least = limit.quantities["least"]
    measured, required = amounts(rejection, least, "dB")
    spread = ""
    if worst.worst_db is not None and worst.total_db is not None and worst.worst_db > worst.total_db + TOLERANCE:
        spread = f"; tolerances may raise the conversion by {worst.worst_db - worst.total_db:.1f} dB more"
    cause = greatest_cause(worst)
    at: tuple[Place, ...] = ()
    if solved is not None:
        said, at = solved
        advice = f"the {cause[0]} converts most ({cause[1]:.1f} dB); {said}" if cause else said
    elif cause is None:
        advice = "find out which of source, tracks, cable and load is unbalanced: none of their shares is known"
    elif worst.conversion_loss_db is not None and worst.conversion_loss_db >= least:
        advice = "take a receiver of higher rejection: the link before it would do"
    else:
        name, figure = cause
        advice = f"begin with the {name}, which converts most ({figure:.1f} dB): {EQUAL[name]}"
    return Finding(
        rule=limit.rule,
        severity=limit.severity,
        measured=rejection,
        limit=least,
        unit="dB",
        message=f"the link rejects {measured} at {hertz(worst.frequency_hz)}; {required} are required{spread}",
        advice=advice,
        at=at,
        source=limit.source,
    )


RULE = Rule(
    summary="the link rejects too little", unit="dB", quantities={"least": "ratio"}, required=("least",), judge=judge
)
