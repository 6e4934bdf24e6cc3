"""A place on the board as text, in the units of the board file, so that it can be found in the layout program."""

from __future__ import annotations

from pairrules.board.units import LENGTH_MM

_NAMES = {"MILLIMETER": "mm", "MICRON": "um", "INCH": "in", "THOU": "mil"}
_DECIMALS = {"mm": 3, "um": 0, "mil": 1, "in": 4}


def unit_name(units: str) -> str:
    """The short name of a file's units ("INCH" is "in"); "mm" where they are none we write coordinates in."""
    name = _NAMES.get(units.strip().upper(), units.strip().lower())
    return name if name in _DECIMALS else "mm"


def decimals(unit: str) -> int:
    """How many decimals coordinates in this unit (a name of `unit_name`) are written with at most."""
    return _DECIMALS[unit]


def coordinates(x_mm: float, y_mm: float, units: str) -> str:
    """A place such as "(12.0, 30.5) mm" or "(0.4724, 1.2008) in".

    Parameters: x_mm, y_mm: [mm]. units: the file's, as written there.
    """
    name = unit_name(units)
    return f"({_short(x_mm / LENGTH_MM[name], name)}, {_short(y_mm / LENGTH_MM[name], name)}) {name}"


def _short(value: float, name: str) -> str:
    digits = _DECIMALS[name]
    text = f"{value:.{digits}f}"
    if name == "mm":
        text = text.rstrip("0")
        text = text + "0" if text.endswith(".") else text
    return text.removeprefix("-") if float(text) == 0 else text
