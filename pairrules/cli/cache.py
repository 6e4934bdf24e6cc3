"""`pairrules cache`: how much is kept between runs and where, or drop it."""

from __future__ import annotations

import click

from pairrules.reports.safe_text import safe
from pairrules.running.kept_check import kept_results


@click.command(name="cache")
@click.option("--clear", is_flag=True, help="Drop it all.")
def command(*, clear: bool) -> None:
    """Tell how much is kept between runs, how large it is, and where.

    That is the results of boards and settings that do not change, and cross-sections that were solved.
    """
    from pairrules.running.section_file import SectionFile

    kept = kept_results()
    file = SectionFile(kept.folder)
    extent, solved = (kept.clear(), file.clear()) if clear else (kept.extent(), file.extent())
    where = f"in {safe(str(kept.folder))}"
    told = ((extent.results, "result", extent.size), (solved.sections, "solved cross-section", solved.size))
    for count, what, size in told:
        many = "" if count == 1 else "s"
        click.echo(f"{count} {what}{many} {'dropped' if clear else 'kept'}, {size / 1e6:.1f} MB, {where}")
