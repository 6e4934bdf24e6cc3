"""What a report is, and how the reports of this folder are found."""

from __future__ import annotations

import importlib
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from functools import cache
from pathlib import Path

from pairrules.result import Result


@dataclass(frozen=True, slots=True, kw_only=True)
class Explained:
    """What a rule rests on, in short: `model`, and where it is `valid`. `electrical`: with solved sections in it."""

    model: str
    valid: str
    electrical: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Look:
    """How a report meant for people is drawn.

    `width`: columns. `colour`: whether terminal colours may be used. `explained`: what each rule rests on, for reports
    that tell it beside findings; empty where that is not asked for.
    """

    width: int = 80
    colour: bool = False
    explained: Mapping[str, tuple[Explained, ...]] = field(default_factory=dict)


def apart(texts: tuple[str, ...]) -> str:
    """Reports of several boards one after the other, an empty line between."""
    return "\n".join(texts)


@dataclass(frozen=True, slots=True, kw_only=True)
class Report:
    """A report: set as `REPORT` in a file of this folder.

    Parameters
    ----------
    name: what `--format` calls it. summary: what it is, in a few words.
    commands: the commands that offer it ("check", "measure").
    render: the result as text, ending with a line break.
    join: texts of several boards to one.
    unreadable: what takes the place of a board that cannot be read, from its file, the reason, and our version; `None`
        where the report cannot tell of one.
    """

    name: str
    summary: str
    commands: tuple[str, ...]
    render: Callable[[Result, Look], str]
    join: Callable[[tuple[str, ...]], str] = apart
    unreadable: Callable[[str, str, str], str] | None = None


@cache
def all_reports() -> Mapping[str, Report]:
    """Every report by its file's name, sorted; files of this folder that set none are not imported."""
    found: dict[str, Report] = {}
    for path in sorted(Path(__file__).parent.glob("*.py")):
        if "\nREPORT = " in path.read_text(encoding="utf-8"):
            found[path.stem] = importlib.import_module(f"pairrules.reports.{path.stem}").REPORT
    return found


def reports_of(command: str) -> Mapping[str, Report]:
    """The reports that a command offers, by the name that `--format` calls them."""
    return {report.name: report for report in all_reports().values() if command in report.commands}
