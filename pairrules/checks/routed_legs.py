"""What every rule asks of a pair before it can judge: whether its legs are known from end to end."""

from __future__ import annotations

from pairrules.checks.rule import Subject, Undecided
from pairrules.geometry.pair_geometry import LegRoute


def legs(subject: Subject) -> tuple[tuple[str, LegRoute], ...]:
    """The legs whose route is known, by name, plus first."""
    named = (("plus", subject.geometry.plus), ("minus", subject.geometry.minus))
    return tuple((name, leg) for name, leg in named if leg is not None)


def both_legs(subject: Subject) -> tuple[LegRoute, LegRoute] | Undecided:
    """Both routes, or what is missing."""
    plus, minus = subject.geometry.plus, subject.geometry.minus
    if plus is None or minus is None:
        return unrouted(subject)
    return plus, minus


def unrouted(subject: Subject) -> Undecided:
    """Why a figure of the whole route is unknown, in the words of the stage that found it."""
    geometry, link = subject.geometry, subject.link
    reasons = link.missing or geometry.missing
    if reasons:
        return Undecided(missing=reasons[0].rstrip("."))
    if geometry.routed == "none":
        return Undecided(missing="neither leg has copper in the file")
    broken = [name for name, leg in (("plus", geometry.plus), ("minus", geometry.minus)) if leg is None]
    if broken:
        return Undecided(missing=f"{' and '.join(broken)} cannot be followed from end to end")
    return Undecided(missing="the spacing of the legs is not known")
