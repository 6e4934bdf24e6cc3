"""What settings each pair ended up with, as a listing for people and as JSON."""

from __future__ import annotations

import json
import textwrap
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from pairrules.reports.report import Look
from pairrules.reports.safe_text import safe
from pairrules.result import FoundPair
from pairrules.settings.class_values import ClassValue, class_values, limit_in_words, pins_in_words
from pairrules.settings.limit import Limit, RuleForm
from pairrules.settings.pair_class import PairClass
from pairrules.settings.settings import Settings

_HELD = "\ue000"
"""Stands for a space that must not end a line; private, so that `safe` lets none through from a name."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SettledLimit:
    """A limit, or a rule that the class switches off: then `says` is "off" and severity and source are "".

    `severity_place`: where the severity was said, if elsewhere; "default" where nowhere.
    """

    rule: str
    says: str
    severity: str
    source: str
    place: str
    severity_place: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Settled:
    """One pair. `values`: of its class. `limits`: that hold for it, and those that its class switches off."""

    pair: FoundPair
    class_place: str
    values: tuple[ClassValue, ...]
    limits: tuple[SettledLimit, ...]


def settled(pair: FoundPair, klass: PairClass | None, chosen: Settings, forms: Mapping[str, RuleForm]) -> Settled:
    """What holds for a pair of a class (`None`: for one without)."""
    limits = [_limit(limit, forms[limit.rule]) for limit in chosen.limits_for(klass).values()]
    values = () if klass is None else class_values(klass)
    if klass is not None:
        limits += [_off(rule, klass) for rule in klass.off]
    if chosen.pin_lengths:
        everywhere = ClassValue(key="pin_lengths for all", says=pins_in_words(chosen.pin_lengths), place="top level")
        values = (*values, everywhere)
    return Settled(
        pair=pair,
        class_place="" if klass is None else klass.place,
        values=values,
        limits=tuple(sorted(limits, key=lambda one: one.rule)),
    )


def table(board: str, files: Sequence[str], pairs: Sequence[Settled], look: Look) -> str:
    """One block a pair: its class, the class's values, the limits, each with where it was said."""
    count = len(pairs)
    lines = [
        f"{safe(board)}: {count} pair{'' if count == 1 else 's'}",
        *_wrapped(f"settings, each laid over the one before: {', '.join(files)}", look, "", "  "),
    ]
    for one in pairs:
        named = f"class {one.pair.klass}" if one.pair.klass is not None else "no class"
        named += "" if one.class_place or one.pair.klass is None else ", which the settings do not have"
        place = f"  [{one.class_place}]" if one.class_place else ""
        lines += ["", *_wrapped(f"{one.pair.name}  ({named}){place}", look, "", "    ")]
        for value in one.values:
            lines += _wrapped(f"{value.key}: {value.says}  [{value.place}]", look, "  ", "      ")
        lines += ["  no limit holds" if not one.limits else "  limits"]
        for limit in one.limits:
            lines += _wrapped(_said(limit), look, "    ", "        ")
    return "\n".join(lines) + "\n"


def text_json(board: str, files: Sequence[str], pairs: Sequence[Settled]) -> str:
    """The same as one JSON object."""
    plain = {
        "file": board,
        "settings": list(files),
        "pairs": [
            {
                "name": one.pair.name,
                "plus": one.pair.plus,
                "minus": one.pair.minus,
                "class": one.pair.klass,
                "class_place": one.class_place,
                "values": [{"key": value.key, "says": value.says, "place": value.place} for value in one.values],
                "limits": [
                    {key: getattr(limit, key) for key in SettledLimit.__dataclass_fields__} for limit in one.limits
                ],
            }
            for one in pairs
        ],
    }
    return json.dumps(plain, indent=2) + "\n"


def _limit(limit: Limit, form: RuleForm) -> SettledLimit:
    return SettledLimit(
        rule=limit.rule,
        says=limit_in_words(limit, form),
        severity=limit.severity,
        source=limit.source,
        place=limit.place,
        severity_place=limit.severity_place,
    )


def _off(rule: str, klass: PairClass) -> SettledLimit:
    place = klass.places.get(f"limits.{rule}", klass.place)
    return SettledLimit(rule=rule, says="off", severity="", source="", place=place, severity_place="")


def _said(limit: SettledLimit) -> str:
    if limit.says == "off":
        return f"{limit.rule}: off  [{limit.place}]"
    elsewhere = {"": "", "default": " by default"}.get(limit.severity_place, f" from {limit.severity_place}")
    return f"{limit.rule}: {limit.says}; {limit.severity}{elsewhere}; {limit.source}  [{limit.place}]"


def _wrapped(text: str, look: Look, first: str, later: str) -> list[str]:
    whole = safe(text).replace(" line ", f"{_HELD}line{_HELD}")
    lines = textwrap.wrap(whole, look.width, initial_indent=first, subsequent_indent=later, break_on_hyphens=False)
    return [line.replace(_HELD, " ") for line in lines]
