"""What the shipped rule sets say of a rule."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from pathlib import Path

from pairrules.checks.rule import all_rules
from pairrules.settings.limit import Limit
from pairrules.settings.read_settings import BASE, read_settings
from pairrules.shipped import rules_folder


@dataclass(frozen=True, slots=True, kw_only=True)
class ShippedLimit:
    """One set's limit on one rule; `limit` is `None` where the set switches the rule off."""

    of: str
    limit: Limit | None


@cache
def shipped_limits() -> Mapping[str, tuple[ShippedLimit, ...]]:
    """Rule to what each set says of it, `base` first, then by name; rules that no set names are absent."""
    forms = {name: rule.form for name, rule in all_rules().items()}
    found: dict[str, list[ShippedLimit]] = {}
    for name, limit in read_settings(None, forms=forms).limits.items():
        found.setdefault(name, []).append(ShippedLimit(of=BASE, limit=limit))
    for file in sorted(rules_folder().glob("*.yaml")):
        if file.stem == BASE:
            continue
        settings = read_settings(Path(file.name), forms=forms, text=f"extends: [{BASE}, {file.stem}]")
        for klass in settings.classes:
            said: dict[str, Limit | None] = {**klass.limits, **dict.fromkeys(klass.off)}
            for name in sorted(said):
                found.setdefault(name, []).append(ShippedLimit(of=klass.name, limit=said[name]))
    return {name: tuple(limits) for name, limits in sorted(found.items())}
