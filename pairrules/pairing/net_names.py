"""What a net's name says of polarity: which half of a pair it may be, and what the other half would share with it.

Source of the patterns: common practice, no source; `_T`/`_C` for true and complement of clocks and strobes are ball
names of DDR4 memories (JEDEC JESD79-4, from memory).
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from pairrules.pairing.net_roles import words

_MOST = 16
"""Places in one name that are looked at for each pattern, from the right; a name needs one or two."""

_FARTHEST = 500
"""Letters from a name's end within which a polarity is looked for; no name of a net is as long."""

_MOST_READ = 4
"""Readings of one name by one pattern: each holds the name once more, and a name may be long."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Reading:
    """One way to read a net name as half of a pair.

    Parameters
    ----------
    head, tail: what stands before and after the polarity. sign: +1 for plus, −1 for minus.
    pattern: the polarity's two words ("P/N"), with what is asked around them.
    capitals: which letters of the polarity are capitals (first, others), so that `_p` is no partner of `_N`.
    sure: whether the names alone make a pair; otherwise parts have to bear it out.
    rank: place of the pattern in the table. lone: whether this half alone, at the name's end, is worth a word.
    """

    head: str
    tail: str
    sign: int
    pattern: str
    capitals: tuple[bool, bool]
    sure: bool
    rank: int
    lone: bool

    @property
    def key(self) -> tuple[str, tuple[bool, bool], str, str]:
        """Equal for the two halves of a pair."""
        return self.pattern, self.capitals, self.head, self.tail

    @property
    def kin(self) -> tuple[str, str, str]:
        """Equal for nets of one family that differ in numbers only (`TX1_P`, `TX3_N`)."""
        return self.pattern, _NUMBERS.sub("#", self.head), _NUMBERS.sub("#", self.tail)

    @property
    def stem_word(self) -> str:
        """The word the polarity belongs to, in capitals: the one before it, else the one after it, else ""."""
        before, after = words(self.head), words(self.tail)
        return before[-1] if before else after[0] if after else ""


_NUMBERS = re.compile(r"[0-9]+")

_APART = "[^A-Za-z0-9+]"
_START = rf"(?:^|{_APART})"
_NOT_WORD = "(?<![A-Za-z0-9+])"
_D = "(?<=D)"
_OWN = rf"(?:{_APART}|$)"
_SIGNAL = (
    r"(?:TX|RX|TD|RD|TXD|RXD|CLK|CK|DQS|IN|OUT|DATA|STROBE|STB|REF|SIG|SENSE|SNS|MIC|SPK|LINE|AUX|TMDS|PET|PER|SIN|COS)"
)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Pattern:
    plus: str
    minus: str
    before: re.Pattern[str]
    after: re.Pattern[str]
    sure: bool
    lone: tuple[int, ...]
    asked: str
    finder: re.Pattern[str]


def _pattern(
    plus: str, minus: str, before: str, after: str, *, sure: bool, lone: tuple[int, ...] = (), last: str = ""
) -> _Pattern:
    """A pattern. last: what `before` asks of the sign next to the polarity; few places are looked at closely."""
    return _Pattern(
        plus=plus,
        minus=minus,
        before=re.compile(rf"(?:{before})\Z", re.IGNORECASE),
        after=re.compile(after, re.IGNORECASE),
        sure=sure,
        lone=lone,
        asked=f"{plus}/{minus} {before} {after}",
        finder=re.compile(rf"{last}(?=({re.escape(plus)}|{re.escape(minus)}))", re.IGNORECASE),
    )


# A lone `_N` or `-` is usually active low, a lone `_DM` a data mask, a lone `_POS` a position: none of these is a half.
_PATTERNS = (
    _pattern("P", "N", _START, _OWN, sure=True, lone=(1,), last=_NOT_WORD),
    _pattern("P", "M", rf"{_START}D|[0-9]D", _OWN, sure=True, lone=(1,), last=_D),
    _pattern("P", "N", rf"{_START}D|[0-9]D", _OWN, sure=True, last=_D),
    _pattern("+", "-", r"[A-Za-z0-9_)\]>]", r"(?:[^A-Za-z0-9+\-]|$)", sure=True, lone=(1,)),
    _pattern("PLUS", "MINUS", _START, _OWN, sure=True, lone=(1, -1), last=_NOT_WORD),
    _pattern("POS", "NEG", _START, _OWN, sure=True, lone=(-1,), last=_NOT_WORD),
    _pattern("H", "L", rf"{_START}CAN(?:FD|BUS)?{_APART}?[0-9]*{_APART}?", rf"[0-9]*{_OWN}", sure=True, lone=(1, -1)),
    _pattern(
        "T", "C", r"(?:CK|CLK|DQS)[A-Z]?[0-9]*[^A-Za-z0-9+]+(?:[0-9]+[^A-Za-z0-9+]+)?", _OWN, sure=True, last=_NOT_WORD
    ),
    _pattern("H", "L", _APART, _OWN, sure=False, last=_NOT_WORD),
    _pattern("P", "N", "[0-9]", _OWN, sure=False, last="(?<=[0-9])"),
    _pattern("P", "N", _SIGNAL, rf"[0-9]*{_OWN}", sure=False),
    _pattern("P", "N", rf"{_START}D?", rf"[0-9]+{_OWN}", sure=False),
    _pattern("P", "M", rf"{_START}D", rf"[0-9]+{_OWN}", sure=False, last=_D),
    _pattern("P", "M", "[A-Z]D", rf"[0-9]*{_OWN}", sure=False, last=_D),
    _pattern("P", "N", "[A-Z]D", rf"[0-9]*{_OWN}", sure=False, last=_D),
    _pattern("+", "-", "[A-Za-z]", rf"[0-9]+{_OWN}", sure=False),
    _pattern("+", "-", "^", "[A-Za-z]", sure=False, last=r"\A"),
    _pattern("PLUS", "MINUS", "[A-Za-z0-9]", _OWN, sure=False),
    _pattern("POS", "NEG", "[A-Za-z0-9]", _OWN, sure=False),
)


def readings(name: str) -> tuple[Reading, ...]:
    """Every way to read the name as half of a pair: sure ones first, then the rightmost, then the commoner pattern."""
    found: list[Reading] = []
    for rank, pattern in enumerate(_PATTERNS):
        read = 0
        for place in reversed(list(pattern.finder.finditer(name, max(0, len(name) - _FARTHEST)))[-_MOST:]):
            token, start = place[1], place.start()
            # The end of a long head decides; searching all of it would cost the square of the name's length.
            before = name[max(0, start - 64) : start]
            if not pattern.after.match(name, place.end(1)) or not pattern.before.search(before):
                continue
            if read == _MOST_READ:
                break
            read += 1
            head, tail = name[:start], name[place.end(1) :]
            sign = 1 if token.upper() == pattern.plus else -1
            found.append(
                Reading(
                    head=head,
                    tail=tail,
                    sign=sign,
                    pattern=pattern.asked,
                    capitals=(token[0].isupper(), token[1:].isupper()),
                    sure=pattern.sure,
                    rank=rank,
                    lone=sign in pattern.lone and not tail and bool(words(head)),
                )
            )
    found.sort(key=lambda reading: (not reading.sure, len(reading.tail), reading.rank))
    return tuple(found)


def common_reading(plus: str, minus: str) -> Reading | None:
    """The first reading by which the two names are plus and minus of one pair; of plus."""
    keys = {reading.key for reading in readings(minus) if reading.sign < 0}
    return next((reading for reading in readings(plus) if reading.sign > 0 and reading.key in keys), None)


def shared_name(plus: str, minus: str) -> str:
    """What the two names share, without the separators that held the polarity; "plus/minus" where that is nothing."""
    reading = common_reading(plus, minus)
    if reading is not None and words(reading.head + " " + reading.tail):
        return _joined(reading.head, reading.tail)
    same = 0
    while same < min(len(plus), len(minus)) and plus[same] == minus[same]:
        same += 1
    end = 0
    while end < min(len(plus), len(minus)) - same and plus[-1 - end] == minus[-1 - end]:
        end += 1
    name = _joined(plus[:same], plus[len(plus) - end :])
    return name if words(name) else f"{plus}/{minus}"


def _joined(head: str, tail: str) -> str:
    head, rest = head.rstrip("_-. /"), tail.lstrip("_-. /")
    if not head or not rest:
        return head or rest.rstrip("_-. /")
    between = tail[: len(tail) - len(rest)][:1]
    return head + between + rest
