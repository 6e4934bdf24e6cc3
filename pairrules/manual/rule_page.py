"""The manual's page of one rule: the parts of its docstring, its models, what ships for it, and how to tune it."""

from __future__ import annotations

import importlib
import inspect
import json
import re
from collections.abc import Mapping
from functools import cache

from pairrules.board.units import example
from pairrules.checks.rule import Rule, all_rules
from pairrules.checks.rule_help import rule_infos
from pairrules.manual.page import Code, Page, Paragraph, Section, Terms
from pairrules.manual.rule_findings import rule_findings
from pairrules.manual.shipped_limits import ShippedLimit, shipped_limits
from pairrules.reports.report import Explained
from pairrules.result import SEVERITIES
from pairrules.schemas.glossary import MODELS, Model, glossary
from pairrules.settings.class_values import limit_amounts, limit_in_words
from pairrules.settings.limit import TIMES

_HEADINGS = {"Example": "An example in numbers", "Source": "Where formula and limits come from"}
_NONE = Paragraph(text="No shipped set holds a limit for it: it judges where a class of yours does.")


@cache
def models_of(name: str) -> tuple[Model, ...]:
    """The models a rule rests on: those of the figures it judges, and those it names; in the glossary's order."""
    rule = all_rules()[name]
    (info,) = rule_infos({name: rule})
    judged = " ".join(text for title, text in info.help if title in {"What it judges", "Formula"})
    figures = (entry.model for word, entry in glossary().items() if re.search(rf"\b{word}\b", judged))
    used = {*rule.models, *figures}
    return tuple(model for model in MODELS.values() if model.name in used)


def explained() -> Mapping[str, tuple[Explained, ...]]:
    """What every rule rests on, in short."""
    return {
        name: tuple(
            Explained(model=model.brief, valid=model.valid, electrical=model.electrical) for model in models_of(name)
        )
        for name in all_rules()
    }


def rule_page(name: str) -> Page:
    """The page of a rule. Raises: KeyError where there is none of that name."""
    rule = all_rules()[name]
    (info,) = rule_infos({name: rule})
    parts = [Section(heading=_HEADINGS.get(title, title), blocks=(Paragraph(text=text),)) for title, text in info.help]
    return Page(
        name=name,
        sections=(
            Section(heading="", blocks=(Paragraph(text=_opening(name)),)),
            *parts,
            Section(heading="A finding of it", blocks=_found(name)),
            Section(heading="What it rests on", blocks=(_models(name),)),
            Section(heading="Limits that ship", blocks=_shipped(name, rule)),
            Section(heading="How to tune it", blocks=_tuning(name, rule)),
        ),
    )


def _opening(name: str) -> str:
    module = importlib.import_module(f"pairrules.checks.{name.replace('-', '_')}")
    return inspect.cleandoc(module.__doc__ or all_rules()[name].summary).splitlines()[0]


def _models(name: str) -> Terms:
    rows = (
        (
            model.name,
            (
                f"{model.brief}",
                f"valid: {model.valid}",
            ),
        )
        for model in models_of(name)
    )
    return Terms(rows=tuple(rows))


def _found(name: str) -> tuple[Paragraph, Terms]:
    """What the rule tells of the pair that has its fault on the board of seeded faults."""
    finding = rule_findings()[name]
    said = (
        f"Made by running the rule on pair {finding.pair} of an invented board, a tide gauge and weather buoy with one "
        "fault a pair."
    )
    rows = [(finding.severity, (finding.found,))]
    rows += [("at", ("; ".join(finding.at),))] if finding.at else []
    rows.append(("to do", (finding.advice,)))
    return Paragraph(text=said), Terms(rows=tuple(rows))


def _shipped(name: str, rule: Rule) -> tuple[Terms | Paragraph, ...]:
    limits = shipped_limits().get(name, ())
    if not limits:
        return (_NONE,)
    return (Terms(rows=tuple((one.of, _shipped_texts(one, rule)) for one in limits)),)


def _shipped_texts(one: ShippedLimit, rule: Rule) -> tuple[str, ...]:
    if one.limit is None:
        return ("off",)
    return f"{limit_in_words(one.limit, rule.form)}; severity {one.limit.severity}", f"from: {one.limit.source}"


def _tuning(name: str, rule: Rule) -> tuple[Terms | Paragraph | Code, ...]:
    rows = [(key, (_said(key, dimension, rule),)) for key, dimension in rule.quantities.items()]
    rows += [
        ("severity", (f"{', '.join(SEVERITIES)}; worst first",)),
        ("source", ("where your limit comes from, a text of your own",)),
    ]
    needs = ""
    if len(rule.required) > 1:
        needs = f" At least one of {', '.join(rule.required)} is needed."
    elif rule.required:
        needs = f" {rule.required[0].capitalize()} is needed."
    said = "Under `limits`, at the top level for all pairs or in a class, the rule takes:"
    if not rule.quantities:
        said = "Under `limits`, at the top level for all pairs or in a class, the rule takes no quantity, only:"
    return (
        Paragraph(text=said),
        Terms(rows=tuple(rows)),
        Paragraph(text=f"`{name}: off` in a class switches it off there.{needs} For example:"),
        Code(text=tuning_example(name)),
    )


def _said(key: str, dimension: str, rule: Rule) -> str:
    said = f"{dimension}, such as {example(dimension)}"
    if key in rule.timed:
        if dimension != "time":
            said += "; or a time, such as 20 ps"
        said += f"; or a share, such as 5 % of {' or '.join(TIMES)}"
    return said


def tuning_example(name: str) -> str:
    """A settings file that gives a class a limit for the rule: what ships for it first, else made up from its units."""
    rule = all_rules()[name]
    shipped = next((one.limit for one in shipped_limits().get(name, ()) if one.limit is not None), None)
    if shipped is None:
        keys = rule.required[:1] or tuple(rule.quantities)[:1]
        said = {key: example(rule.quantities[key]) for key in keys}
        severity = SEVERITIES[1]
    else:
        said, severity = dict(limit_amounts(shipped, rule.form)), shipped.severity
    values = ", ".join(
        [
            *(f"{key}: {amount}" for key, amount in said.items()),
            f"severity: {severity}",
            'source: "our own measurement"',
        ]
    )
    return f"classes:\n  tide-gauge:\n    match: [{json.dumps('TIDE*')}]\n    limits:\n      {name}: {{{values}}}\n"
