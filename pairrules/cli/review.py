"""`pairrules review`: a page to review a board's pairs in a browser, in one file."""

from __future__ import annotations

from dataclasses import replace
from datetime import date

import click

from pairrules.cli.options import jobs_option, pair_option, settings_option, step_option, today_option
from pairrules.cli.output import write
from pairrules.cli.progress import ProgressLine
from pairrules.pipeline import check
from pairrules.reports.review_page.page import render
from pairrules.shipped import demo_folder

DEMO = ("tide-gauge-buoy.json", "pairrules.yaml")


@click.command(name="review")
@click.argument("board", required=False)
@click.option("--demo", is_flag=True, help="Review the invented board that comes with pairrules.")
@settings_option
@click.option("-o", "--output", metavar="FILE", required=True, help="Write the page there; all or nothing.")
@pair_option
@step_option
@today_option
@jobs_option
@click.pass_context
def command(
    ctx: click.Context,
    *,
    board: str | None,
    demo: bool,
    settings: str | None,
    output: str,
    pair: str,
    step: str,
    today: date | None,
    jobs: int | None,
) -> None:
    """Write a page on BOARD that opens from disk: the board, its flagged pairs, and a decision for each finding.

    Exit status 0 whatever is flagged, 2 and 3 as `check`.
    """
    if demo and board is not None:
        raise click.UsageError("--demo takes no BOARD", ctx)
    if demo:
        board = str(demo_folder() / DEMO[0])
        settings = str(demo_folder() / DEMO[1]) if settings is None else settings
    if board is None:
        raise click.UsageError("no BOARD is given; name a file, or take --demo", ctx)
    with ProgressLine() as progress:
        result = check(board, settings, pairs=pair, step=step, drawing=True, today=today, jobs=jobs, progress=progress)
    if demo:
        # Where the package is installed says nothing about the demo board.
        result = replace(result, board=replace(result.board, file=DEMO[0]))
    write(render(result), output)
