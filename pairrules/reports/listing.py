"""The listing: what is wrong with which pair, where, and what to do, worst first."""

from __future__ import annotations

import re
import textwrap

from pairrules.board.coordinates import coordinates
from pairrules.reports.cautions import CAUTIONS
from pairrules.reports.report import Explained, Look, Report
from pairrules.reports.safe_text import safe
from pairrules.result import SEVERITIES, Finding, PairResult, Place, Result, WaiverState

_PLACES_SHOWN = 4
_COLOURS = {"blocker": "1;31", "review": "1;33", "note": "1;36"}
_TEXT_AT = len("  undecided  ")
_HELD = "\ue000"
"""Stands for a space that must not end a line; private, so that `safe` lets none through from a name."""

_TOGETHER = re.compile(r"\(-?[\d.]+, -?[\d.]+\) (?:mm|um|mil|in)\b|[\d.]+ (?:mm²?|ohm|ps|dB)\b")
_BASELINES = {"unchanged": "stood before; ", "worse": "worse than before; ", "new": "new; "}
_SUMMARY = (("flag", "flagged"), ("undecided", "undecided"), ("waived", "waived"), ("pass", "passed"))


def render(result: Result, look: Look) -> str:
    """Summary; pairs by verdict, flagged first; waivers; left-over nets; what the file lacked; what it is all worth."""
    lines = _summary(result, look)
    for pair in sorted((pair for pair in result.pairs if pair.verdict == "flag"), key=_worst_first):
        lines += ["", *_flagged(result, pair, look)]
    undecided = [pair for pair in result.pairs if pair.verdict == "undecided"]
    if undecided:
        lines += ["", f"Undecided ({len(undecided)})"]
        lines += [line for pairs in _alike(undecided) for line in _undecided(pairs, look)]
    for word, title in (("waived", "Waived"), ("pass", "Passed")):
        names = [pair.name for pair in result.pairs if pair.verdict == word]
        if names:
            lines += ["", *_named(f"{title} ({len(names)}): ", names, look)]
    if result.waivers:
        lines += ["", f"Waivers ({len(result.waivers)})"]
        lines += [line for waiver in result.waivers for line in _waiver(waiver, look)]
    if result.unpaired:
        lines += ["", *_named("Named like half a pair, the other half is missing: ", result.unpaired, look)]
    if result.board.missing:
        lines += ["", "The file lacks"]
        lines += [line for text in result.board.missing for line in _wrap(f"- {safe(text)}", look, "  ", "    ")]
    lines += ["", *_wrap(CAUTIONS, look)]
    return "\n".join(lines) + "\n"


def _summary(result: Result, look: Look) -> list[str]:
    board, summary = result.board, result.summary
    counts = [f"{summary[key]} {word}" for key, word in _SUMMARY if summary[key]]
    stood = sum(pair.verdict == "flag" and _stood_before(pair) for pair in result.pairs)
    if stood:
        counts[0] += f" ({stood} as before)"
    count = summary["pairs"]
    pairs = "no pairs" if not count else f"{count} pair{'' if count == 1 else 's'}"
    about = " ".join(word for word in (safe(board.format), safe(board.revision)) if word)
    head = f"{safe(board.file)}: {pairs}{': ' if counts else ''}{', '.join(counts)}"
    return _wrap(f"{head} ({about}, units {safe(board.units)})", look, "", "  ")


def _stood_before(pair: PairResult) -> bool:
    """Whether every finding that stands did so in an earlier result and is no worse."""
    return all(finding.baseline == "unchanged" for finding in pair.findings if not finding.waived)


def _worst_first(pair: PairResult) -> tuple[bool, int, int, str]:
    """Pairs whose findings all stood before come last."""
    standing = [finding for finding in pair.findings if not finding.waived]
    worst = min(SEVERITIES.index(finding.severity) for finding in standing)
    return _stood_before(pair), worst, -len(standing), pair.name


def _flagged(result: Result, pair: PairResult, look: Look) -> list[str]:
    klass = f", class {safe(pair.klass)}" if pair.klass else ""
    lines = _wrap(f"{safe(pair.name)}  ({safe(pair.plus)} and {safe(pair.minus)}{klass})", look, "", "  ")
    for finding in pair.findings:
        lines += _finding(result, finding, look)
        for text in _rests_on(pair, look.explained.get(finding.rule, ())):
            lines += _labelled("", text, look, "")
    for text, rules in _reasons(pair).items():
        if rules:
            lines += _labelled("undecided", f"{', '.join(rules)}: {text}", look, "")
    return lines


