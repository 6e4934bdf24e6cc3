"""What every rule asks of a pair before it can judge: whether its legs are known from end to end."""

from __future__ import annotations

import numpy as np

from pairrules.checks.rule import Subject, Undecided
from pairrules.geometry.pair_geometry import LegRoute
from pairrules.pairing.link import Hop


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


def has_copper(subject: Subject, hops: tuple[Hop, ...]) -> bool:
    """Whether a leg has any track, via or filled copper on its nets; its pads alone are none."""
    board, nets = subject.board, [hop.net for hop in hops]
    if np.isin(board.tracks.net, nets).any() or np.isin(board.vias.net, nets).any():
        return True
    return any(area.net in nets for area in board.areas)
