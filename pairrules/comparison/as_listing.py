"""A comparison for people: what got worse first, then what got better, then what neither did."""

from __future__ import annotations

import textwrap
from collections.abc import Iterator

from pairrules.board.coordinates import coordinates
from pairrules.comparison.compare import Comparison, FigureChange, PairChange
from pairrules.comparison.findings_matched import FindingChange
from pairrules.reports.report import Look
from pairrules.reports.safe_text import safe

_ORDER = ("both", "better", "changed", "appeared", "vanished")
_COLOURS = {"worse": "1;31", "appeared": "1;31", "better": "1;32", "vanished": "1;32"}
_TEXT_AT = len("  appeared   ")
_WORDS = {"both": "worse and better"}


def as_listing(comparison: Comparison, look: Look) -> str:
    """The text; pairs that are the same are only named."""
    old, new = comparison.old, comparison.new
    counts = [f"{count} {_WORDS.get(change, change)}" for change, count in comparison.summary.items() if count]
    head = f"{safe(old.file)} to {safe(new.file)}: {', '.join(counts) or 'no pairs'}"
    lines = textwrap.wrap(head, look.width, subsequent_indent="  ", break_on_hyphens=False)
    told = [pair for pair in comparison.pairs if pair.change != "same"]
    for pair in sorted(told, key=lambda pair: (not pair.worse, ("worse", *_ORDER).index(pair.change))):
        lines += ["", *_pair(pair, comparison, look)]
    same = [safe(pair.name) for pair in comparison.pairs if pair.change == "same"]
    if same:
        text = f"The same ({len(same)}): {', '.join(same)}"
        lines += ["", *textwrap.wrap(text, look.width, subsequent_indent="  ", break_on_hyphens=False)]
    return "\n".join(lines) + "\n"


def _pair(pair: PairChange, comparison: Comparison, look: Look) -> Iterator[str]:
    name = safe(pair.name or pair.old_name)
    if pair.name and pair.old_name and pair.name != pair.old_name:
        name += f" (was {safe(pair.old_name)}, the same by {pair.matched_by})"
    if not pair.old_name:
        verdicts = f"appeared, {pair.new_verdict}"
    elif not pair.name:
        verdicts = f"vanished, was {pair.old_verdict}"
    elif pair.old_verdict == pair.new_verdict:
        verdicts = pair.new_verdict
    else:
        verdicts = f"{pair.new_verdict}, was {pair.old_verdict}"
    yield from textwrap.wrap(f"{name}  {verdicts}", look.width, subsequent_indent="  ", break_on_hyphens=False)
    for finding in pair.findings:
        yield from _labelled(finding.change, _finding(finding), look)
        if finding.new is not None and finding.new.at and finding.change in {"appeared", "worse"}:
            at = finding.new.at[0]
            place = f"{safe(at.layer)} {coordinates(at.x_mm, at.y_mm, comparison.new.units)}".strip()
            yield from _labelled("", f"at {place}", look)
    for change, note in pair.notes:
        yield from _labelled(change, safe(note), look)
    for figure in pair.figures:
        yield from _labelled(figure.change, _figure(figure), look)


def _finding(one: FindingChange) -> str:
    told = one.new or one.old
    assert told is not None
    more = [one.why] if one.why else []
    if one.old is not None and one.new is not None and one.old.measured is not None:
        more.append(f"was {one.old.measured:.4g} {one.old.unit}".rstrip())
    if one.change == "appeared" and told.waived:
        more.append("waived")
    return f"{told.rule}: {safe(told.message)}" + (f" ({', '.join(more)})" if more else "")


def _figure(one: FigureChange) -> str:
    at = "" if one.frequency_hz is None else f" at {one.frequency_hz:g} Hz"
    old, new = ("unknown" if value is None else f"{value:.6g}" for value in (one.old, one.new))
    return f"{one.figure}{at} is {new}, was {old}"


def _labelled(label: str, text: str, look: Look) -> list[str]:
    indent = " " * _TEXT_AT
    lines = textwrap.wrap(text, look.width, initial_indent=indent, subsequent_indent=indent, break_on_hyphens=False)
    head = f"  {label}".ljust(_TEXT_AT)
    if look.colour and label in _COLOURS:
        head = head.replace(label, f"\x1b[{_COLOURS[label]}m{label}\x1b[0m")
    return [head + lines[0][_TEXT_AT:], *lines[1:]]
