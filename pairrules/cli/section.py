"""`pairrules section`: what the field solution gives for cross-sections written as JSON."""

from __future__ import annotations

import click

from pairrules.cli.options import output_option
from pairrules.cli.output import write
from pairrules.cli.standalone import SECTION, answers, as_json
from pairrules.cli.standalone_tables import as_tables


@click.command(name="section")
@click.argument("file", metavar="FILE")
@click.option("--format", "form", type=click.Choice(["table", "json"]), default="table", show_default=True)
@output_option
def command(*, file: str, form: str, output: str | None) -> None:
    """Solve the section in FILE (JSON, `-` for stdin), or each of a list; links in the list are solved too."""
    kinds, found, listed = answers(file, SECTION)
    write(as_json(found, listed=listed) if form == "json" else as_tables(kinds, found), output)
