"""`pairrules check`: judge the pairs of boards."""

from __future__ import annotations

from dataclasses import replace

import click

from pairrules.cli.error_lines import error_lines
from pairrules.cli.options import output_option, pair_option, settings_option, step_option
from pairrules.cli.output import look, write
from pairrules.cli.progress import ProgressLine
from pairrules.errors import UserError
from pairrules.pipeline import check
from pairrules.reports.report import reports_of
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
@click.option(
    "--severity",
    type=click.Choice(SEVERITIES),
    default=SEVERITIES[-1],
    show_default=True,
    help="Exit with 1 only where something is flagged at or above this.",
)
@pair_option
@step_option
@click.pass_context
def command(
    ctx: click.Context,
    *,
    boards: tuple[str, ...],
    demo: bool,
    settings: str | None,
    form: str,
    output: str | None,
    severity: str,
    pair: str,
    step: str,
) -> None:
    """Judge the pairs of each BOARD (IPC-2581 XML or plain JSON) against the limits of their classes.

    Exit status: 0 nothing flagged, 1 something flagged, 2 wrong usage or settings, 3 a board could not be read.
    """
    if demo:
        if boards:
            raise click.UsageError("--demo takes no BOARD", ctx)
        boards = (str(demo_folder() / DEMO[0]),)
        settings = str(demo_folder() / DEMO[1]) if settings is None else settings
    if not boards:
        raise click.UsageError("no BOARD is given; name a file, or take --demo", ctx)
    report, results, status = reports_of("check")[form], [], 0
    said: set[str] = set()
    for board in boards:
        try:
            with ProgressLine() as progress:
                result = check(board, settings, pairs=pair, step=step, progress=progress)
        except UserError as error:
            status = max(status, error.exit_status)
            for line in error_lines(error):
                if line not in said:
                    click.echo(line, err=True)
                said.add(line)
            continue
        status = max(status, int(_flagged(result, severity)))
        # Where the package is installed says nothing about the demo board.
        results.append(replace(result, board=replace(result.board, file=DEMO[0])) if demo else result)
    if not results or (output is not None and len(results) < len(boards)):
        ctx.exit(status)
    texts = tuple(report.render(result, look(output)) for result in results)
    write(report.join(texts) if len(boards) > 1 else texts[0], output)
    ctx.exit(status)


def _flagged(result: Result, severity: str) -> bool:
    wanted = SEVERITIES[: SEVERITIES.index(severity) + 1]
    return any(finding.severity in wanted and not finding.waived for pair in result.pairs for finding in pair.findings)
