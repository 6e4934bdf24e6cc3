"""What got worse, better, appeared and vanished between two results, pair by pair."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

from pairrules.comparison.findings_matched import FindingChange, findings_matched
from pairrules.comparison.pairs_matched import Matched, matched
from pairrules.comparison.rounding import WITHIN_REACH, step
from pairrules.result import BoardSummary, Measures, PairResult, Result

_SMALL_IS_GOOD = frozenset(
    {
        "length_mismatch_mm",
        "delay_mismatch_ps",
        "apart_mm",
        "loop_area_mm2",
        "stub_plus_mm",
        "stub_minus_mm",
        "reference_uncovered_mm",
        "resistance_mismatch_ohm",
        "capacitance_mismatch_pf",
        "inductance_mismatch_nh",
    }
)
"""Figures that say how far the legs are from balance, sign apart; of the others only a limit knows what is good."""

_UNITS = {"mm": "mm", "mm2": "mm2", "ps": "ps", "ohm": "ohm", "pf": "pF", "nh": "nH"}
_ROUTED = ("none", "partial", "complete")


@dataclass(frozen=True, slots=True, kw_only=True)
class FigureChange:
    """A figure then and now, in the unit its name ends with.

    Parameters
    ----------
    figure: its name in the result. frequency_hz: of a balance figure, else `None`.
    change: "worse", "better", or "changed" where only a limit could tell, or where it is unknown on one side.
    """

    figure: str
    frequency_hz: float | None
    change: str
    old: float | None
    new: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class PairChange:
    """One pair then and now.

    Parameters
    ----------
    name, old_name: in the new and the old result, "" where it is not there. matched_by: what told they are one.
    change: "worse", "better", "both", "changed" (neither), "same", "appeared", "vanished".
    worse: whether something got worse; of a pair that appeared, whether it has findings; of one that vanished, whether
        a leg is left without the other.
    old_verdict, new_verdict: "" where the pair is not there. findings: all but those that are the same.
    notes: what else got worse or better, as (change, sentence).
    """

    name: str
    old_name: str
    matched_by: str
    change: str
    worse: bool
    old_verdict: str
    new_verdict: str
    findings: tuple[FindingChange, ...] = ()
    figures: tuple[FigureChange, ...] = ()
    notes: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Comparison:
    """Two results held against each other: pairs in the new one's order, then those that vanished."""

    old: BoardSummary
    new: BoardSummary
    pairs: tuple[PairChange, ...]

    @property
    def worse(self) -> bool:
        """Whether anything got worse."""
        return any(pair.worse for pair in self.pairs)

    @property
    def summary(self) -> dict[str, int]:
        """How many pairs there are of each change."""
        changes = [pair.change for pair in self.pairs]
        return {c: changes.count(c) for c in ("worse", "better", "both", "changed", "same", "appeared", "vanished")}


def compare(old: Result, new: Result) -> Comparison:
    """What changed between two results, rounding apart (`rounding.step`)."""
    pairs = tuple(_pair(match, new) for match in matched(old.pairs, new.pairs))
    return Comparison(old=old.board, new=new.board, pairs=pairs)


def with_baseline(old: Result, new: Result) -> Result:
    """The new result, its findings marked "new", "worse" or "unchanged" beside the old; verdicts stay as they are."""
    names = {"appeared": "new", "worse": "worse"}
    pairs = []
    for match in matched(old.pairs, new.pairs):
        if match.new is None:
            continue
        changes = findings_matched(() if match.old is None else match.old.findings, match.new.findings)
        marked = [
            replace(change.new, baseline=names.get(change.change, "unchanged"))
            for change in changes
            if change.new is not None
        ]
        pairs.append(replace(match.new, findings=tuple(marked)))
    return replace(new, pairs=tuple(pairs))


