"""`pairrules pairs`: which pairs a board has and how they were found."""

from __future__ import annotations

import click

from pairrules.cli.options import output_option, pair_option, settings_option, step_option
from pairrules.cli.output import look, write
from pairrules.pipeline import find_pairs
from pairrules.reports.pairs_table import render, render_json


@click.command(name="pairs")
@click.argument("board")
@settings_option
@click.option(
    "--format",
    "form",
    type=click.Choice(("json", "table")),
    default="table",
    show_default=True,
    help="How the pairs are written.",
)
@output_option
@pair_option
@step_option
def command(*, board: str, settings: str | None, form: str, output: str | None, pair: str, step: str) -> None:
    """List the pairs of BOARD: nets, how found, ends, parts in series, and nets that look like half a pair."""
    found = find_pairs(board, settings, pairs=pair, step=step)
    write(render_json(found) if form == "json" else render(found, look(output)), output)
