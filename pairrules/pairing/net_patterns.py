"""Patterns over net names as settings write them: a star stands for any text, a question mark for one character.

Square brackets are no wildcards, since nets are often called `D[0]`. A pattern that is a net's very name matches it, so
that a net called `WR*` can be named too.
"""

from __future__ import annotations

import re
from functools import lru_cache


def matches(name: str, pattern: str) -> bool:
    """Whether the net name fits the pattern, upper and lower case being different."""
    return name == pattern or _compiled(pattern).fullmatch(name) is not None


def starred(name: str, pattern: str) -> tuple[str, ...] | None:
    """What each star of the pattern stands for in the name; `None` where it does not fit.

    The first star takes as much as it can, so that with several ways to fit the rightmost place is the one meant.
    """
    first, *rest = pattern.split("*")
    if not rest:
        return () if name == pattern else None
    if not name.startswith(first) or not name.endswith(rest[-1]):
        return None
    # From the end, each piece as far right as it goes: no piece is ever tried twice, however many stars there are.
    end, texts = len(name), list[str]()
    for piece in reversed(rest):
        place = name.rfind(piece, len(first), end) if texts else end - len(piece)
        if place < len(first):
            return None
        texts.append(name[place + len(piece) : end])
        end = place
    return (name[len(first) : end], *reversed(texts[1:]))


def filled(pattern: str, texts: tuple[str, ...]) -> str:
    """The pattern with each star replaced by its text. Raises: ValueError where their numbers differ."""
    pieces = pattern.split("*")
    if len(pieces) != len(texts) + 1:
        raise ValueError(f"{pattern!r} has {len(pieces) - 1} stars, {len(texts)} texts are given")
    return pieces[0] + "".join(text + piece for text, piece in zip(texts, pieces[1:], strict=True))


@lru_cache(maxsize=256)
def _compiled(pattern: str) -> re.Pattern[str]:
    """The pattern as an expression that never goes back to an earlier star: each takes as little as it can."""
    first, *rest = (
        "".join("." if letter == "?" else re.escape(letter) for letter in one) for one in pattern.split("*")
    )
    between = "".join(f"(?>.*?{piece})" for piece in rest[:-1] if piece)
    return re.compile(first + between + (f".*{rest[-1]}" if rest else ""), re.DOTALL)
