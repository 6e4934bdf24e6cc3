"""The option `--report NAME=FILE`: further reports of one run, each in its own file."""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path

import click

from pairrules.reports.report import Report

report_option = click.option(
    "--report",
    "wanted",
    metavar="NAME=FILE",
    multiple=True,
    help="A further report into a file, as sarif=out.sarif; may be given several times.",
)


@dataclass(frozen=True, slots=True)
class FileReport:
    """A report and the file it goes to."""

    report: Report
    file: str


def file_reports(
    wanted: Iterable[str], known: Mapping[str, Report], output: str | None, ctx: click.Context
) -> tuple[FileReport, ...]:
    """What `--report` asks for.

    Raises: click.UsageError for a name that is none, with the nearest that is; where NAME or FILE is missing; where two
    texts would go to one file, `--output` counted.
    """
    found: list[FileReport] = []
    taken = {} if output is None else {_real(output): "--output"}
    for text in wanted:
        name, equals, file = text.partition("=")
        if not equals or not file or not name:
            raise click.UsageError(f"--report {text!r} is not NAME=FILE, as in sarif=out.sarif", ctx)
        if name not in known:
            near = difflib.get_close_matches(name, known, n=1, cutoff=0.5)
            hint = f"; do you mean {near[0]!r}" if near else ""
            raise click.UsageError(f"there is no report {name!r}{hint}; there are {', '.join(sorted(known))}", ctx)
        other = taken.setdefault(_real(file), f"--report {name}")
        if other != f"--report {name}" or any(_real(one.file) == _real(file) for one in found):
            raise click.UsageError(f"--report {name} and {other} name the same file {file!r}", ctx)
        found.append(FileReport(known[name], file))
    return tuple(found)


def _real(file: str) -> str:
    """The file itself, whatever links and dots lead to it."""
    try:
        return str(Path(file).resolve())
    except (OSError, ValueError):
        # Links in a circle, or no name at all: writing will say so.
        return file
