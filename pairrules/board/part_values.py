"""What the value written on a two-pin part means: 4k7, 100R, 0.1uF, 4.7UF, 100n/16V, 10k 1%.

The kind comes from the reference designator's letters, as the trade uses them (IEEE 315, clause 22, recalled, not
re-read): R resistor, C capacitor, L inductor, FB or FL ferrite bead. Of any other part (a protection diode, a plug) a
capacitance may be written, which it then has from each leg it is on to reference.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

KINDS = {"R": "resistor", "C": "capacitor", "L": "inductor", "FB": "ferrite bead", "FL": "ferrite bead"}
_UNIT = {"resistor": "ohm", "capacitor": "F", "inductor": "H"}
_PREFIX = {"p": 1e-12, "n": 1e-9, "u": 1e-6, "µ": 1e-6, "μ": 1e-6, "m": 1e-3, "": 1.0, "k": 1e3, "M": 1e6, "G": 1e9}
_LETTERS = re.compile(r"([A-Za-z]+)")
_NUMBER = re.compile(
    r"\s*(\d+(?:\.\d+)?|\.\d+)\s*([pnuµμmkMGR]?)(\d*)\s*(ohms?|Ω|R|F|H)?(?=$|[\s/,;_@%±(+-])", re.IGNORECASE
)
_IN_FARAD = re.compile(r"\d\s*[pnuµμ]?F\b", re.IGNORECASE)
_TOLERANCE = re.compile(r"(?:±|\+/-|\s|,|/|;|_|^)\s*(\d+(?:\.\d+)?)\s*%")


@dataclass(frozen=True, slots=True, kw_only=True)
class PartValue:
    """What a part is, by its designator and value.

    Parameters
    ----------
    kind: one of `KINDS`' values; "capacitance" for another part whose value is one; else "".
    value: [ohm], [F] or [H]; `None` where it is not written or not understood (and for a bead, whose value is no
        inductance). tolerance: as a share of 1; `None` where it is not written.
    """

    kind: str
    value: float | None
    tolerance: float | None


def part_value(ref: str, text: str) -> PartValue:
    """Read the value of the part `ref`. Never raises: what is not understood is `None`."""
    letters = _LETTERS.match(ref)
    kind = KINDS.get(letters[1].upper(), "") if letters else ""
    written = _TOLERANCE.search(text)
    tolerance = float(written[1]) / 100 if written else None
    if not kind and (farad := _value(text, "capacitor")) is not None and _IN_FARAD.search(text):
        return PartValue(kind="capacitance", value=farad, tolerance=tolerance)
    value = _value(text, kind) if kind in _UNIT else None
    return PartValue(kind=kind, value=value, tolerance=tolerance)


def _value(text: str, kind: str) -> float | None:
    found = _NUMBER.match(text)
    if found is None:
        return None
    number, prefix, decimals, unit = found[1], found[2], found[3], (found[4] or "").lower()
    expected = {"ohm": "ohm", "ohms": "ohm", "Ω": "ohm", "ω": "ohm", "r": "ohm", "f": "F", "h": "H", "": _UNIT[kind]}
    if expected.get(unit, "") != _UNIT[kind] or (prefix in {"r", "R"} and kind != "resistor"):
        return None
    if decimals:
        if "." in number or not prefix:
            return None
        number = f"{number}.{decimals}"
    if prefix in {"r", "R"}:
        prefix = ""
    # Capital letters are common in exports (4.7UF, 100NF, 10K); M is mega on a resistor and nothing on a capacitor.
    scale = _PREFIX.get(prefix, _PREFIX.get(prefix.lower()))
    if scale is None or (prefix in {"k", "K", "M", "G"} and kind != "resistor"):
        return None
    return float(number) * scale
