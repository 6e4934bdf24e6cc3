"""Units of length, and quantities written with their unit ("5 mil", "20 ps", "80 dB", "1 Mohm")."""

from __future__ import annotations

import math
import re

LENGTH_MM = {"mm": 1.0, "um": 0.001, "mil": 0.0254, "in": 25.4, "cm": 10.0, "m": 1000.0}
"""Millimetres in one of each. Source: the inch is 25.4 mm exactly (international yard and pound, 1959)."""

_PREFIX = {
    "f": 1e-15,
    "p": 1e-12,
    "n": 1e-9,
    "u": 1e-6,
    "µ": 1e-6,
    "m": 1e-3,
    "": 1.0,
    "k": 1e3,
    "M": 1e6,
    "G": 1e9,
    "T": 1e12,
}

_BASE = {
    "time": ("s", 1e12),  # ps
    "frequency": ("Hz", 1.0),
    "resistance": ("ohm", 1.0),
    "capacitance": ("F", 1.0),
    "inductance": ("H", 1.0),
    "voltage": ("V", 1.0),
    "current": ("A", 1.0),
    "flux density": ("T", 1.0),
}

DIMENSIONS = {
    "length": "mm",
    "area": "mm2",
    "time": "ps",
    "frequency": "Hz",
    "resistance": "ohm",
    "capacitance": "F",
    "inductance": "H",
    "voltage": "V",
    "current": "A",
    "flux density": "T",
    "field": "A/m",
    "ratio": "dB",
    "share": "1",
    "angle": "degree",
    "count": "1",
    "resistance per length": "ohm/m",
    "capacitance per length": "F/m",
    "inductance per length": "H/m",
    "slew": "V/s",
}
"""Each dimension a quantity may have, and the unit that `quantity` returns it in."""

_WRITTEN = re.compile(r"\s*([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*(\S.*?)?\s*\Z")


def quantity(text: str, dimension: str) -> float:
    """The number that `text` means, in the unit `DIMENSIONS[dimension]`.

    Raises
    ------
    ValueError: with a sentence that says what was expected, where the unit is missing or of another dimension.
    """
    found = _WRITTEN.match(text)
    if found is None:
        raise ValueError(f"{text!r} is no quantity; write a number and a unit, such as {example(dimension)}")
    number, unit = float(found[1]), (found[2] or "").replace("Ω", "ohm").replace("²", "2").strip()
    if not math.isfinite(number):
        raise ValueError(f"{text!r} is not finite")
    if not unit and dimension != "count":
        raise ValueError(f"{text!r} has no unit; write {example(dimension)}")
    factor = _factor(unit, dimension)
    if factor is None:
        raise ValueError(f"{text!r} is no {dimension}; write {example(dimension)}")
    return number * factor


def _factor(unit: str, dimension: str) -> float | None:
    if dimension == "length":
        return LENGTH_MM.get("um" if unit == "µm" else unit)
    if dimension == "area":
        square = {f"{name}2": size * size for name, size in LENGTH_MM.items()}
        return square.get(unit)
    if dimension in _BASE:
        base, scale = _BASE[dimension]
        return _prefixed(unit, base, scale)
    if dimension.endswith(" per length"):
        above, _, below = unit.partition("/")
        of = dimension.removesuffix(" per length")
        upper = _prefixed(above, *_BASE[of])
        lower = {**LENGTH_MM, "km": 1e6}.get(below)
        return None if upper is None or lower is None else upper / (lower / 1000.0)
    if dimension == "slew":
        above, _, below = unit.partition("/")
        upper, lower = _prefixed(above, "V", 1.0), _prefixed(below, "s", 1.0)
        return None if upper is None or lower is None else upper / lower
    if dimension == "field":
        return {"A/m": 1.0, "mA/m": 1e-3, "kA/m": 1e3}.get(unit)
    if dimension == "share":
        return {"%": 0.01, "ppm": 1e-6}.get(unit)
    if dimension == "ratio":
        return 1.0 if unit == "dB" else None
    if dimension == "angle":
        return 1.0 if unit in {"degree", "degrees", "deg"} else None
    if dimension == "count":
        return 1.0 if unit == "" else None
    raise KeyError(dimension)


def _prefixed(unit: str, base: str, scale: float) -> float | None:
    if not unit.endswith(base):
        return None
    prefix = _PREFIX.get(unit.removesuffix(base))
    return None if prefix is None else prefix * scale


def example(dimension: str) -> str:
    """A quantity of the dimension as a user may write it."""
    return {
        "length": "0.5 mm",
        "area": "20 mm2",
        "time": "20 ps",
        "frequency": "1 kHz",
        "resistance": "350 ohm",
        "capacitance": "10 pF",
        "inductance": "1 uH",
        "voltage": "3.3 V",
        "current": "10 mA",
        "flux density": "10 uT",
        "field": "3 A/m",
        "ratio": "80 dB",
        "share": "2 %",
        "angle": "30 degrees",
        "count": "2",
        "resistance per length": "0.09 ohm/m",
        "capacitance per length": "60 pF/m",
        "inductance per length": "0.6 uH/m",
        "slew": "1 V/ns",
    }[dimension]
