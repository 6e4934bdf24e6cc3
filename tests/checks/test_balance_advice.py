"""Advice on a balance, followed to the letter: with the value it names the finding is gone, with 5 % more it stays."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any

import pytest

from pairrules.pipeline import check
from pairrules.result import Finding
from tests.balance.test_electrical import LENGTH, pin, straight

SETTINGS = """
extends: []
reference_nets: [GND]
classes:
  bridge:
    match: ["IN"]
    source: {{kind: impedance, plus: {plus} ohm, minus: {minus} ohm}}
    cable: {{length: {cable} m, capacitance: 60 pF/m, capacitance_between: 40 pF/m, resistance: 0.09 ohm/m,
            capacitance_unbalance: {unbalance} pF/m, resistance_unbalance: {percent} %}}
    load:
      kind: impedance
      plus: {{resistance: {load_plus} Mohm, capacitance: {capacitance_plus} pF}}
      minus: {{resistance: {load_minus} Mohm, capacitance: {capacitance_minus} pF}}
      rejection: {receiver} dB
    frequencies: [50 Hz, 10 kHz]
    limits: {{{rule}: {{least: {least} dB}}}}
"""
EQUAL: dict[str, Any] = {
    "plus": 350,
    "minus": 350,
    "cable": 3,
    "unbalance": 0,
    "percent": 0,
    "load_plus": 1,
    "load_minus": 1,
    "capacitance_plus": 10,
    "capacitance_minus": 10,
    "receiver": 120,
}


def finding(
    folder: Path, rule: str, least: float, board: dict[str, Any] | None = None, **values: Any
) -> Finding | None:
    (folder / "board.json").write_text(json.dumps(board or straight()))
    text = SETTINGS.format(**EQUAL | values, rule=rule, least=least)
    (folder / "pairrules.yaml").write_text(text)
    (pair,) = check(folder / "board.json").pairs
    assert not pair.unjudged
    return next(iter(pair.findings), None)


def advised(found: Finding | None, pattern: str) -> float:
    assert found is not None
    match = re.search(pattern.replace("VALUE", r"([\d.]+)"), found.advice)
    assert match, found.advice
    return float(match.group(1))


@pytest.mark.parametrize("rule", ["source-balance", "link-rejection", "mode-conversion"])
def test_source_legs(tmp_path: Path, rule: str) -> None:
    most = advised(
        finding(tmp_path, rule, 105, minus=353.5), r"match the source's legs to VALUE ohm \(minus has 3.5 ohm more\)"
    )
    for plus, minus in ((350, 350 + most), (350 + most, 350)):
        assert finding(tmp_path, rule, 105, plus=plus, minus=minus) is None
    assert finding(tmp_path, rule, 105, minus=350 + 1.05 * most) is not None


def test_load_resistance_for_a_source(tmp_path: Path) -> None:
    values: dict[str, Any] = {"minus": 353.5, "cable": 0.001, "capacitance_plus": 0, "capacitance_minus": 0}
    found = finding(tmp_path, "source-balance", 115, **values)
    least = advised(found, r"raise each leg's resistance to reference at the load from 1 Mohm to VALUE Mohm")
    assert finding(tmp_path, "source-balance", 115, **values, load_plus=least, load_minus=least) is None
    less = 0.95 * least
    assert finding(tmp_path, "source-balance", 115, **values, load_plus=less, load_minus=less) is not None


@pytest.mark.parametrize("rule", ["load-balance", "link-rejection"])
def test_load_capacitances(tmp_path: Path, rule: str) -> None:
    found = finding(tmp_path, rule, 96, capacitance_minus=12)
    most = advised(found, r"match the load's capacitances to reference to VALUE pF \(minus has 2 pF more\)")
    assert finding(tmp_path, rule, 96, capacitance_minus=10 + most) is None
    assert finding(tmp_path, rule, 96, capacitance_minus=10 + 1.05 * most) is not None


def test_a_better_cable_or_a_shorter_one(tmp_path: Path) -> None:
    found = finding(tmp_path, "cable-balance", 105, unbalance=1.6)
    most = advised(found, r"take a cable of at most VALUE pF/m of capacitance unbalance \(it has 1.6 pF/m\)")
    assert finding(tmp_path, "cable-balance", 105, unbalance=most) is None
    assert finding(tmp_path, "cable-balance", 105, unbalance=-most) is None
    assert finding(tmp_path, "cable-balance", 105, unbalance=1.05 * most) is not None
    length = advised(found, r"; or take a cable of at most VALUE m \(it has 3 m\)")
    assert finding(tmp_path, "cable-balance", 105, unbalance=1.6, cable=length) is None
    assert finding(tmp_path, "cable-balance", 105, unbalance=1.6, cable=1.05 * length) is not None


OTHER = """
extends: []
reference_nets: [GND]
classes:
  bridge:
    match: ["IN"]
    source: {source}
    load: {load}
    frequencies: [50 Hz, 10 kHz]
    limits: {{{rule}: {{least: 80 dB}}}}
