"""The pairs of a board and how they were found, as a list for people and as JSON."""

from __future__ import annotations

import json
import textwrap
from typing import Any

from pairrules.reports.report import Look
from pairrules.reports.safe_text import safe
from pairrules.result import FoundPair, FoundPairs


def render(found: FoundPairs, look: Look) -> str:
    """One block a pair: name, class, how found; each leg with its nets; ends and series parts; what was not found."""
    count = len(found.pairs)
    lines = [f"{safe(found.board.file)}: {count} pair{'' if count == 1 else 's'}"]
    for pair in found.pairs:
        lines += ["", *_block(pair, look)]
    if found.unpaired:
        lines += ["", *_wrapped("Named like half a pair, the other half is missing: ", found.unpaired, look)]
    for text in found.board.missing:
        lines += [
            "",
            *textwrap.wrap(f"board: {safe(text)}", look.width, subsequent_indent="  ", break_on_hyphens=False),
        ]
    return "\n".join(lines) + "\n"


def render_json(found: FoundPairs) -> str:
    """The same as one JSON object."""
    plain: dict[str, Any] = {
        "file": found.board.file,
        "pairs": [
            {
                "name": pair.name,
                "plus": pair.plus,
                "minus": pair.minus,
                "class": pair.klass,
                "found_by": pair.found_by,
                "nets_plus": list(pair.nets_plus),
                "nets_minus": list(pair.nets_minus),
                "source": pair.source,
                "load": pair.load,
                "series": [{"ref": part.ref, "value": part.value, "leg": part.leg} for part in pair.series],
                "missing": list(pair.missing),
            }
            for pair in found.pairs
        ],
        "unpaired": list(found.unpaired),
        "missing": list(found.board.missing),
    }
    return json.dumps(plain, indent=2) + "\n"


def _block(pair: FoundPair, look: Look) -> list[str]:
    klass = f"class {safe(pair.klass)}" if pair.klass else "no class"
    lines = [f"{safe(pair.name)}  ({klass}; found by {safe(pair.found_by)})"]
    lines += _wrapped("  plus   ", pair.nets_plus or (pair.plus,), look, between=" > ")
    lines += _wrapped("  minus  ", pair.nets_minus or (pair.minus,), look, between=" > ")
    source, load = (safe(end) or "an end that is not known" for end in (pair.source, pair.load))
    lines.append(f"  from {source} to {load}")
    if pair.series:
        parts = [f"{part.ref} {part.value}".strip() + f" ({part.leg})" for part in pair.series]
        lines += _wrapped("  in series: ", tuple(parts), look)
    for text in pair.missing:
        lines += textwrap.wrap(
            safe(text), look.width, initial_indent="  ", subsequent_indent="    ", break_on_hyphens=False
        )
    return lines


def _wrapped(head: str, names: tuple[str, ...], look: Look, *, between: str = ", ") -> list[str]:
    return textwrap.wrap(
        head + between.join(safe(name) for name in names),
        look.width,
        subsequent_indent=" " * min(len(head), 12),
        break_long_words=False,
        break_on_hyphens=False,
        drop_whitespace=True,
    )
