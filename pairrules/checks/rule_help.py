"""Rules as reports explain them: name, summary and the parts of the docstring, as plain text."""

from __future__ import annotations

import importlib
import inspect
from collections.abc import Mapping

from pairrules.checks.rule import Rule
from pairrules.result import RuleInfo


def rule_infos(rules: Mapping[str, Rule]) -> tuple[RuleInfo, ...]:
    """Every rule, sorted by name."""
    return tuple(
        RuleInfo(name=name, summary=rules[name].summary, unit=rules[name].unit, help=_parts(name))
        for name in sorted(rules)
    )


def _parts(name: str) -> tuple[tuple[str, str], ...]:
    """Title and text of each part of the rule's module docstring; () where Python was told to drop docstrings."""
    module = importlib.import_module(f"pairrules.checks.{name.replace('-', '_')}")
    parts: list[tuple[str, list[str]]] = []
    for line in inspect.cleandoc(module.__doc__ or "").splitlines()[1:]:
        if line and not line.startswith(" "):
            parts.append((line, []))
        elif line and parts:
            parts[-1][1].append(line.strip())
    return tuple((title, " ".join(lines)) for title, lines in parts)
