"""The limits that drawn figures are held against, as bounds in the figures' units."""

from __future__ import annotations

from collections.abc import Mapping

from pairrules.checks.rule import Rule, Subject, Undecided
from pairrules.checks.timed_limit import in_own_unit
from pairrules.drawing import DrawnLimit
from pairrules.settings.limit import Limit

_CAUSES = {f"{cause}-balance": f"{cause}_db" for cause in ("source", "trace", "cable", "load")}


def drawn_limits(subject: Subject, limits: Mapping[str, Limit], rules: Mapping[str, Rule]) -> tuple[DrawnLimit, ...]:
    """Bounds of the pair's limits on gap, impedance, length and balance; those that cannot be known are left out."""
    found = []
    for name in sorted(limits):
        limit = in_own_unit(subject, limits[name], rules[name])
        if not isinstance(limit, Undecided):
            found += _bounds(subject, limit)
    return tuple(found)


def _bounds(subject: Subject, limit: Limit) -> list[DrawnLimit]:
    given = limit.quantities
    if limit.rule == "gap-band":
        return _flat(limit, "gap_mm", *_band(given, subject.geometry.gap_median_mm, given.get("spread")))
    if limit.rule == "pair-impedance":
        return _flat(limit, "impedance_diff_ohm", *_band(given, given.get("target"), given.get("tolerance")))
    if limit.rule == "leg-length":
        most = given.get("most")
        return _flat(limit, "length_mismatch_mm", None if most is None else -most, most)
    if limit.rule == "link-rejection":
        return _flat(limit, "rejection_db", given.get("least"), None)
    if limit.rule in _CAUSES:
        least = given.get("least")
        return _flat(limit, _CAUSES[limit.rule], None, None if least is None else -least)
    if limit.rule == "mode-conversion":
        found = _flat(limit, "conversion_loss_db", given.get("least"), None)
        mask = () if subject.klass is None else subject.klass.mask
        if mask:
            over = tuple((float(at), float(value)) for at, value in mask)
            found.append(
                DrawnLimit(
                    rule=limit.rule, severity=limit.severity, figure="conversion_loss_db", over=over, side="least"
                )
            )
        return found
    return []


def _band(given: Mapping[str, float], middle: float | None, share: float | None) -> tuple[float | None, float | None]:
    """Least and most, narrowed to a share about the middle where one is given."""
    lows, highs = [given["least"]] if "least" in given else [], [given["most"]] if "most" in given else []
    if middle is not None and share is not None:
        lows.append(middle * (1 - share))
        highs.append(middle * (1 + share))
    return max(lows, default=None), min(highs, default=None)


def _flat(limit: Limit, figure: str, least: float | None, most: float | None) -> list[DrawnLimit]:
    if least is None and most is None:
        return []
    return [DrawnLimit(rule=limit.rule, severity=limit.severity, figure=figure, least=least, most=most)]
