"""`pairrules measure`: all figures of a board's pairs, without judging."""

from __future__ import annotations

from datetime import date

import click

from pairrules.cli.options import output_option, pair_option, settings_option, step_option, today_option
from pairrules.cli.output import look, write
from pairrules.cli.progress import ProgressLine
from pairrules.pipeline import check
from pairrules.reports.report import reports_of


@click.command(name="measure")
@click.argument("board")
@settings_option
@click.option(
    "--format",
    "form",
    type=click.Choice(sorted(reports_of("measure"))),
    default="table",
    show_default=True,
    help="How the figures are written.",
)
@output_option
@pair_option
@step_option
@today_option
def command(
    *, board: str, settings: str | None, form: str, output: str | None, pair: str, step: str, today: date | None
) -> None:
    """Print all figures of the pairs of BOARD. Exit status 0 whatever they are, 2 and 3 as `check`."""
    with ProgressLine() as progress:
        result = check(board, settings, pairs=pair, step=step, today=today, progress=progress)
    write(reports_of("measure")[form].render(result, look(output)), output)
