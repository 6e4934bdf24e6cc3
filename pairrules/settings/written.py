"""Quantities written as settings read them: the inverse of `board.units.quantity`."""

from __future__ import annotations

from pairrules.board.units import DIMENSIONS

_PREFIXES = ((1e12, "T"), (1e9, "G"), (1e6, "M"), (1e3, "k"), (1.0, ""), (1e-3, "m"), (1e-6, "u"), (1e-9, "n"))
_METRE = 1000.0
_PLAIN = {"length", "area", "ratio", "angle", "field"}


def written(value: float, dimension: str) -> str:
    """A quantity with its unit, to six digits.

    Parameters: value: in the unit `DIMENSIONS[dimension]`.

    Examples
    --------
    >>> written(62.5e6, "frequency"), written(0.02, "share"), written(6e-11, "capacitance per length")
    ('62.5 MHz', '2 %', '60 pF/m')
    """
    unit = DIMENSIONS[dimension]
    if dimension == "share":
        return f"{value * 1e6:.6g} ppm" if 0 < abs(value) < 1e-4 else f"{value * 100:.6g} %"
    if dimension == "count":
        return f"{value:.6g}"
    if dimension == "angle":
        return f"{value:.6g} degrees"
    if dimension == "length" and abs(value) >= _METRE:
        return f"{value / _METRE:.6g} m"
    if dimension in _PLAIN:
        return f"{value:.6g} {unit}"
    if dimension == "time":
        value, unit = value * 1e-12, "s"
    size = abs(value)
    scale, prefix = next(((s, p) for s, p in _PREFIXES if size >= s * (1 - 1e-12)), (1e-12, "p"))
    if not size:
        scale, prefix = 1.0, ""
    return f"{value / scale:.6g} {prefix}{unit}"
