"""Rules as reports explain them."""

from __future__ import annotations

from pairrules.checks.rule import all_rules
from pairrules.checks.rule_help import rule_infos


def test_every_rule_brings_all_parts_of_its_docstring() -> None:
    infos = rule_infos(all_rules())
    assert [info.name for info in infos] == sorted(all_rules())
    for info in infos:
        titles = [title for title, _ in info.help]
        assert titles[:6] == ["What it judges", "Why it matters", "Formula", "Source", "What to do", "Example"][:6], (
            info
        )
        assert all(text and "\n" not in text for _, text in info.help), info.name


def test_the_text_is_the_docstring_s() -> None:
    (info,) = (one for one in rule_infos(all_rules()) if one.name == "leg-length")
    assert (info.summary, info.unit) == ("the legs differ in length", "mm")
    assert dict(info.help)["Why it matters"].startswith("What was common to both legs arrives at different times")
