"""What a rule is, what it judges, and how the rules of this folder are found."""

from __future__ import annotations

import importlib
import pkgutil
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cache

from pairrules.balance.pair_electrical import PairElectrical
from pairrules.board.board import Board
from pairrules.checks.pin_lengths import NOTHING, PinExtra
from pairrules.geometry.pair_geometry import PairGeometry
from pairrules.pairing.link import Link
from pairrules.result import Finding, Measures
from pairrules.settings.limit import Limit, RuleForm
from pairrules.settings.pair_class import PairClass


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Subject:
    """One pair with everything the earlier stages found out about it.

    Parameters
    ----------
    breakout_mm: track length at each end of each leg that rules on the gap and on running apart leave out.
    electrical: what the electrical stage found; `None` where it was not asked for.
    klass: the pair's class, `None` where it has none. reference: indices of the reference nets.
    pins: what the pins it passes add to its legs.
    """

    board: Board
    link: Link
    geometry: PairGeometry
    measures: Measures
    breakout_mm: float = 0.0
    electrical: PairElectrical | None = None
    klass: PairClass | None = None
    reference: tuple[int, ...] = ()
    pins: PinExtra = NOTHING


@dataclass(frozen=True, slots=True, kw_only=True)
class Undecided:
    """A rule could not judge. `missing` says what would have to be known, in one sentence without a full stop."""

    missing: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """A rule: set as `RULE` in a file of this folder, whose name is the rule's (`leg_length.py` is `leg-length`).

    Parameters
    ----------
    summary: what is wrong where it fires, in a few words. unit: of `Finding.measured` and `limit`, "" where none.
    quantities: what its limit may say: key to dimension. required: keys of which at least one must be given.
    judge: subject and limit to findings (empty: passed) or `Undecided`.
    timed: quantities that may also be said as a time or a share of one; `judge` gets them in their own dimension.
    models: models of `schemas.glossary` its judgement rests on, where the figures its docstring names do not tell.
    """

    summary: str
    unit: str
    quantities: Mapping[str, str]
    required: tuple[str, ...]
    judge: Callable[[Subject, Limit], tuple[Finding, ...] | Undecided]
    timed: tuple[str, ...] = ()
    models: tuple[str, ...] = ()

    @property
    def form(self) -> RuleForm:
        """What settings may say of it."""
        return RuleForm(quantities=self.quantities, required=self.required, timed=self.timed)


@cache
def all_rules() -> Mapping[str, Rule]:
    """Every rule by name, sorted."""
    package = importlib.import_module("pairrules.checks")
    found: dict[str, Rule] = {}
    for module in sorted(pkgutil.iter_modules(package.__path__), key=lambda m: m.name):
        rule = getattr(importlib.import_module(f"pairrules.checks.{module.name}"), "RULE", None)
        if isinstance(rule, Rule):
            found[module.name.replace("_", "-")] = rule
    return found
