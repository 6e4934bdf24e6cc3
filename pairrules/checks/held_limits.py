"""What each limit of a pair says and what became of it, so that a report can set figures beside limits."""

from __future__ import annotations

from collections.abc import Mapping

from pairrules.board.units import DIMENSIONS
from pairrules.checks.judge_pair import Judgement
from pairrules.checks.rule import Rule
from pairrules.result import BalancePoint, HeldLimit, Measures
from pairrules.settings.limit import Limit

_CAUSES = {
    "source-balance": "source_db",
    "trace-balance": "trace_db",
    "cable-balance": "cable_db",
    "load-balance": "load_db",
}
_DIFFERENCES = {"leg-length": ("length_mismatch_mm", "mm"), "leg-delay": ("delay_mismatch_ps", "ps")}


def held_limits(
    limits: Mapping[str, Limit],
    rules: Mapping[str, Rule],
    judgement: Judgement,
    measures: Measures,
    balance: tuple[BalancePoint, ...],
) -> tuple[HeldLimit, ...]:
    """Every limit of the pair, by rule.

    A broken limit has what its first finding measured. A kept one has a figure only where the rule compares a figure of
    the result with one number; rules that look for stretches or places keep none.
    """
    undecided = {one.rule: one.missing for one in judgement.unjudged}
    held = []
    for name in sorted(limits):
        limit, rule = judgement.limits.get(name, limits[name]), rules[name]
        findings = [finding for finding in judgement.findings if finding.rule == name]
        standing = [finding for finding in findings if not finding.waived]
        first = next(iter(standing or findings), None)
        if first is not None:
            outcome = "broken" if standing else "waived"
            measured, bound, unit = first.measured, first.limit, first.unit
        else:
            outcome = "undecided" if name in undecided else "kept"
            measured, bound = (
                _compared(name, limit, judgement, measures, balance) if outcome == "kept" else (None, None)
            )
            unit = rule.unit
        held.append(
            HeldLimit(
                rule=name,
                severity=limit.severity,
                says=says(limit, rule),
                outcome=outcome,
                measured=measured,
                limit=bound,
                unit=unit,
                missing=undecided.get(name, ""),
                source=limit.source,
            )
        )
    return tuple(held)


def says(limit: Limit, rule: Rule) -> str:
    """The limit's quantities in words: "spread 20 %, for 5 mm"; "" where the rule has none."""
    said = {key: _amount(value, rule.quantities.get(key, "")) for key, value in limit.quantities.items()}
    said |= {key: time.said for key, time in limit.timed.items()}
    return ", ".join(f"{key} {amount}" for key, amount in sorted(said.items()))


def _amount(value: float, dimension: str) -> str:
    if dimension == "share":
        return f"{100 * value:.6g} %"
    unit = DIMENSIONS.get(dimension, "")
    return f"{value:.6g}{'' if unit in {'', '1'} else ' ' + unit}"


def _compared(
    name: str, limit: Limit, judgement: Judgement, measures: Measures, balance: tuple[BalancePoint, ...]
) -> tuple[float | None, float | None]:
    """The figure that a rule compares, and the number it is compared with; `None` where it does not work that way."""
    given = limit.quantities
    if name in _DIFFERENCES:
        figure, unit = _DIFFERENCES[name]
        difference, pins = getattr(measures, figure), judgement.pins.difference(unit)
        return (None, None) if difference is None or pins is None else (abs(difference + pins), given.get("most"))
    if name == "width-match" and measures.width_plus_mm is not None and measures.width_minus_mm is not None:
        return abs(measures.width_plus_mm - measures.width_minus_mm), given.get("most")
    if name == "via-match" and measures.vias_plus is not None and measures.vias_minus is not None:
        return float(abs(measures.vias_plus - measures.vias_minus)), given.get("most")
    if name == "loop-area" and measures.coupled_mm is not None and measures.apart_mm is not None:
        bounds = [given["most"]] if "most" in given else []
        bounds += [given["width"] * (measures.coupled_mm + measures.apart_mm)] if "width" in given else []
        return measures.loop_area_mm2, min(bounds, default=None)
    figure = "rejection_db" if name == "link-rejection" else _CAUSES.get(name, "")
    found = [getattr(point, figure) for point in balance] if figure else []
    if not found or None in found:
        return None, None
    sign = 1.0 if name == "link-rejection" else -1.0
    return min(sign * value for value in found), given.get("least")
