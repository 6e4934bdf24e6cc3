"""All figures of all pairs as a table for people: figures down, pairs across, as many as the width takes."""

from __future__ import annotations

import textwrap

from pairrules.reports.figures import FIGURES, value
from pairrules.reports.report import Look, Report
from pairrules.reports.safe_text import safe
from pairrules.result import PairResult, Result

_LABEL = max(len(figure.label) + len(figure.unit) + 3 for figure in FIGURES)
_COLUMN = 12
_GAP = 2


def render(result: Result, look: Look) -> str:
    """Blocks of columns; a name wider than its column gets a number there and a line of its own above the block."""
    lines = [f"{safe(result.board.file)}: {safe(result.board.name)}".rstrip(": ")]
    if not result.pairs:
        return "\n".join([*lines, "", "no pair was found", ""])
    across = max((look.width - _LABEL) // (_COLUMN + _GAP), 1)
    for first in range(0, len(result.pairs), across):
        lines += ["", *_block(result.pairs[first : first + across], first)]
    notes = {pair.name: pair.missing for pair in result.pairs if pair.missing}
    if notes:
        lines += ["", "? is not known from the file:"]
        for name, why in notes.items():
            lines += _wrap(f"{safe(name)}: {safe('; '.join(why))}", look)
    if result.board.missing:
        lines += ["", "The file lacks"]
        lines += [line for why in result.board.missing for line in _wrap(f"- {safe(why)}", look)]
    return "\n".join(lines) + "\n"


def _block(pairs: tuple[PairResult, ...], first: int) -> list[str]:
    names = [safe(pair.name) for pair in pairs]
    long = [len(name) > _COLUMN for name in names]
    heads = [f"({first + i + 1})" if long[i] else name for i, name in enumerate(names)]
    lines = [f"({first + i + 1}) {name}" for i, name in enumerate(names) if long[i]]
    lines.append(_line("", heads))
    lines.append(_line("routed", [pair.routed for pair in pairs]))
    for figure in FIGURES:
        label = f"{figure.label} [{figure.unit}]" if figure.unit else figure.label
        lines.append(_line(label, [value(pair.measures, figure) for pair in pairs]))
    return lines


def _wrap(text: str, look: Look) -> list[str]:
    return textwrap.wrap(text, look.width, initial_indent="  ", subsequent_indent="    ", break_on_hyphens=False)


def _line(label: str, cells: list[str]) -> str:
    return f"{label:<{_LABEL}}" + "".join(f"{'':{_GAP}}{cell:>{_COLUMN}}" for cell in cells)


REPORT = Report(name="table", summary="all figures, pairs side by side", commands=("measure",), render=render)
