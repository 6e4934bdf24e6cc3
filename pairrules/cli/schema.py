"""`pairrules schema`: the JSON schema of a file that pairrules reads or writes."""

from __future__ import annotations

import click

from pairrules.schemas import SCHEMAS, schema_text


@click.command(name="schema")
@click.argument("name", type=click.Choice(tuple(SCHEMAS)))
def command(*, name: str) -> None:
    """Print the schema NAME."""
    click.echo(schema_text(name).rstrip("\n"))