def _finding(result: Result, finding: Finding, look: Look) -> list[str]:
    word = "waived" if finding.waived else finding.severity
    before = _BASELINES.get(finding.baseline, "")
    colour = "" if finding.baseline == "unchanged" else _COLOURS.get(word, "")
    lines = _labelled(word, f"{finding.rule}: {before}{safe(finding.message)}", look, colour)
    if finding.at:
        shown = "; ".join(_place(result, place) for place in finding.at[:_PLACES_SHOWN])
        rest = len(finding.at) - _PLACES_SHOWN
        lines += _labelled("", f"at {shown}" + (f"; and {rest} more" if rest > 0 else ""), look, "")
    if finding.advice:
        lines += _labelled("", f"to do: {safe(finding.advice)}", look, "")
    if finding.source:
        lines += _labelled("", f"limit from: {safe(finding.source)}", look, "")
    return lines


def _waiver(waiver: WaiverState, look: Look) -> list[str]:
    who = f" ({safe(waiver.who)})" if waiver.who else ""
    says = f"until {waiver.until}{who}: {safe(waiver.reason)}" if waiver.state == "held" else safe(waiver.why)
    return _labelled(waiver.state, f"{safe(waiver.rule)} of {safe(waiver.pair)}, {says}", look, "")


def _rests_on(pair: PairResult, explained: tuple[Explained, ...]) -> list[str]:
    """What a finding's figure rests on, up to where it holds for this pair, and what was assumed for it."""
    texts = [f"rests on: {one.model}; valid: {one.valid}" for one in explained]
    if any(one.electrical for one in explained):
        if pair.quasi_static_hz is not None:
            texts.append(f"valid here up to {pair.quasi_static_hz / 1e9:.3g} GHz")
        texts += [f"assumed: {safe(text)}" for text in pair.assumed]
    return texts


def _alike(pairs: list[PairResult]) -> list[list[PairResult]]:
    """Pairs that are undecided for the same reasons together, in the order in which the first of each stands."""
    groups: dict[str, list[PairResult]] = {}
    for pair in pairs:
        groups.setdefault(repr(_reasons(pair)), []).append(pair)
    return list(groups.values())


def _undecided(pairs: list[PairResult], look: Look) -> list[str]:
    lines = _wrap(", ".join(safe(pair.name) for pair in pairs), look, "  ", "  ")
    for text, rules in _reasons(pairs[0]).items():
        lines += _wrap(text + (f" ({', '.join(rules)})" if rules else ""), look, "    ", "      ")
    return lines


def _reasons(pair: PairResult) -> dict[str, list[str]]:
    """What is not known of a pair, each with the rules that could not judge for it."""
    reasons: dict[str, list[str]] = {}
    for rule in pair.unjudged:
        reasons.setdefault(safe(rule.missing), []).append(rule.rule)
    for text in pair.missing:
        reasons.setdefault(safe(text), [])
    return reasons


def _place(result: Result, place: Place) -> str:
    return f"{safe(place.layer)} {coordinates(place.x_mm, place.y_mm, result.board.units)}".strip()


def _labelled(label: str, text: str, look: Look, colour: str) -> list[str]:
    """The text wrapped in its own column, the label before its first line; colour is added after wrapping."""
    lines = _wrap(text, look, " " * _TEXT_AT, " " * _TEXT_AT)
    head = f"  {label}".ljust(_TEXT_AT)
    if colour and look.colour:
        head = head.replace(label, f"\x1b[{colour}m{label}\x1b[0m")
    return [head + lines[0][_TEXT_AT:], *lines[1:]]


def _named(head: str, names: list[str] | tuple[str, ...], look: Look) -> list[str]:
    return _wrap(head + ", ".join(safe(name) for name in names), look, "", "  ")


def _wrap(text: str, look: Look, first: str = "", later: str = "") -> list[str]:
    """Lines of the look's width. Names are not cut at hyphens; only one longer than a whole line is cut at all."""
    whole = _TOGETHER.sub(lambda found: found[0].replace(" ", _HELD), text)
    lines = textwrap.wrap(whole, look.width, initial_indent=first, subsequent_indent=later, break_on_hyphens=False)
    return [line.replace(_HELD, " ") for line in lines]


REPORT = Report(name="listing", summary="what is wrong, where, what to do", commands=("check",), render=render)
