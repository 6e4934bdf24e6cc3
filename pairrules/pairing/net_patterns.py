"""Patterns over net names as settings write them: a star stands for any text, a question mark for one character.

Square brackets are no wildcards, since nets are often called `D[0]`. A pattern that is a net's very name matches it, so
that a net called `WR*` can be named too.
"""

from __future__ import annotations

import re
from functools import lru_cache


def matches(name: str, pattern: str) -> bool:
    """Whether the net name fits the pattern, upper and lower case being different."""
    return name == pattern or _compiled(pattern, single=True).fullmatch(name) is not None


def starred(name: str, pattern: str) -> tuple[str, ...] | None:
    """What each star of the pattern stands for in the name; `None` where it does not fit.

    The first star takes as much as it can, so that with several ways to fit the rightmost place is the one meant.
    """
    found = _compiled(pattern, single=False).fullmatch(name)
    return None if found is None else found.groups()


def filled(pattern: str, texts: tuple[str, ...]) -> str:
    """The pattern with each star replaced by its text. Raises: ValueError where their numbers differ."""
    pieces = pattern.split("*")
    if len(pieces) != len(texts) + 1:
        raise ValueError(f"{pattern!r} has {len(pieces) - 1} stars, {len(texts)} texts are given")
    return pieces[0] + "".join(text + piece for text, piece in zip(texts, pieces[1:], strict=True))


@lru_cache(maxsize=256)
def _compiled(pattern: str, *, single: bool) -> re.Pattern[str]:
    special = {"*": "(.*)", "?": "."} if single else {"*": "(.*)"}
    return re.compile("".join(special.get(letter, re.escape(letter)) for letter in pattern), re.DOTALL)