"""


def advice_of(folder: Path, rule: str, source: str, load: str) -> str:
    (folder / "board.json").write_text(json.dumps(straight()))
    (folder / "pairrules.yaml").write_text(OTHER.format(rule=rule, source=source, load=load))
    (pair,) = check(folder / "board.json").pairs
    assert not pair.unjudged
    return "".join(one.advice for one in pair.findings)


def test_windings_of_a_transformer(tmp_path: Path) -> None:
    def advice(mismatch: float) -> str:
        windings = f"winding_capacitance: 50 pF, winding_capacitance_mismatch: {mismatch} %"
        source = f"{{kind: transformer, resistance: 300 ohm, {windings}}}"
        return advice_of(tmp_path, "source-balance", source, "{kind: line-receiver, resistance: 100 kohm}")

    found = re.search(
        r"match the source's capacitances to reference to ([\d.]+) pF \(plus has 20 pF more\)", advice(40)
    )
    assert found
    share = float(found.group(1)) / 50 * 100
    assert advice(share) == advice(-share) == "" != advice(1.05 * share)


def test_a_receivers_mismatch(tmp_path: Path) -> None:
    def advice(mismatch: float) -> str:
        load = f"{{kind: line-receiver, resistance: 30 kohm, mismatch: {mismatch} %}}"
        return advice_of(tmp_path, "load-balance", "{kind: impedance, plus: 350 ohm}", load)

    found = re.search(r"match the load's resistances to reference to ([\d.]+) % \(minus has 3 % more\)", advice(-3))
    assert found
    share = float(found.group(1))
    assert advice(share) == advice(-share) == "" != advice(1.05 * share)


def test_unequal_sources_before_a_difference_amplifier(tmp_path: Path) -> None:
    def advice(plus: float, minus: float) -> str:
        load = "{kind: difference-amplifier, r1: 10 kohm, r2: 100 kohm}"
        source = f"{{kind: impedance, plus: {plus:.9g} ohm, minus: {minus:.9g} ohm}}"
        return advice_of(tmp_path, "link-rejection", source, load)

    found = re.search(r"match the source's legs to ([\d.]+) ohm \(minus has 100 ohm more\)", advice(350, 450))
    assert found
    half = float(found.group(1)) / 2
    assert advice(400 - half, 400 + half) == advice(400 + half, 400 - half) == ""
    assert advice(400 - 1.05 * half, 400 + 1.05 * half) + advice(400 + 1.05 * half, 400 - 1.05 * half)


def test_two_causes_at_once(tmp_path: Path) -> None:
    values: dict[str, Any] = {"minus": 353.5, "capacitance_minus": 12}
    found = finding(tmp_path, "link-rejection", 110, **values)
    assert found is not None and "to mend one imbalance is not enough: match " in found.advice
    ohm = advised(found, r"match the source's legs to VALUE ohm")
    farad = advised(found, r"match the load's capacitances to reference to VALUE pF")
    for plus, minus in ((350, 350 + ohm), (350 + ohm, 350)):
        assert finding(tmp_path, "link-rejection", 110, plus=plus, minus=minus, capacitance_minus=10 + farad) is None
    assert finding(tmp_path, "link-rejection", 110, minus=350, capacitance_minus=12) is not None
    more: dict[str, Any] = {"minus": 350 + 1.05 * ohm, "capacitance_minus": 10 + 1.05 * farad}
    less: dict[str, Any] = {"plus": 350 + 1.05 * ohm, "capacitance_minus": 10 + 1.05 * farad}
    assert finding(tmp_path, "link-rejection", 110, **more) or finding(tmp_path, "link-rejection", 110, **less)


def test_a_receiver_that_is_too_weak(tmp_path: Path) -> None:
    found = finding(tmp_path, "link-rejection", 80, minus=353.5, receiver=70)
    assert found is not None and found.advice.startswith("the source converts most (")
    least = advised(
        found, r"balance alone cannot meet it, the receiver itself rejects less: take one that rejects VALUE dB$"
    )
    assert 80 < least < 90
    assert finding(tmp_path, "link-rejection", 80, minus=353.5, receiver=least) is None
    assert finding(tmp_path, "link-rejection", 80, minus=353.5, receiver=least - 0.2) is not None


def test_a_receiver_and_a_link_that_are_both_too_weak(tmp_path: Path) -> None:
    found = finding(tmp_path, "link-rejection", 110, minus=353.5, receiver=70)
    assert found is not None
    assert found.advice.endswith("take one of more than 110.0 dB, and then mend what converts most")


def test_lengths_of_legs_and_the_place_of_unlike_tracks(tmp_path: Path) -> None:
    long = straight(shift=6.0)
    limit = 143.0
    found = finding(tmp_path, "trace-balance", limit, board=long)
    assert found is not None
    kept = advised(found, r"add it to plus, which is up to 6.000 mm behind: VALUE mm may stay")
    assert finding(tmp_path, "trace-balance", limit, board=straight(shift=kept)) is None
    assert finding(tmp_path, "trace-balance", limit, board=straight(shift=1.05 * kept + 0.01)) is not None
    wide = finding(tmp_path, "trace-balance", limit, board=straight(widths=(0.3, 0.2)))
    assert wide is not None and wide.advice.startswith("make the tracks alike in width, gap to other copper and ")
    assert wide.at[0].layer == "TOP"


def test_parts_in_series_are_named(tmp_path: Path) -> None:
    board = straight()
    board["parts"][1:1] = [
        {"ref": "C1", "value": "1nF", "pins": [pin("1", "IN_P", 10, 0), pin("2", "INC_P", 11, 0)]},
        {"ref": "C2", "value": "1.2nF", "pins": [pin("1", "IN_N", 10, 0.45), pin("2", "INC_N", 11, 0.45)]},
    ]
    board["parts"][-1]["pins"] = [pin("1", "INC_P", LENGTH, 0), pin("2", "INC_N", LENGTH, 0.45)]
    board["tracks"] = [
        {"net": net, "layer": "TOP", "width": 0.25, "points": [[a, y], [b, y]]}
        for net, a, b, y in (
            ("IN_P", 0, 10, 0),
            ("IN_N", 0, 10, 0.45),
            ("INC_P", 11, LENGTH, 0),
            ("INC_N", 11, LENGTH, 0.45),
        )
    ]
    found = finding(tmp_path, "trace-balance", 60, board=board)
    share = advised(found, r"match C1 and C2 to VALUE % \(minus has 18.2 % more\)")
    assert found is not None and len(found.at) == 2
    for times, gone in ((1.0, True), (1.06, False)):
        near = json.loads(json.dumps(board))
        near["parts"][1]["value"] = f"{1.1 * (1 - times * share / 200)}nF"
        near["parts"][2]["value"] = f"{1.1 * (1 + times * share / 200)}nF"
        assert (finding(tmp_path, "trace-balance", 60, board=near) is None) == gone
