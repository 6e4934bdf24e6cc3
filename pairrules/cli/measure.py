"""`pairrules measure`: all figures of a board's pairs, without judging."""

from __future__ import annotations

from datetime import date

import click

from pairrules.cli.options import (
    cache_option,
    jobs_option,
    output_option,
    pair_option,
    settings_option,
    step_option,
    today_option,
)
from pairrules.cli.output import look, write
from pairrules.cli.progress import ProgressLine
from pairrules.reports.report import reports_of
from pairrules.running.kept_check import kept_check, kept_results


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
@jobs_option
@cache_option
def command(
    *,
    board: str,
    settings: str | None,
    form: str,
    output: str | None,
    pair: str,
    step: str,
    today: date | None,
    jobs: int | None,
    cached: bool,
) -> None:
    """Print all figures of the pairs of BOARD. Exit status 0 whatever they are, 2 and 3 as `check`."""
    with ProgressLine() as progress:
        result = kept_check(
            board,
            settings,
            pairs=pair,
            step=step,
            today=today,
            jobs=jobs,
            progress=progress,
            kept=kept_results() if cached else None,
        )
    write(reports_of("measure")[form].render(result, look(output)), output)
