"""A limit as a class of pairs holds it for one rule, its quantities in the units of `board.units.DIMENSIONS`."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class RuleForm:
    """What settings may say of one rule.

    Parameters
    ----------
    quantities: key ("most", "least", "for", ...) to its dimension (a key of `board.units.DIMENSIONS`).
    required: keys of which at least one must be there.
    """

    quantities: Mapping[str, str]
    required: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Limit:
    """One rule's limit.

    Parameters
    ----------
    rule: the rule's name. severity: "blocker", "review" or "note".
    quantities: key to value in the dimension's unit.
    source: where the limit comes from, as its file says. place: file and line it was read at.
    """

    rule: str
    severity: str
    quantities: Mapping[str, float]
    source: str
    place: str
