"""The manual's pages of figures and models."""

from __future__ import annotations

from pairrules.checks.rule import all_rules
from pairrules.manual.page import Page, Paragraph, Section, Terms
from pairrules.manual.rule_page import models_of
from pairrules.schemas.glossary import MODELS, Entry, Model, glossary


def figure_page(name: str) -> Page:
    """The page of a figure: what it is, the model it rests on. Raises: KeyError where there is none of that name."""
    entry = glossary()[name]
    return Page(
        name=name,
        sections=(
            Section(heading="", blocks=(Paragraph(text=_defined(entry)),)),
            Section(heading=f"Model: {entry.model}", blocks=_about(MODELS[entry.model])),
        ),
    )


def figures_page() -> Page:
    """Every figure of a result with its definition and its model's name."""
    rows = ((entry.name, (_defined(entry), f"Model: {entry.model}.")) for entry in glossary().values())
    return Page(name="Figures", sections=(Section(heading="", blocks=(Terms(rows=tuple(rows)),)),))


def model_page(name: str) -> Page:
    """The page of a model, with the figures and rules that rest on it."""
    model = MODELS[name]
    figures = [entry.name for entry in glossary().values() if entry.model == name]
    rules = [rule for rule in all_rules() if model in models_of(rule)]
    used = ((word, (", ".join(names),)) for word, names in (("figures", figures), ("rules", rules)) if names)
    return Page(
        name=f"Model: {name}",
        sections=(
            Section(heading="", blocks=_about(model)),
            Section(heading="What rests on it", blocks=(Terms(rows=tuple(used)),)),
        ),
    )


def _defined(entry: Entry) -> str:
    unit = f" [{entry.unit}]" if entry.unit else " A count." if entry.name.startswith("vias") else ""
    return f"{entry.definition}{unit}"


def _about(model: Model) -> tuple[Paragraph | Terms, ...]:
    rows = (
        ("valid", (model.valid,)),
        ("leaves out", (model.leaves_out,)),
        ("assumes", (model.assumes,)),
        ("source", (model.source,)),
    )
    opening = f"{model.brief[:1].upper()}{model.brief[1:]}. {model.text}"
    return Paragraph(text=opening), Terms(rows=rows)
