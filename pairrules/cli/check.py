"""`pairrules check`: judge the pairs of boards."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from datetime import date

import click

from pairrules import __version__
from pairrules.cli.boards import Asked, boards_of, judged
from pairrules.cli.boards_table import boards_table
from pairrules.cli.error_lines import error_lines, say
from pairrules.cli.options import (
    cache_option,
    jobs_option,
    output_option,
    pair_option,
    settings_option,
    step_option,
    today_option,
)
from pairrules.cli.output import ToWrite, look, write, write_files
from pairrules.cli.report_option import file_reports, report_option
from pairrules.errors import BoardError, UsageError, UserError
from pairrules.reports.report import Look, Report, reports_of
from pairrules.reports.safe_text import safe
from pairrules.result import SEVERITIES, Result
from pairrules.shipped import demo_folder

DEMO = ("tide-gauge-buoy.json", "pairrules.yaml")


@click.command(name="check")
@click.argument("boards", nargs=-1, metavar="BOARD...")
@click.option("--demo", is_flag=True, help="Check the invented board that comes with pairrules.")
@settings_option
@click.option(
    "--format",
    "form",
    type=click.Choice(sorted(reports_of("check"))),
    default="listing",
    show_default=True,
    help="How the result is written.",
)
@output_option
@report_option
@click.option(
    "--severity",
    type=click.Choice(SEVERITIES),
    default=SEVERITIES[-1],
    show_default=True,
    help="Exit with 1 only where something is flagged at or above this.",
)
@click.option("--explain", is_flag=True, help="Tell in the listing what each finding rests on and where that holds.")
@click.option(
    "--since",
    metavar="OLD",
    help="An earlier board, or its result in JSON: what stood there and is no worse is told, but not flagged.",
)
@pair_option
@step_option
@today_option
@click.option("--skip-foreign", is_flag=True, help="Pass over files that are no boards at all, by what is in them.")
@jobs_option
@cache_option
@click.pass_context
def command(
    ctx: click.Context,
    *,
    boards: tuple[str, ...],
    demo: bool,
    settings: str | None,
    form: str,
    output: str | None,
    wanted: tuple[str, ...],
    severity: str,
    explain: bool,
    since: str | None,
    pair: str,
    step: str,
    today: date | None,
    skip_foreign: bool,
    jobs: int | None,
    cached: bool,
) -> None:
    """Judge the pairs of each BOARD (IPC-2581 XML or plain JSON) against the limits of their classes.

    A folder or a pattern as BOARD means all boards in it; a table of them then ends the listing.

    Exit status: 0 nothing flagged, 1 something flagged, 2 wrong usage or settings, 3 a board could not be read.
    """
    if demo:
        if boards:
            raise click.UsageError("--demo takes no BOARD", ctx)
        boards = (str(demo_folder() / DEMO[0]),)
        settings = str(demo_folder() / DEMO[1]) if settings is None else settings
    if explain and form != "listing":
        raise click.UsageError("--explain belongs to the listing; leave it or --format out", ctx)
    if not boards:
        raise click.UsageError("no BOARD is given; name a file, or take --demo", ctx)
    files = boards_of(boards)
    if since is not None and max(len(boards), len(files)) > 1:
        raise click.UsageError("--since takes one BOARD", ctx)
    report, status = reports_of("check")[form], 0
    also = file_reports(wanted, reports_of("check"), output, ctx)
    asked = [
        Asked(
            path=path,
            found=found or skip_foreign,
            settings=settings,
            pair=pair,
            step=step,
            today=today,
            since=since,
            cached=cached,
        )
        for path, found in files
    ]
    outcomes: list[Result | BoardError] = []
    rows: list[tuple[str, Result | None, bool]] = []
    said: set[str] = set()
    for one, outcome in zip(asked, judged(asked, jobs=jobs), strict=True):
        if isinstance(outcome, UserError):
            status = max(status, outcome.exit_status)
            for line in error_lines(outcome):
                if line not in said:
                    say(line)
                said.add(line)
            rows.append((one.path, None, False))
            if isinstance(outcome, BoardError):
                outcomes.append(outcome)
        elif outcome is not None:
            flagged = _flagged(outcome, severity)
            status = max(status, int(flagged))
            rows.append((one.path, outcome, flagged))
            # Where the package is installed says nothing about the demo board.
            outcomes.append(replace(outcome, board=replace(outcome.board, file=DEMO[0])) if demo else outcome)
    if not rows:
        if skip_foreign:
            ctx.exit(0)
        raise UsageError("none of the files is a board", file=boards[0], remedy="name a board, or the folder it is in")
    seen = _explaining(look(output)) if explain else look(output)
    text, whole = _told(report, outcomes, len(rows), seen)
    if form == "listing" and len(rows) > 1:
        text = "\n".join(filter(None, (text, boards_table(rows))))
    to_write = [] if output is None or not whole else [ToWrite(text, output)]
    for also_one in also:
        told, complete = _told(also_one.report, outcomes, len(rows), Look())
        if complete:
            to_write.append(ToWrite(told, also_one.file, f"--report {also_one.report.name}"))
        else:
            say(f"pairrules: {safe(also_one.file)} is not written, since not all boards could be judged")
    write_files(to_write)
    if output is None:
        write(text, None)
    ctx.exit(status)


def _explaining(seen: Look) -> Look:
    from pairrules.manual.rule_page import explained

    return replace(seen, explained=explained())


def _told(report: Report, outcomes: Sequence[Result | BoardError], boards: int, seen: Look) -> tuple[str, bool]:
    """The report, and whether it tells of every board: some reports cannot tell of one that could not be read."""
    texts = []
    for one in outcomes:
        if isinstance(one, Result):
            texts.append(report.render(one, seen))
        elif report.unreadable is not None:
            texts.append(report.unreadable(one.file, str(one), __version__))
    if not texts:
        return "", False
    return report.join(tuple(texts)) if boards > 1 else texts[0], len(texts) == boards


def _flagged(result: Result, severity: str) -> bool:
    wanted = SEVERITIES[: SEVERITIES.index(severity) + 1]
    return any(
        finding.severity in wanted and not finding.waived and finding.baseline != "unchanged"
        for pair in result.pairs
        for finding in pair.findings
    )