def _pair(match: Matched, result: Result) -> PairChange:
    old, new = match.old, match.new
    if new is None:
        assert old is not None
        halves = sorted(set(result.unpaired) & {old.plus, old.minus, *old.nets_plus, *old.nets_minus})
        notes = tuple(("worse", f"{net} is left without its other leg") for net in halves)
        return PairChange(
            name="",
            old_name=old.name,
            matched_by="",
            change="vanished",
            worse=bool(halves),
            old_verdict=old.verdict,
            new_verdict="",
            notes=notes,
        )
    findings = findings_matched(() if old is None else old.findings, new.findings)
    if old is None:
        return PairChange(
            name=new.name,
            old_name="",
            matched_by="",
            change="appeared",
            worse=any(not finding.waived for finding in new.findings),
            old_verdict="",
            new_verdict=new.verdict,
            findings=findings,
        )
    undecided = {one.rule for one in new.unjudged}
    # A finding whose rule cannot judge any more is not gone.
    told = tuple(
        one for one in findings if one.change != "same" and not (one.old and not one.new and one.old.rule in undecided)
    )
    figures, notes = tuple(_figures(old, new)), tuple(_notes(old, new))
    up = {one.change for one in told} | {one.change for one in figures} | {change for change, _ in notes}
    worse = any(one.change in {"appeared", "worse"} and not (one.new and one.new.waived) for one in told)
    worse = worse or any(one.change == "worse" for one in figures) or any(change == "worse" for change, _ in notes)
    better = bool({"better", "vanished"} & up)
    plain = "both" if worse and better else "worse" if worse else "better" if better else "changed" if up else "same"
    return PairChange(
        name=new.name,
        old_name=old.name,
        matched_by=match.by,
        change=plain,
        worse=worse,
        old_verdict=old.verdict,
        new_verdict=new.verdict,
        findings=told,
        figures=figures,
        notes=notes,
    )


def _notes(old: PairResult, new: PairResult) -> Iterator[tuple[str, str]]:
    if old.routed != new.routed:
        change = "worse" if _ROUTED.index(new.routed) < _ROUTED.index(old.routed) else "better"
        yield change, f"its route is {new.routed}, was {old.routed}"
    before = {one.rule for one in old.unjudged}
    for one in new.unjudged:
        if one.rule not in before:
            yield "worse", f"{one.rule} cannot be judged any more: {one.missing}"
    after = {one.rule for one in new.unjudged}
    for one in old.unjudged:
        if one.rule not in after:
            yield "better", f"{one.rule} can be judged now"


def _figures(old: PairResult, new: PairResult) -> Iterator[FigureChange]:
    for figure in Measures.__dataclass_fields__:
        before, now = getattr(old.measures, figure), getattr(new.measures, figure)
        unit = "mm within reach" if figure in WITHIN_REACH else _UNITS.get(figure.rpartition("_")[2], "")
        change = _figure_change(before, now, unit, small=figure in _SMALL_IS_GOOD)
        if change:
            yield FigureChange(figure=figure, frequency_hz=None, change=change, old=before, new=now)
    rows = {point.frequency_hz: point for point in old.balance}
    for point in new.balance:
        other = rows.get(point.frequency_hz)
        if other is None:
            continue
        # Rejection is what counts; where it is unknown, conversion is, which is better the smaller it is.
        figure = "rejection_db" if point.rejection_db is not None or other.rejection_db is not None else "total_db"
        before, now = getattr(other, figure), getattr(point, figure)
        if before is None or now is None:
            change = "" if before is now else "changed"
        else:
            more = step(before, now, "dB") * (1 if figure == "total_db" else -1)
            change = "worse" if more > 0 else "better" if more < 0 else ""
        if change:
            yield FigureChange(figure=figure, frequency_hz=point.frequency_hz, change=change, old=before, new=now)


def _figure_change(old: float | None, new: float | None, unit: str, *, small: bool) -> str:
    """How a figure changed, "" where it did not."""
    if old is None or new is None:
        return "" if old is new else "changed"
    if small:
        more = step(abs(old), abs(new), unit)
        return "worse" if more > 0 else "better" if more < 0 else ""
    return "changed" if step(old, new, unit) else ""
