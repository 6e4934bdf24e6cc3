"""`pairrules explain`: what a rule judges and why, its limits and how to tune it; what a figure means."""

from __future__ import annotations

from collections.abc import Iterable

import click

from pairrules.checks.rule import all_rules
from pairrules.cli.options import output_option
from pairrules.cli.output import write
from pairrules.errors import UsageError
from pairrules.manual.figure_page import figure_page, figures_page, model_page
from pairrules.manual.page import Page, Paragraph, Section, Terms, markdown, plain
from pairrules.manual.rule_page import rule_page
from pairrules.schemas.glossary import MODELS, glossary
from pairrules.settings.faults import nearest

TITLE = "Rules and figures of pairrules"
OPENING = "Drawn from the rules' own files, the shipped rule sets and the glossary by `pairrules explain --all`."


@click.command(name="explain")
@click.argument("rule", required=False)
@click.option("--figure", metavar="NAME", help="Explain a figure of the result instead, such as gap_min_mm.")
@click.option("--all", "everything", is_flag=True, help="The whole manual: every rule, figure and model.")
@click.option(
    "--format",
    "form",
    type=click.Choice(("markdown", "text")),
    default="text",
    show_default=True,
    help="How it is written; text has 80 columns.",
)
@output_option
@click.pass_context
def command(
    ctx: click.Context, *, rule: str | None, figure: str | None, everything: bool, form: str, output: str | None
) -> None:
    """Explain RULE: what it judges and why, formula, sources, shipped limits, how to mend and how to tune.

    Without RULE all rules are listed, each in a line.
    """
    if (rule is not None) + (figure is not None) + everything > 1:
        raise click.UsageError("give one of RULE, --figure and --all", ctx)
    if everything:
        pages = manual()
    elif figure is not None:
        pages = (figure_page(_known(figure, glossary(), "figure", ("rule", all_rules(), ""))),)
    elif rule is not None:
        pages = (rule_page(_known(rule, all_rules(), "rule", ("figure", glossary(), "--figure "))),)
    else:
        pages = (_overview(),)
    write(plain(pages) if form == "text" else markdown(TITLE, OPENING, pages), output)


def manual() -> tuple[Page, ...]:
    """Every page: rules by name, then the figures, then the models they rest on."""
    return (*(rule_page(name) for name in all_rules()), figures_page(), *(model_page(name) for name in MODELS))


def _overview() -> Page:
    rows = tuple((name, (rule.summary,)) for name, rule in all_rules().items())
    more = "`pairrules explain RULE` tells more of one, `--figure NAME` of a figure, `--all` everything."
    return Page(name="Rules", sections=(Section(heading="", blocks=(Terms(rows=rows), Paragraph(text=more))),))


def _known(name: str, names: Iterable[str], kind: str, other: tuple[str, Iterable[str], str]) -> str:
    """The name itself. Raises: UsageError where there is none of it, with the nearest one."""
    if name in names:
        return name
    other_kind, others, option = other
    if name in others:
        raise UsageError(f"{name} is a {other_kind}, no {kind}", remedy=f"write `pairrules explain {option}{name}`")
    raise UsageError(f"there is no {kind} {name!r}", remedy=nearest(name, names))
