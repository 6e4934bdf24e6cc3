"""Which shipped rule set a pair most likely belongs to, by its names, its parts and its impedance.

A guess for a first settings file, which says what it rests on and leaves the decision to people.
Source of the words and of the order in which they count: common practice, no source.
"""

from __future__ import annotations

import re
from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class DraftPair:
    """A pair as it was found.

    Parameters
    ----------
    name: of the pair. nets: of both legs. declared: class that the board file gives it, "" for none.
    ends: reference, value and package of its end parts, joined. series: references of the parts in series.
    impedance_ohm: differential, `None` where it could not be solved.
    """

    name: str
    nets: tuple[str, ...]
    declared: str = ""
    ends: tuple[str, ...] = ()
    series: tuple[str, ...] = ()
    impedance_ohm: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Likely:
    """A guess. `set`: a shipped rule set, "" where nothing tells. `why`: what the guess rests on."""

    set: str
    why: str


_WORD = r"(?:^|[^A-Z])(?:{})(?=$|[^A-Z])"
"""A word of a name in capitals; everything but letters divides."""

_BY_NAME = tuple(
    (name, re.compile(pattern))
    for name, pattern in (
        ("can", _WORD.format("CAN(?:FD|BUS|H|L|P|N)?")),
        ("rs485", _WORD.format("RS[ _-]?(?:485|422)|MODBUS")),
        ("single-pair-ethernet", r"^T1(?![0-9])|" + _WORD.format("BASE[ _-]?T1[SL]?|SPE")),
        (
            "serial-lane",
            _WORD.format(
                "PCI?E[A-Z]?|PE[TR][PN]?|SATA|SGMII|SERDES|MGT|GT[XHY]|XAUI|SS[TR]X|LN|LANE|HDMI|TMDS|MIPI|[DC]SI|REFCLK"
            ),
        ),
        ("usb2-high-speed", _WORD.format("USB[A-Z]?|HSD[PM]?") + r"|^D(?:P|M|\+|-)[0-9]*$"),
        ("ethernet-1000base-t", _WORD.format("GB?E|GIGE|GETH|BI[ _-]?D[A-D]|TRD")),
        ("ethernet-100base-tx", _WORD.format("ETH(?:ERNET)?|LAN|MDI")),
        ("lvds", _WORD.format("LVDS|FPD|LCD|DISP(?:LAY)?")),
        ("thermocouple", _WORD.format("TC|THERMO(?:COUPLE)?|TCOUPLE")),
        (
            "audio-line",
            _WORD.format("MIC|AUDIO|LINE(?:IN|OUT)?|HYD(?:RO(?:PHONE)?)?|SPK|SPEAKER|XLR|AUX|HEADPHONE|HYDROPHONE"),
        ),
        (
            "bridge-sensor",
            _WORD.format("BRIDGE|BR|STRAIN|LOAD[ _-]?CELL|PRESS(?:URE)?|FORCE|WEIGHT|SG|WHEATSTONE"),
        ),
        ("converter-input", _WORD.format("ADC|AIN|CONV(?:ERTER)?|SENS(?:E|OR)?|VIN")),
    )
)

_WAY = re.compile(_WORD.format("[TR](?:X|D|XD)|CLK|CK|CLOCK|LCK|LINK|DATA|STB|STROBE"))
_LINES = re.compile(_WORD.format("A|B|Y|Z"))
_TRANSFORMER = re.compile(r"^(?:T|TR|TX|XFMR)[0-9]+\b|MAGNETIC|MAGJACK|RJ-?45|8P8C|TRANSFORMER", re.IGNORECASE)
_NEAR_OHM = 15.0
"""So far about 100 ohm counts as 100 ohm."""


def likely_set(pair: DraftPair) -> Likely:
    """The set that fits, the most telling sign first: names, then parts and impedance of a signal that has a way."""
    names = [name.upper() for name in (pair.name, *pair.nets)]
    for found, pattern in _BY_NAME:
        told = next((match for name in names if (match := pattern.search(name))), None)
        if told is not None:
            return Likely(set=found, why=f"by name ({told[0].strip('_- /.')})")
    if any(_WAY.search(name) for name in names):
        return _by_parts(pair)
    if pair.nets and all(_LINES.search(name.upper()[-2:]) for name in pair.nets):
        return Likely(set="rs485", why="by name (A and B)")
    return Likely(set="", why="neither names nor parts tell")


def _by_parts(pair: DraftPair) -> Likely:
    if any(_TRANSFORMER.search(end) for end in pair.ends):
        return Likely(set="ethernet-100base-tx", why="by its direction and a transformer or socket at its end")
    if len([ref for ref in pair.series if ref.upper().startswith("C")]) > 1:
        return Likely(set="serial-lane", why="by its direction and capacitors in series")
    ohm = pair.impedance_ohm
    if ohm is not None and abs(ohm - 100) <= _NEAR_OHM:
        why = f"by its direction and {ohm:.3g} ohm; it may as well be ethernet-100base-tx or serial-lane"
        return Likely(set="lvds", why=why)
    return Likely(set="", why="a direction or clock in its name, but neither parts nor an impedance of 100 ohm tell")
