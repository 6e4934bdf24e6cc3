"""The order a person reads names in: U2 before U10."""

from __future__ import annotations

import re

_DIGITS = re.compile(r"([0-9]+)")

NaturalKey = tuple[tuple[tuple[int, str], ...], str]


def natural_key(text: str) -> NaturalKey:
    """Sort key in which runs of digits count as numbers; leading zeros decide only between names otherwise equal."""
    # A number is compared by how many digits it has and then by them: no limit on its length, unlike int().
    pieces = _DIGITS.split(text)
    keyed = tuple(_number(piece) if place % 2 else (0, piece) for place, piece in enumerate(pieces))
    return keyed, text


def _number(digits: str) -> tuple[int, str]:
    plain = digits.lstrip("0")
    return len(plain), plain
