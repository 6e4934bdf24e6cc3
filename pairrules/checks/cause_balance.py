"""How far below the common mode one cause alone leaves the difference it makes: what the four rules on causes share."""

from __future__ import annotations

from pairrules.balance.pair_electrical import BalanceAt
from pairrules.balance.remedies import CONVERSION
from pairrules.checks.balance_advice import Advice, solved_advice
from pairrules.checks.electrical_figures import figures, hertz, wanted_points
from pairrules.checks.rule import Subject, Undecided
from pairrules.checks.wording import TOLERANCE, amounts
from pairrules.result import Finding
from pairrules.settings.limit import Limit

EQUAL = {
    "source": "make the source's two legs equal, or take a load of higher common-mode impedance",
    "trace": "make the legs alike in length, width and surroundings",
    "cable": "take a cable of less unbalance or a shorter one",
    "load": "give both legs the same impedance to reference at the load",
}
"""What to do about a cause in general, where the link is not at hand to be solved again."""


def judge_cause(subject: Subject, limit: Limit, *, cause: str, none: bool) -> tuple[Finding, ...] | Undecided:
    """Compare −`cause`_db with `least` at each frequency; the worst is told.

    Parameters: none: whether the pair's class says that the link has nothing of that cause.
    """
    electrical = figures(subject)
    if isinstance(electrical, Undecided):
        return electrical
    points = wanted_points(subject, electrical)
    if isinstance(points, Undecided):
        return points
    least = limit.quantities["least"]
    known = [(-figure, one) for one in points if (figure := conversion_db(one, cause)) is not None]
    if known:
        below, worst = min(known, key=lambda found: found[0])
        if below < least - TOLERANCE:
            asked = {one.frequency_hz: least for _, one in known}
            solved = solved_advice(subject, electrical, asked, figure=CONVERSION, cause=cause)
            return (_finding(limit, cause, below, worst, solved or (EQUAL[cause], ())),)
    if len(known) == len(points) or (none and not known):
        return ()
    lost = next(one for one in points if conversion_db(one, cause) is None)
    return Undecided(missing=f"what the {cause} converts at {hertz(lost.frequency_hz)} is not known")


def conversion_db(point: BalanceAt, cause: str) -> float | None:
    """The conversion [dB] by one cause ("source", "trace", "cable", "load")."""
    return {
        "source": point.source_db,
        "trace": point.trace_db,
        "cable": point.cable_db,
        "load": point.load_db,
    }[cause]


def greatest_cause(point: BalanceAt) -> tuple[str, float] | None:
    """The cause that converts most at this frequency, with its conversion [dB]; `None` where none is known."""
    known = [(figure, name) for name in CAUSES if (figure := conversion_db(point, name)) is not None]
    figure, name = max(known, key=lambda found: found[0], default=(0.0, ""))
    return (name, figure) if name else None


CAUSES = ("source", "trace", "cable", "load")


def _finding(limit: Limit, cause: str, below: float, worst: BalanceAt, advice: Advice) -> Finding:
    least = limit.quantities["least"]
    measured, required = amounts(below, least, "dB")
    said, at = advice
    return Finding(
        rule=limit.rule,
        severity=limit.severity,
        measured=below,
        limit=least,
        unit="dB",
        message=f"what the {cause} converts lies {measured} below the common mode at {hertz(worst.frequency_hz)}; "
        f"{required} are required",
        advice=said,
        at=at,
        source=limit.source,
    )
