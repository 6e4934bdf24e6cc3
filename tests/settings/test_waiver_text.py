"""Waivers written into a file's text: what is read again is what was meant, and nothing else has changed."""

from __future__ import annotations

from dataclasses import replace
from datetime import date

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pairrules.settings.waiver_text import with_waiver
from tests.settings.test_waivers import CLOCK, MARK, WHOLE, read

NEW = replace(
    CLOCK, rule="via-match", pair=("BUS",), reason='he said "no" # yes', who="", until=date(2032, 1, 2), line=0
)

FLOW = f'{{rule: leg-length, pair: CLOCK, reason: r, until: 2031-05-17, fingerprint: "{MARK}"}}'
FOLDED = f"""\
---
  - rule: leg-length
    pair: CLOCK
    reason: >
      folded
      text
    until: 2031-05-17
    fingerprint: "{MARK}"
  # the end
"""
LAID_OUT = {
    "nothing": "",
    "comments alone": "# Waivers of the buoy.\n",
    "whole": WHOLE,
    "no line end": WHOLE.rstrip("\n"),
    "other line ends": WHOLE.replace("\n", "\r\n"),
    "empty document": "---\n",
    "indented": FOLDED,
    "flow": f"[{FLOW}]\n",
    "flow with a comma at its end": f"[\n  {FLOW},\n]\n",
    "empty flow": "[]\n",
}


def bare(text: str) -> list[object]:
    return [replace(waiver, line=0) for waiver in read(text)]


@pytest.mark.parametrize("name", LAID_OUT)
def test_a_new_one_comes_last_and_all_else_stays(name: str) -> None:
    text = LAID_OUT[name]
    written = with_waiver(text, NEW, None)
    assert bare(written) == [*bare(text), NEW]
    kept = text.rstrip().removesuffix("]").rstrip()
    assert written.startswith(kept)


@pytest.mark.parametrize("name", ["whole", "no line end", "other line ends", "indented", "flow"])
def test_one_is_renewed_in_its_place(name: str) -> None:
    text = LAID_OUT[name]
    renewed = replace(CLOCK, reason="longer: \\ now", who="B. Buoy", until=date(2033, 3, 3), line=0)
    written = with_waiver(text, renewed, 0)
    assert bare(written) == [renewed, *bare(text)[1:]]
    assert [line for line in text.splitlines() if "#" in line] == [line for line in written.splitlines() if "#" in line]
    assert with_waiver(written, renewed, 0) == written


def test_renewing_what_is_the_same_changes_no_byte() -> None:
    assert with_waiver(WHOLE, CLOCK, 0) == WHOLE


def test_how_it_looks() -> None:
    assert with_waiver("", NEW, None) == (
        "- rule: via-match\n  pair: BUS\n"
        '  reason: "he said \\"no\\" # yes"\n  until: 2032-01-02\n'
        f'  fingerprint: "{MARK}"\n'
    )


TEXT = st.text(st.characters(exclude_categories=("C", "Z")) | st.just(" "), min_size=1, max_size=40).map(
    lambda text: " ".join(text.split())
)


@settings(max_examples=150, deadline=None)
@given(pair=TEXT.filter(bool), reason=TEXT.filter(bool), who=TEXT, text=st.sampled_from(sorted(LAID_OUT.values())))
def test_any_printable_text_comes_back(pair: str, reason: str, who: str, text: str) -> None:
    new = replace(NEW, pair=(pair,), reason=reason, who=who)
    assert bare(with_waiver(text, new, None))[-1] == new
