"""Options that several commands take."""

from __future__ import annotations

from datetime import date

import click


def as_date(ctx: click.Context, param: click.Parameter, value: str | None) -> date | None:
    """A day written YYYY-MM-DD, for an option."""
    if value is None:
        return None
    from pairrules.settings.waivers import as_day

    day = as_day(value)
    if day is None:
        raise click.BadParameter(f"{value!r} is no day; write it as 2031-05-17", ctx, param)
    return day


settings_option = click.option(
    "--settings",
    metavar="FILE",
    help="Settings; else the nearest pairrules.yaml upward from the board, else the shipped base set.",
)
output_option = click.option("--output", metavar="FILE", help="Write there instead of to stdout; all or nothing.")
pair_option = click.option(
    "--pair", metavar="PATTERN", default="*", help="Only pairs whose name, or a net's name, matches (* ? [...])."
)
step_option = click.option("--step", metavar="NAME", default="", help="Which board, where the file has several.")
today_option = click.option(
    "--today",
    metavar="YYYY-MM-DD",
    callback=as_date,
    help="The day on which waivers must still hold; else the clock's.",
)
jobs_option = click.option(
    "--jobs",
    type=click.IntRange(min=1),
    default=None,
    metavar="N",
    help="Work in so many processes; as many as there are processors where that pays. The result is the same for any.",
)
cache_option = click.option(
    "--cache/--no-cache",
    "cached",
    default=True,
    help="Whether to answer from results kept of earlier runs, and keep this one; see `pairrules cache`.",
)
