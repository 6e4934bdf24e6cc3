"""The names of links: each once, whatever two links would like to be called."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence


def distinct_names(wanted: Sequence[tuple[str, str, bool]]) -> tuple[str, ...]:
    """A name for each of `wanted`: (name, the two nets' names joined, whether it was given rather than made up).

    A given name that only one link has stays; where names clash otherwise, the nets' names follow in brackets.
    """
    given = Counter(name for name, _, declared in wanted if declared)
    everyone = Counter(name for name, _, _ in wanted)
    names = [
        name if everyone[name] == 1 or (declared and given[name] == 1) else f"{name} ({nets})"
        for name, nets, declared in wanted
    ]
    seen: Counter[str] = Counter()
    for place, name in enumerate(names):
        # Only a name that already ends in another link's brackets gets here.
        seen[name] += 1
        if seen[name] > 1:
            names[place] = f"{name} #{seen[name]}"
    return tuple(names)
