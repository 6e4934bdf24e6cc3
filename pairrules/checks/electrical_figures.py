"""What every rule on electrical figures asks first: whether they are known, and at which frequencies they count."""

from __future__ import annotations

import math

from pairrules.balance.pair_electrical import BalanceAt, PairElectrical
from pairrules.checks.rule import Subject, Undecided
from pairrules.checks.wording import place
from pairrules.result import Place

PS_PER_MM = 1e9
"""[ps/mm] in one [s/m]."""

_SAME = 1e-9
"""Relative: frequencies nearer than this are one."""


def figures(subject: Subject) -> PairElectrical | Undecided:
    """The pair's electrical figures, or that they are missing."""
    if subject.electrical is None:
        return Undecided(missing="the electrical figures were not worked out")
    return subject.electrical


def lacking(electrical: PairElectrical, group: str, otherwise: str) -> Undecided:
    """Why a figure of the group is unknown, in the words of the stage that looked for it; else `otherwise`."""
    return Undecided(missing=electrical.missing.get(group, otherwise).rstrip("."))


def ps_per_mm(electrical: PairElectrical, legs: tuple[str, ...] = ("plus", "minus")) -> float | None:
    """The legs' mean delay per length over their sections [ps/mm]; `None` where they have no section."""
    spans = {"plus": lambda one: one.plus_mm, "minus": lambda one: one.minus_mm}
    parts = [(spans[leg](one), one.delay) for leg in legs for one in electrical.sections]
    whole = math.fsum(last - first for (first, last), _ in parts)
    if not whole > 0:
        return None
    return math.fsum((last - first) * delay for (first, last), delay in parts) / whole * PS_PER_MM


def wanted_points(subject: Subject, electrical: PairElectrical) -> tuple[BalanceAt, ...] | Undecided:
    """The balance at each frequency of the class, or at all frequencies there are where the class names none."""
    if not electrical.balance:
        return lacking(electrical, "balance", "the balance of the link is not known")
    wanted = () if subject.klass is None else subject.klass.frequencies
    if not wanted:
        return electrical.balance
    found = []
    for frequency in wanted:
        at = [one for one in electrical.balance if math.isclose(one.frequency_hz, frequency, rel_tol=_SAME)]
        if not at:
            return lacking(electrical, "balance", f"the balance at {hertz(frequency)} is not known")
        found.append(at[0])
    return tuple(found)


def hertz(frequency: float) -> str:
    """A frequency in words: "62.5 MHz"."""
    for scale, prefix in ((1e9, "G"), (1e6, "M"), (1e3, "k")):
        if frequency >= scale:
            return f"{frequency / scale:.6g} {prefix}Hz"
    return f"{frequency:.6g} Hz"


def ohms(resistance: float) -> str:
    """A resistance in words: "12 kohm"."""
    for scale, prefix in ((1e6, "M"), (1e3, "k")):
        if scale <= resistance < math.inf:
            return f"{resistance / scale:.4g} {prefix}ohm"
    return f"{resistance:.4g} ohm"


def most_tilted(subject: Subject, electrical: PairElectrical) -> Place | None:
    """Where the section begins whose legs differ most in capacitance, its length counted in; `None` without any."""
    tilts = [
        (abs(one.capacitance_tilt) * (one.plus_mm[1] - one.plus_mm[0]), one)
        for one in electrical.sections
        if one.leg == "both"
    ]
    size, worst = max(tilts, key=lambda found: found[0], default=(0.0, None))
    return None if worst is None or not size else place(subject.board, worst.layer, *worst.start)
