"""`pairrules cache`: how many results are kept between runs and where, or drop them."""

from __future__ import annotations

import click

from pairrules.reports.safe_text import safe
from pairrules.running.kept_check import kept_results


@click.command(name="cache")
@click.option("--clear", is_flag=True, help="Drop them all.")
def command(*, clear: bool) -> None:
    """Tell how many results are kept for boards and settings that do not change, how large they are, and where."""
    kept = kept_results()
    extent = kept.clear() if clear else kept.extent()
    results = "1 result" if extent.results == 1 else f"{extent.results} results"
    said = "dropped" if clear else "kept"
    click.echo(f"{results} {said}, {extent.size / 1e6:.1f} MB, in {safe(str(kept.folder))}")
