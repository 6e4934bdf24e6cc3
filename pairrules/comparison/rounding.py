"""How much two figures may differ before one is worse than the other: what drawing, rounding and solving leave open."""

from __future__ import annotations

_LEAST: dict[str, tuple[float, float]] = {
    # Unit: absolute, relative. Geometry is exact but for the grid of a file; what is solved is good to about a percent.
    "mm": (0.001, 0.0),
    "mm within reach": (0.01, 0.0),
    "mm2": (0.01, 0.001),
    "mm²": (0.01, 0.001),
    "dB": (0.01, 0.0),
    "ps": (0.01, 0.01),
    "ohm": (1e-4, 0.01),
    "pF": (1e-3, 0.01),
    "nH": (1e-2, 0.01),
    "": (0.0, 0.0),
    "1": (0.0, 0.0),
}
_ELSE = (0.0, 0.01)

WITHIN_REACH = frozenset({"coupled_mm", "apart_mm", "apart-run"})
"""Figures and rules in mm that end where a bent distance passes the reach: they change by the square root of noise."""

FARTHEST_DB = 140.0
"""Ratios beyond this count as this: no instrument tells them apart (common practice, no source), and the sum of tiny
differences they come from is mostly rounding."""


def step(old: float, new: float, unit: str) -> float:
    """New less old, 0 where the difference is within rounding.

    Examples
    --------
    >>> step(1.0, 1.0005, "mm"), round(step(1.0, 1.25, "mm"), 3), step(98.0, 98.5, "ohm"), step(-150.0, -170.0, "dB")
    (0.0, 0.25, 0.0, 0.0)
    """
    if unit == "dB":
        old, new = (max(-FARTHEST_DB, min(FARTHEST_DB, value)) for value in (old, new))
    absolute, relative = _LEAST.get(unit, _ELSE)
    # The last digits of a saved figure must not decide.
    open_by = max(absolute, relative * max(abs(old), abs(new))) * (1 + 1e-9) + 1e-9
    return new - old if abs(new - old) > open_by else 0.0
