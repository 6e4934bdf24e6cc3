"""`pairrules check`: judge the pairs of boards."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from datetime import date

import click

from pairrules import __version__
from pairrules.cli.earlier import earlier_result
from pairrules.cli.error_lines import error_lines
from pairrules.cli.options import output_option, pair_option, settings_option, step_option, today_option
from pairrules.cli.output import ToWrite, look, write, write_files
from pairrules.cli.progress import ProgressLine
from pairrules.cli.report_option import file_reports, report_option
from pairrules.comparison.compare import with_baseline
from pairrules.errors import BoardError, UserError
from pairrules.manual.rule_page import explained
from pairrules.pipeline import check
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
) -> None:
    """Judge the pairs of each BOARD (IPC-2581 XML or plain JSON) against the limits of their classes.

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
    if since is not None and len(boards) > 1:
        raise click.UsageError("--since takes one BOARD", ctx)
    report, status = reports_of("check")[form], 0
    also = file_reports(wanted, reports_of("check"), output, ctx)
    outcomes: list[Result | BoardError] = []
    said: set[str] = set()
    for board in boards:
        try:
            with ProgressLine() as progress:
                result = check(board, settings, pairs=pair, step=step, today=today, progress=progress)
            if since is not None:
                old = earlier_result(since, settings, settings_of=board, step=step, today=today)
                result = with_baseline(old, result)
        except UserError as error:
            status = max(status, error.exit_status)
            for line in error_lines(error):
                if line not in said:
                    click.echo(line, err=True)
                said.add(line)
            if isinstance(error, BoardError):
                outcomes.append(error)
            continue
        status = max(status, int(_flagged(result, severity)))
        # Where the package is installed says nothing about the demo board.
        outcomes.append(replace(result, board=replace(result.board, file=DEMO[0])) if demo else result)
    seen = replace(look(output), explained=explained()) if explain else look(output)
    text, whole = _told(report, outcomes, len(boards), seen)
    files = [] if output is None or not whole else [ToWrite(text, output)]
    for one in also:
        told, complete = _told(one.report, outcomes, len(boards), Look())
        if complete:
            files.append(ToWrite(told, one.file, f"--report {one.report.name}"))
        else:
            click.echo(f"pairrules: {safe(one.file)} is not written, since not all boards could be judged", err=True)
    write_files(files)
    if output is None:
        write(text, None)
    ctx.exit(status)


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
