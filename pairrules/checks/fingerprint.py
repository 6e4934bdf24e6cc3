"""A finding's fingerprint: the same as long as the copper that matters is the same, wherever on the board it lies.

It reads "1:0f3a90c2-…": the version of how it is made, a hash of what is counted in whole numbers (the rule, whether
the legs are routed), and the eight numbers of `geometry.copper_sketch`, four hexadecimal digits each. A waiver compares
fingerprints with `same_copper`, which lets the numbers differ by what rounding in a file can make; whoever compares
the texts alone gets a false "changed" now and then, never a false "same".
"""

from __future__ import annotations

import hashlib
import math
import re

from pairrules.checks.rule import Subject
from pairrules.geometry.board_copper import BoardCopper
from pairrules.geometry.copper_sketch import NUMBERS, copper_sketch

VERSION = 1
"""Rises whenever the same copper would get another fingerprint."""

STEP_MM = 1e-4
TOLERANCE = 24
"""Steps by which two numbers of a sketch may differ. Measured on the demo board: noise of 1e-6 mm on every point moves
them by half a step at most, and so on in proportion; moving one corner of a track by 5 µm moves the most moved one by
38 at least."""

_TURN = 1 << 16
_FORM = re.compile(rf"(?P<version>[0-9]+):(?P<whole>[0-9a-f]{{8}})-(?P<sketch>[0-9a-f]{{{4 * NUMBERS}}})")


def copper_digest(subject: Subject, copper: BoardCopper) -> str:
    """The part of a fingerprint that tells of the copper: that of the pair's nets, its neighbours, its reference."""
    numbers = copper_sketch(subject.board, subject.link, subject.geometry, copper)
    return "".join(f"{math.floor(float(number) / STEP_MM + 0.5) % _TURN:04x}" for number in numbers)


def fingerprint(rule: str, subject: Subject, digest: str) -> str:
    """The fingerprint of a rule's finding on the copper with this digest."""
    hops = len(subject.link.hops_plus), len(subject.link.hops_minus)
    whole = hashlib.sha256(f"{rule} {subject.geometry.routed} {hops}".encode()).hexdigest()[:8]
    return f"{VERSION}:{whole}-{digest}"


def is_fingerprint(text: str) -> bool:
    """Whether a text has the form of a fingerprint, of whatever version."""
    return re.fullmatch(r"[0-9]+:[0-9a-f-]+", text) is not None


def version_of(text: str) -> int:
    """The version a fingerprint was made by, 0 where it says none."""
    head = text.partition(":")[0]
    return int(head) if head.isdecimal() and head.isascii() and len(head) < 9 else 0


def same_copper(one: str, other: str) -> bool:
    """Whether two fingerprints are of the same rule and the same copper; false where either is of another version."""
    first, second = _FORM.fullmatch(one), _FORM.fullmatch(other)
    if first is None or second is None:
        return False
    if any(int(found["version"]) != VERSION for found in (first, second)) or first["whole"] != second["whole"]:
        return False
    steps = (
        (int(first["sketch"][at : at + 4], 16) - int(second["sketch"][at : at + 4], 16)) % _TURN
        for at in range(0, 4 * NUMBERS, 4)
    )
    return all(min(step, _TURN - step) <= TOLERANCE for step in steps)
