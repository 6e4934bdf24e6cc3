"""Waiver files: what is read, every fault told with its place, what the schema says of the same texts."""

from __future__ import annotations

import json
from datetime import date
from pathlib import Path
from typing import Any

import pytest
import yaml
from jsonschema import Draft202012Validator

from pairrules.errors import SettingsError
from pairrules.schemas import schema_text
from pairrules.settings.waivers import FILE_NAME, Waiver, read_waivers, waivers_path

SCHEMA = Draft202012Validator(json.loads(schema_text("waivers")))
RULES = ("leg-length", "via-match")
MARK = "1:00c0ffee-0123456789abcdef"
WHOLE = f"""\
# Agreed at the review of the tide gauge.
- rule: leg-length
  pair: CLOCK
  reason: "the link is short: 40 mm"
  who: A. Tide
  until: 2031-05-17
  fingerprint: "{MARK}"
- {{rule: via-match, pair: [CK_P, CK_N], reason: below the plane, until: 2031-05-17, fingerprint: "{MARK}"}}
"""
CLOCK = Waiver(
    rule="leg-length",
    pair=("CLOCK",),
    reason="the link is short: 40 mm",
    who="A. Tide",
    until=date(2031, 5, 17),
    fingerprint=MARK,
    line=2,
)


def read(text: str) -> tuple[Waiver, ...]:
    return read_waivers(Path("w.yaml"), rules=RULES, text=text)


def one(**more: str | None) -> str:
    """A waiver with some of its lines otherwise, or left out."""
    lines = {
        "rule": "leg-length", "pair": "CLOCK", "reason": "short", "until": "2031-05-17", "fingerprint": f'"{MARK}"'
    } | more  # fmt: skip
    return "- " + "\n  ".join(f"{key}: {value}" for key, value in lines.items() if value is not None) + "\n"


def test_a_whole_file() -> None:
    first, second = read(WHOLE)
    assert first == CLOCK
    assert second.pair == ("CK_P", "CK_N") and second.who == "" and second.line == 8


@pytest.mark.parametrize("text", ["", "# none yet\n", "---\n", "[]\n"])
def test_no_waivers(text: str) -> None:
    assert read(text) == ()


def test_no_file_is_no_waivers(tmp_path: Path) -> None:
    assert read_waivers(tmp_path / FILE_NAME, rules=RULES) == ()


BAD: dict[str, tuple[str, tuple[str, ...]]] = {
    "unknown rule": (
        one(rule="leg-lenght"),
        ("w.yaml: line 1, column 9: waivers[0].rule is 'leg-lenght', which is no rule; write 'leg-length'",),
    ),
    "no day": (
        one(until="next year"),
        ("w.yaml: line 4, column 10: waivers[0].until is 'next year'; write a day, such as 2031-05-17",),
    ),
    "a day there is not": (
        one(until="2031-02-30"),
        ("w.yaml: line 4, column 10: waivers[0].until is '2031-02-30'; write a day, such as 2031-05-17",),
    ),
    "empty reason": (
        one(reason='" "'),
        ("w.yaml: line 3, column 11: waivers[0].reason is an empty text; fill it or leave it out",),
    ),
    "fingerprint of nothing": (
        one(fingerprint="as agreed"),
        (
            "w.yaml: line 5, column 16: waivers[0].fingerprint is 'as agreed'; copy the fingerprint of the finding "
            "from the JSON result, or let `pairrules waive` write the waiver",
        ),
    ),
    "no list": (
        "rule: leg-length\n",
        ("w.yaml: line 1, column 1: waivers is no list; write a list, such as [first, second]",),
    ),
    "three nets": (one(pair="[A, B, C]"), ("w.yaml: line 2, column 9: waivers[0].pair has 3 entries; give exactly 2",)),
    "all at once": (
        one(rule=None, reason=None) + one(unti="2031-05-17"),
        (
            "w.yaml: line 1, column 3: waivers[0] lacks 'rule'; add it",
            "w.yaml: line 1, column 3: waivers[0] lacks 'reason'; add it",
            "w.yaml: line 9, column 3: waivers[1] knows no 'unti'; write 'until'",
        ),
    ),
    "twice": (
        one() + one(reason="again"),
        (
            "w.yaml: line 6, column 3: waivers[1] waives leg-length of CLOCK a second time; "
            "it is already in line 1; keep one",
        ),
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", BAD)
def test_faults_are_told_with_their_places(name: str) -> None:
    text, lines = BAD[name]
    with pytest.raises(SettingsError) as caught:
        read(text)
    assert caught.value.faults == lines


@pytest.mark.parametrize("text", ["", WHOLE, "[]\n", one(), one(pair="5"), one(who="B. Buoy")])
def test_what_the_reader_takes_the_schema_takes(text: str) -> None:
    read(text)
    SCHEMA.validate(_plain(text))


@pytest.mark.parametrize("name", BAD)
def test_what_the_reader_refuses_the_schema_refuses_where_it_can(name: str) -> None:
    # Which rules there are, which days a month has, and what stands twice is not for a schema to say.
    can_not = {"unknown rule", "a day there is not", "twice"}
    assert SCHEMA.is_valid(_plain(BAD[name][0])) is (name in can_not)


def test_schema_and_form_know_the_same_keys() -> None:
    item: dict[str, Any] = json.loads(schema_text("waivers"))["items"]
    from pairrules.settings.shapes import Table
    from pairrules.settings.waivers import WAIVERS_FORM

    assert isinstance(WAIVERS_FORM.of, Table)
    assert list(item["properties"]) == list(WAIVERS_FORM.of.keys)
    assert item["required"] == list(WAIVERS_FORM.of.required)


def _plain(text: str) -> Any:
    """Texts stay texts, as in YAML 1.2: days and fingerprints are none of its types."""
    return yaml.load(text, Loader=yaml.BaseLoader)


def test_a_waiver_means_a_pair_by_its_name_or_its_nets() -> None:
    nets = (("CK_P", "CK_P_C"), ("CK_N", "CK_N_C"))
    for pair, means in {
        ("CLOCK",): True, ("CK_N_C",): True, ("CK_N", "CK_P"): True, ("CK_P", "CK_N_C"): True,
        ("CK_P", "CK_P_C"): False, ("CK",): False, ("CK_P", "CLOCK"): False,
    }.items():  # fmt: skip
        waiver = Waiver(rule="r", pair=pair, reason="", who="", until=date(2031, 1, 1), fingerprint=MARK)
        assert waiver.means("CLOCK", *nets) is means, pair


def test_where_the_file_is_looked_for(tmp_path: Path) -> None:
    board, settings = tmp_path / "a" / "b.json", tmp_path / "pairrules.yaml"
    board.parent.mkdir()
    assert waivers_path(tmp_path / "own.yaml", settings, board) == tmp_path / "own.yaml"
    assert waivers_path(None, settings, board) == tmp_path / FILE_NAME
    assert waivers_path(None, None, board) == board.parent / FILE_NAME
    (board.parent / FILE_NAME).touch()
    assert waivers_path(None, settings, board) == board.parent / FILE_NAME
    (tmp_path / FILE_NAME).touch()
    assert waivers_path(None, settings, board) == tmp_path / FILE_NAME
