"""The result of a check: plain frozen records, version 1 of the JSON result. `None` is unknown, with a word on why."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:  # a hundred records that only pictures and pages need
    from pairrules.drawing import Drawing, PairDrawing

RESULT_VERSION = 1
SEVERITIES = ("blocker", "review", "note")
"""Worst first."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """A place on the board, in millimetres. `layer` is "" where it is on none in particular."""

    layer: str
    x_mm: float
    y_mm: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Measures:
    """The figures of one pair, `None` where one cannot be known; definitions and models in `schemas.glossary`."""

    length_plus_mm: float | None = None
    length_minus_mm: float | None = None
    length_mismatch_mm: float | None = None
    delay_plus_ps: float | None = None
    delay_minus_ps: float | None = None
    delay_mismatch_ps: float | None = None
    gap_min_mm: float | None = None
    gap_median_mm: float | None = None
    gap_max_mm: float | None = None
    coupled_mm: float | None = None
    apart_mm: float | None = None
    loop_area_mm2: float | None = None
    net_loop_area_mm2: float | None = None
    width_plus_mm: float | None = None
    width_minus_mm: float | None = None
    vias_plus: int | None = None
    vias_minus: int | None = None
    stub_plus_mm: float | None = None
    stub_minus_mm: float | None = None
    reference_uncovered_mm: float | None = None
    impedance_diff_ohm: float | None = None
    impedance_common_ohm: float | None = None
    resistance_mismatch_ohm: float | None = None
    capacitance_mismatch_pf: float | None = None
    inductance_mismatch_nh: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class BalancePoint:
    """How much common mode turns into signal at one frequency, by cause [dB]; `None` where a cause is not modelled.

    worst_db: conversion at worst over the tolerances that are given; bound_95_db: what 95 % of drawn links keep; `None`
    where no tolerance is given.
    """

    frequency_hz: float
    source_db: float | None
    trace_db: float | None
    cable_db: float | None
    load_db: float | None
    total_db: float | None
    rejection_db: float | None
    worst_db: float | None = None
    bound_95_db: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """One rule broken by one pair.

    Parameters
    ----------
    measured, limit: in `unit`; `None` where the rule compares no number.
    message: what was measured and what is allowed. advice: what to do about it.
    source: where the limit comes from.
    baseline: beside an earlier result "new", "worse" or "unchanged" (it stood before and is no worse); else "".
    """

    rule: str
    severity: str
    measured: float | None
    limit: float | None
    unit: str
    message: str
    advice: str
    at: tuple[Place, ...] = ()
    source: str = ""
    waived: bool = False
    fingerprint: str = ""
    baseline: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Unjudged:
    """A rule that had a limit and could not judge, and what was missing."""

    rule: str
    missing: str


@dataclass(frozen=True, slots=True, kw_only=True)
class WaiverState:
    """What became of a waiver.

    Parameters
    ----------
    pair: name of the pair it is of; as the waiver has it where it is of none.
    state: "held"; or, where its finding is not waived, "expired", "changed" (the copper), "gone" (the finding), or
        "undecided" (the rule could not judge).
    why: why it does not hold and what to do, "" where it does.
    reason, who, until: as the waiver says, `until` as YYYY-MM-DD. line: of the waiver file.
    fingerprint: of the finding it was given for.
    """

    rule: str
    pair: str
    state: str
    why: str
    reason: str
    who: str
    until: str
    line: int = 0
    fingerprint: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class HeldLimit:
    """A limit that a pair was held against.

    Parameters
    ----------
    says: its quantities in words, "" where it has none. source: where it comes from.
    outcome: "kept", "broken", "waived", or "undecided" with `missing` saying why.
    measured, limit: in `unit`; `None` where the rule compares no single figure.
    """

    rule: str
    severity: str
    says: str
    outcome: str
    measured: float | None
    limit: float | None
    unit: str
    missing: str
    source: str


@dataclass(frozen=True, slots=True, kw_only=True)
class SeriesPart:
    """A part in series with the legs: its reference, value, and the leg ("plus", "minus" or "both")."""

    ref: str
    value: str
    leg: str


@dataclass(frozen=True, slots=True, kw_only=True)
class FoundPair:
    """One pair as it was found, before anything is measured. `source`, `load`: parts at its ends, "" where unknown."""

    name: str
    plus: str
    minus: str
    klass: str | None
    found_by: str
    nets_plus: tuple[str, ...]
    nets_minus: tuple[str, ...]
    source: str
    load: str
    series: tuple[SeriesPart, ...]
    missing: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class RuleInfo:
    """A rule as a report explains it.

    Parameters
    ----------
    name: the rule's. summary: what is wrong where it fires. unit: of `Finding.measured`.
    help: parts of the rule's docstring as (title, text), such as "What it judges" and "Source".
    """

    name: str
    summary: str
    unit: str
    help: tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class PairResult:
    """One pair: what it is, what was measured, what was found.

    `limits`: every limit that holds for the pair, by rule.
    `assumed`: what its electrical figures take beside what is given. `quasi_static_hz`: up to where they hold.
    `line_plus`, `line_minus`: line of the board file where that leg's copper first stands, 0 where unknown.
    `drawing`: only where it was asked for.
    `ends_plus`, `ends_minus`: pins at which that leg begins and ends, as "U1.3", sorted.
    """

    name: str
    plus: str
    minus: str
    klass: str | None
    found_by: str
    nets_plus: tuple[str, ...]
    nets_minus: tuple[str, ...]
    source: str
    load: str
    series: tuple[SeriesPart, ...]
    routed: str
    verdict: str
    measures: Measures
    balance: tuple[BalancePoint, ...] = ()
    findings: tuple[Finding, ...] = ()
    unjudged: tuple[Unjudged, ...] = ()
    missing: tuple[str, ...] = ()
    assumed: tuple[str, ...] = ()
    quasi_static_hz: float | None = None
    limits: tuple[HeldLimit, ...] = ()
    line_plus: int = 0
    line_minus: int = 0
    drawing: PairDrawing | None = None
    ends_plus: tuple[str, ...] = ()
    ends_minus: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class BoardSummary:
    """The file that was read."""

    file: str
    sha256: str
    format: str
    revision: str
    units: str
    name: str
    complete: bool
    missing: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class FoundPairs:
    """The pairs of one board, and the nets that look like half a pair."""

    board: BoardSummary
    pairs: tuple[FoundPair, ...]
    unpaired: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Result:
    """Everything a report may tell of one board.

    `rules`: every rule there is, by name. `drawing`: only where it was asked for. `settings`: the settings files by
    their names without folders, the deepest base first. `waivers`: what became of each waiver, in their file's order.
    """

    version: str
    board: BoardSummary
    pairs: tuple[PairResult, ...]
    unpaired: tuple[str, ...]
    rules: tuple[RuleInfo, ...] = ()
    drawing: Drawing | None = None
    settings: tuple[str, ...] = ()
    waivers: tuple[WaiverState, ...] = ()

    @property
    def summary(self) -> dict[str, int]:
        """How many pairs there are and how many have each verdict."""
        verdicts = [pair.verdict for pair in self.pairs]
        return {"pairs": len(verdicts)} | {v: verdicts.count(v) for v in ("pass", "flag", "waived", "undecided")}
