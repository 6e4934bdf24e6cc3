"""A finding of each rule as it tells it, made by running the rules on a board with one fault a pair.

The findings stand in `rule_findings.json` beside this file, which `fixtures/write_rule_findings.py` writes by a whole
run: reading, pairing, measuring, solving, judging.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from pathlib import Path


@dataclass(frozen=True, slots=True, kw_only=True)
class RuleFinding:
    """A finding in words. pair: name of the pair with the fault. at: places, "TOP (12.0, 30.5) mm"."""

    pair: str
    severity: str
    found: str
    at: tuple[str, ...]
    advice: str


@cache
def rule_findings() -> Mapping[str, RuleFinding]:
    """A finding of every rule, by the rule's name."""
    tree = json.loads(Path(__file__).with_suffix(".json").read_text(encoding="utf-8"))
    return {name: RuleFinding(**{**said, "at": tuple(said["at"])}) for name, said in tree.items()}
