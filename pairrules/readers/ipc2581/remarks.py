"""What the file lacks or was not understood: counted while reading, told once a kind."""

from __future__ import annotations

from dataclasses import dataclass, field

MOST_KINDS = 500
"""Kinds of remarks that are kept; a file of a million strange names would fill memory and report with them."""

_SHOWN = 60


@dataclass(slots=True)
class Remarks:
    """Counts by sentence. A sentence with `{n}` is told once with its count; the plural s stands in `{s}`.

    lines: the line of the file where a kind was first met, for those that have one.
    """

    counts: dict[str, int] = field(default_factory=dict)
    lines: dict[str, int] = field(default_factory=dict)

    def count(self, sentence: str, times: int = 1, *, line: int = 0) -> None:
        """One more case of a kind."""
        if not times:
            return
        if sentence not in self.counts and len(self.counts) >= MOST_KINDS:
            sentence = "{n} more remark{s} of other kinds {are} not listed"
        self.counts[sentence] = self.counts.get(sentence, 0) + times
        if line:
            self.lines.setdefault(sentence, line)

    def unknown(self, name: str, where: str) -> None:
        """An element that is not understood at this place."""
        braced = name.replace("{", "").replace("}", "")
        braced = braced if len(braced) <= _SHOWN else f"{braced[:_SHOWN]}…"
        self.count(f"{{n}} element{{s}} {braced} in {where} {{were}} not understood and {{are}} left out")

    def sentences(self) -> tuple[str, ...]:
        """One sentence a kind, in the order first met."""
        return tuple(_told(sentence, count, self.lines.get(sentence, 0)) for sentence, count in self.counts.items())


def _told(sentence: str, count: int, line: int) -> str:
    one = count == 1
    if line:
        sentence += f" (on line {line})" if one else f" (the first on line {line})"
    words = {"n": str(count), "s": "" if one else "s", "were": "was" if one else "were", "are": "is" if one else "are"}
    for name, value in words.items():
        sentence = sentence.replace(f"{{{name}}}", value)
    return sentence
