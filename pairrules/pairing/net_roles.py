"""What a net's name says it is for, where that is no balanced signal: ground, supply, control line, address, lamp.

Source of the word lists: common practice, no source.
"""

from __future__ import annotations

import re

_APART = re.compile(r"[^A-Z0-9]+")

_GROUND = re.compile(r"(?:[A-Z]{0,3}GND[A-Z]{0,2}|[AD]?VSS[A-Z]{0,2}|GROUND|EARTH|CHASSIS|SHIELD)[0-9]*|0V")

_NO_GROUND = re.compile(
    r"(?:SENSE|SENS|SNS|KELVIN|DET|DETECT|FAULT|FLT|OK|EN|MON|FB|LOOP|TEST|SW|CTRL|P|N|POS|NEG)[0-9]*"
)
"""Words that make a net with a ground's word in it a signal about that ground (`GND_SENSE`, `SHIELD_DET`)."""

_SUPPLY = re.compile(
    r"[A-Z]{0,3}V(?:DD|CC|EE|SS|BAT|BUS|REF|CORE|PP|TT|SYS|IO|PWR)[A-Z]{0,4}[0-9]*"
    r"|[ADP]?[0-9]+V[0-9]*|[0-9]+P[0-9]+V?|V[0-9]+[VP][0-9]+|PWR|POWER|SUPPLY|RAIL|BATT?|BATTERY"
)

_WITH_SUPPLY = re.compile(
    r"(?:A|D|P|N|F|IO|CORE|PLL|ANA|DIG|ANALOG|DIGITAL|ISO|AUX|MAIN|SW|IN|OUT|FILT|FILTERED|CLEAN|DDR|USB|RF|LDO|REG|EXT"
    r"|INT|BACKUP|RAW)?[0-9]*"
)
"""Words that tell supplies from one another (`VDD_IO`, `3V3_A`)."""

_SIGNAL = re.compile(
    r"(?:[TR]XD?|[TR]D|CLK|CLOCK|CK|DQS|DATA|SIG|SIGNAL|SENSE|SENS|SNS|KELVIN|FB|MON|CAN|USB|LVDS|SYNC|STROBE)[0-9]*"
)
"""Words that make a voltage in the same name the level of a signal or what it senses (`CLK_1V8`, `SENSE_VDD`)."""

_RAIL = re.compile(r"VS?[0-9]*|DC|HV|LV")
"""Words that mean a supply only where a polarity follows them (`V+`, `HV-`)."""

_CONTROL = re.compile(
    r"N?(?:RESET|RST|SRST|TRST|MRST|POR|CS|CE|SS|SEL|EN|ENA|ENABLE|OE|WE|WR|BE|IRQ|INT|INTR|NMI|ALERT|ALARM|FAULT|FLT|ERR"
    r"|PG|PGOOD|PWRGD|SHDN|SHUTDOWN|SLEEP|WAKE|STBY|STANDBY|PDN|PWRDN|HOLD|WP|BUSY|READY|RDY|ACK|REQ|LDAC|DIS|DISABLE"
    r"|BOOT|PRSNT|PRESENT)[0-9]*"
)

_HIGH_AND_LOW = re.compile(
    r"(?:A|AD|ADR|ADDR|ADDRESS|D|DATA|DQ|DQM|LED|LAMP|BYTE|WORD|NIBBLE|BANK|REG|CNT|COUNT|GATE|G|GD|DRV|HS|LS|PWM|SW|SWITCH|KEY"
    r"|BTN|BUTTON|LIM|LIMIT|TH|THR|THRESH|LEVEL|LVL|TEMP|MUX|RANGE|GAIN|SPEED|COL|ROW|BL|BLANK|U|L|RELAY|VALVE|PUMP"
    r"|MOTOR|M)[0-9]*"
)
"""Stems whose `_H` and `_L` mean high and low of a number, a threshold or a half bridge, not the legs of a pair."""

_LAMP = re.compile(r"(?:LED|LAMP|BACKLIGHT|BL)[0-9]*")


def words(name: str) -> tuple[str, ...]:
    """The words of a net name, in capitals; everything but letters and digits divides."""
    return tuple(word for word in _APART.split(name.upper()) if word)


def is_ground_name(name: str) -> bool:
    """Whether the name is a ground's: its first or last word says so and no other makes it a signal about a ground."""
    said = words(name)
    if not said or any(_NO_GROUND.fullmatch(word) for word in said):
        return False
    return any(_GROUND.fullmatch(word) for word in (said[0], said[-1]))


def is_supply_name(name: str) -> bool:
    """Whether the name is a supply's or ground's (`VDD`, `VDD_IO`, `+3V3`, `SENSOR_5V`), not a signal's about one."""
    said = words(name)
    supplies = [_SUPPLY.fullmatch(word) is not None for word in said]
    if not any(supplies):
        return is_ground_name(name)
    if supplies[-1] and not any(_SIGNAL.fullmatch(word) for word in said[:-1]):
        return True
    return all(
        is_supply or _WITH_SUPPLY.fullmatch(word) is not None for word, is_supply in zip(said, supplies, strict=True)
    )


def is_rail_word(word: str) -> bool:
    """Whether the word next to a polarity makes the two nets supply rails (`V+`, `HV-`)."""
    return _RAIL.fullmatch(word) is not None


def is_control_word(word: str) -> bool:
    """Whether the word is that of a control line, whose `_N` usually means active low."""
    return _CONTROL.fullmatch(word) is not None


def is_high_low_word(word: str) -> bool:
    """Whether `_H` and `_L` after the word mean high and low rather than two legs."""
    return _HIGH_AND_LOW.fullmatch(word) is not None or is_control_word(word)


def is_lamp_word(word: str) -> bool:
    """Whether the word names a lamp, whose plus and minus are its two ends."""
    return _LAMP.fullmatch(word) is not None
