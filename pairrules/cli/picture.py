"""`pairrules picture`: draw one pair as an SVG for a document or a ticket."""

from __future__ import annotations

from datetime import date

import click

from pairrules.cli.options import settings_option, step_option, today_option
from pairrules.cli.output import write
from pairrules.cli.progress import ProgressLine
from pairrules.errors import UsageError
from pairrules.pipeline import check
from pairrules.reports.picture import render
from pairrules.result import PairResult, Result

_NAMED = 8


@click.command(name="picture")
@click.argument("board")
@click.option(
    "--pair", metavar="NAME", required=True, help="The pair, by its name or a net's (* ? [...] stand for text)."
)
@click.option("-o", "--output", metavar="FILE", help="Write there instead of to stdout; all or nothing.")
@settings_option
@step_option
@today_option
def command(*, board: str, pair: str, output: str | None, settings: str | None, step: str, today: date | None) -> None:
    """Draw a pair of BOARD: both legs, what lies beside and under them, and the numbered places of its findings."""
    with ProgressLine() as progress:
        result = check(board, settings, pairs=pair, step=step, drawing=True, today=today, progress=progress)
    chosen = _chosen(result, pair, board)
    if chosen.drawing is None:
        raise UsageError(
            f"the file has no copper of pair {chosen.name}", file=board, remedy="there is nothing to draw of it"
        )
    write(render(result, chosen), output)


def _chosen(result: Result, wanted: str, board: str) -> PairResult:
    """The pair of just that name, else the only one found.

    Raises: UsageError where several are found.
    """
    named = [pair for pair in result.pairs if pair.name == wanted] or list(result.pairs)
    if len(named) > 1:
        names = ", ".join(pair.name for pair in named[:_NAMED]) + (", ..." if len(named) > _NAMED else "")
        raise UsageError(f"{len(named)} pairs match {wanted!r} ({names})", file=board, remedy="name one of them")
    return named[0]
