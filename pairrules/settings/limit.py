"""A limit as a class of pairs holds it for one rule, its quantities in the units of `board.units.DIMENSIONS`."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

TIMES = ("rise_time", "unit_interval")
"""What of a class a limit may be a share of."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Timed:
    """An amount that is said as a time: `amount` in ps, or where `of` names one of `TIMES` a share of that."""

    amount: float
    of: str = ""

    @property
    def said(self) -> str:
        """In words: "20 ps", "5 % of rise_time"."""
        return f"{self.amount * 100:.6g} % of {self.of}" if self.of else f"{self.amount:.6g} ps"


@dataclass(frozen=True, slots=True, kw_only=True)
class RuleForm:
    """What settings may say of one rule.

    Parameters
    ----------
    quantities: key ("most", "least", "for", ...) to its dimension (a key of `board.units.DIMENSIONS`).
    required: keys of which at least one must be there.
    timed: keys that may also be said as a time or as a share of one of `TIMES`.
    """

    quantities: Mapping[str, str]
    required: tuple[str, ...]
    timed: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Limit:
    """One rule's limit.

    Parameters
    ----------
    rule: the rule's name. severity: "blocker", "review" or "note".
    quantities: key to value in the dimension's unit.
    source: where the limit comes from, as its file says. place: file and line it was read at.
    timed: key to a time that has yet to be put in the dimension's unit, since only the pair tells how.
    severity_place: file and line of the severity where that is another, "default" where no file says one.
    """

    rule: str
    severity: str
    quantities: Mapping[str, float]
    source: str
    place: str
    timed: Mapping[str, Timed] = field(default_factory=dict)
    severity_place: str = ""
