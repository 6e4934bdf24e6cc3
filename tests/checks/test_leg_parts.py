"""Which parts of the two legs answer each other."""

from __future__ import annotations

from dataclasses import replace

import pytest

from pairrules.checks.leg_parts import part_pairs, spot_of, told
from tests.checks.drawn_pairs import subject
from tests.geometry.small_boards import board, pin

PARTS = {
    "R1": {"value": "10k", "package": "R0402"},
    "R2": {"value": "1k", "package": "R0402"},
    "R3": {"value": "1k", "package": "R0402"},
    "R4": {"value": "10k", "package": "R0402"},
    "C1": {"value": "10p"},
    "L1": {},
}
DRAWN = {"plus": [[[0, 0], [20, 0]]], "minus": [[[0, 1], [20, 1]]], "parts": PARTS}


def partners(**said: object) -> list[tuple[str, str]]:
    one = subject(DRAWN | said)
    names = [part.ref for part in one.board.parts] + [""]
    return sorted((names[pair.plus], names[pair.minus]) for pair in part_pairs(one.board, one.link))


def test_parts_of_one_value_are_partners_whatever_their_order() -> None:
    hung = [
        {"part": "R1", "leg": "plus"},
        {"part": "R2", "leg": "plus"},
        {"part": "R3", "leg": "minus"},
        {"part": "R4", "leg": "minus"},
    ]
    assert partners(hung=hung) == partners(hung=hung[::-1]) == [("R1", "R4"), ("R2", "R3")]


def test_a_part_of_another_kind_is_no_partner() -> None:
    hung = [{"part": "R1", "leg": "plus"}, {"part": "C1", "leg": "minus"}]
    assert partners(hung=hung) == [("", "C1"), ("R1", "")]


@pytest.mark.parametrize("kind", ["across", "tap"])
def test_parts_across_and_taps_need_no_partner(kind: str) -> None:
    assert partners(hung=[{"part": "R1", "leg": "both", "kind": kind}]) == []


def test_a_choke_is_its_own_partner_and_left_out() -> None:
    assert partners(series=[["L1", "L1"], ["R1", "R2"]]) == [("R1", "R2")]


def test_parts_in_words_and_in_place() -> None:
    pads = [pin("R9", "1", "A", 1.0, 2.0), pin("R9", "2", "B", 3.0, 2.0)]
    on = board(parts=pads)
    (where,) = spot_of(on, 0)
    assert (where.layer, where.x_mm, where.y_mm) == ("TOP", 2.0, 2.0)
    assert told(on, 0) == "R9"
    valued = replace(on, parts=(replace(on.parts[0], value="10k", package="R0402"),))
    assert told(valued, 0) == "R9 (10k, R0402)"
