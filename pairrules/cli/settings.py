"""`pairrules settings`: what settings each pair ended up with and from where; or a first settings file for a board."""

from __future__ import annotations

import click

from pairrules.checks.rule import all_rules
from pairrules.cli.options import output_option, pair_option, settings_option, step_option
from pairrules.cli.output import look, write
from pairrules.cli.progress import ProgressLine
from pairrules.cli.settings_table import settled, table, text_json
from pairrules.pipeline import draft_settings, pair_classes


@click.command(name="settings")
@click.argument("board")
@click.option(
    "--new", "draft", is_flag=True, help="Write a first settings file for BOARD instead, with what to fill in."
)
@settings_option
@click.option(
    "--format",
    "form",
    type=click.Choice(("json", "table")),
    help="How the settings of the pairs are written; table unless said.",
)
@output_option
@pair_option
@step_option
@click.pass_context
def command(
    ctx: click.Context,
    *,
    board: str,
    draft: bool,
    settings: str | None,
    form: str | None,
    output: str | None,
    pair: str,
    step: str,
) -> None:
    """Show of each pair of BOARD its class, limits, source, load, cable, frequencies: each with file and line."""
    if draft:
        if settings is not None or form is not None:
            raise click.UsageError("--new takes neither --settings nor --format", ctx)
        with ProgressLine() as progress:
            text = draft_settings(board, pairs=pair, step=step, progress=progress)
        write(text, output)
        return
    chosen, found = pair_classes(board, settings, pairs=pair, step=step)
    forms = {name: rule.form for name, rule in all_rules().items()}
    pairs = [settled(one, klass, chosen, forms) for one, klass in found]
    if form == "json":
        write(text_json(board, chosen.files, pairs), output)
    else:
        write(table(board, chosen.files, pairs, look(output)), output)
