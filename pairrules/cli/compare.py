"""`pairrules compare`: what got worse or better from an old board to a new one."""

from __future__ import annotations

from datetime import date

import click

from pairrules.cli.earlier import earlier_result, is_saved
from pairrules.cli.options import output_option, pair_option, settings_option, step_option, today_option
from pairrules.cli.output import look, write
from pairrules.comparison.as_json import as_json
from pairrules.comparison.as_listing import as_listing
from pairrules.comparison.compare import compare


@click.command(name="compare")
@click.argument("old")
@click.argument("new")
@settings_option
@click.option("--format", "form", type=click.Choice(("json", "listing")), default="listing", show_default=True)
@output_option
@pair_option
@step_option
@today_option
@click.pass_context
def command(
    ctx: click.Context,
    *,
    old: str,
    new: str,
    settings: str | None,
    form: str,
    output: str | None,
    pair: str,
    step: str,
    today: date | None,
) -> None:
    """Hold NEW against OLD, pair by pair; each is a board or a result that `check --format json` wrote.

    Boards are both judged by the settings of NEW. Exit status: 0 nothing got worse, 1 something got worse, 2 and 3 as
    `check`.
    """
    after = earlier_result(new, settings, pair=pair, step=step, today=today)
    before = earlier_result(
        old, settings, settings_of=None if is_saved(new) else new, pair=pair, step=step, today=today
    )
    comparison = compare(before, after)
    write(as_json(comparison) if form == "json" else as_listing(comparison, look(output)), output)
    ctx.exit(int(comparison.worse))
