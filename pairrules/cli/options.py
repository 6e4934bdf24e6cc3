"""Options that several commands take."""

from __future__ import annotations

import click

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
