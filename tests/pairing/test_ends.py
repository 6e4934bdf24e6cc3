import pytest

from pairrules.board import DeclaredPair
from tests.pairing.boards import board, padded
from tests.pairing.told import one


@pytest.mark.parametrize(
    ("stem", "source", "load"),
    [
        ("S", "J1", "U1"),
        ("RX", "J1", "U1"),
        ("LINE_IN", "J1", "U1"),
        ("TX", "U1", "J1"),
        ("LN0_TX", "U1", "J1"),
        ("LINE_OUT", "U1", "J1"),
        ("AOUT", "U1", "J1"),
        ("DRV2", "U1", "J1"),
        ("TD", "U1", "J1"),
        ("CONTEXT", "J1", "U1"),
    ],
)
def test_connector_and_part(stem: str, source: str, load: str) -> None:
    nets = [f"{stem}_P", f"{stem}_N"]
    for parts in ({"J1": nets, "U1": padded(nets)}, {"U1": padded(nets), "J1": nets}):
        link = one(board(parts))
        assert (link.source, link.load) == (source, load)


def test_two_alike_in_natural_order() -> None:
    nets = ["S_P", "S_N", "GND"]
    assert (one(board({"U10": nets, "U2": nets})).source, one(board({"J10": nets, "J2": nets})).source) == ("U2", "J2")


def test_declared_ends_hold() -> None:
    nets = ["TX_P", "TX_N", "GND"]
    parts = {"U1": nets, "U2": nets, "J1": nets}
    for source, load, found in (("U2", "U1", ("U2", "U1")), ("U2", "", ("U2", "J1")), ("", "U1", ("J1", "U1"))):
        pair = DeclaredPair(plus="TX_P", minus="TX_N", source=source, load=load)
        link = one(board(parts, pairs=(pair,)))
        assert (link.source, link.load) == found
        assert link.missing == ()


def test_declared_end_that_is_not_there() -> None:
    pair = DeclaredPair(plus="TX_P", minus="TX_N", source="U9")
    link = one(board({"U1": ["TX_P", "TX_N", "GND"], "J1": ["TX_P", "TX_N"]}, pairs=(pair,)))
    assert link.missing == ("the file declares U9 as source, which has no pins at the ends of both legs",)
    assert (link.source, link.load) == ("U1", "J1")


def test_bus_has_two_ends_and_taps() -> None:
    nets = ["CANH", "CANL", "GND"]
    link = one(board({"U1": nets, "U2": nets, "J1": nets, "R1": ["CANH", "CANL"]}))
    assert (link.source, link.load) == ("J1", "U1")
    assert link.hung == ["R1 across both 0", "U2 tap both 0 GND"]


def test_protection_is_no_end_where_another_is() -> None:
    nets = ["S_P", "S_N", "GND"]
    link = one(board({"D1": nets, "J1": nets, "U1": nets}))
    assert (link.source, link.load) == ("J1", "U1")
    assert link.hung == ["D1 tap both 0 GND"]


def test_sensor_of_two_pins_is_the_source() -> None:
    link = one(board({"U1": ["MIC_P", "MIC_N", "GND"], "ZX1": ["MIC_P", "MIC_N"]}))
    assert (link.source, link.load) == ("ZX1", "U1")


def test_termination_is_the_load_where_nothing_else_is() -> None:
    link = one(board({"U1": ["S_P", "S_N", "GND"], "R1": ["S_P", "S_N"]}))
    assert (link.source, link.load, link.hung) == ("U1", "R1", [])


def test_one_known_end_by_what_the_names_say() -> None:
    for stem, ends in (("TX", ("U1", "-")), ("RX", ("-", "U1")), ("S", ("U1", "-"))):
        link = one(board({"U1": [f"{stem}_P", f"{stem}_N", "GND"], "TP1": [f"{stem}_P"], "TP2": [f"{stem}_N"]}))
        assert (link.source, link.load) == ends


def test_farthest_pads_stand_in_for_unknown_ends() -> None:
    made = board(
        {"TP1": ["S_P"], "TP2": ["S_N"], "TP3": ["S_P"], "TP4": ["S_N"], "TP5": ["S_P"]},
        at={"TP1": (0, 0), "TP5": (5, 0), "TP3": (9, 0), "TP2": (0, 1), "TP4": (9, 1)},
    )
    link = one(made)
    assert (link.source, link.load) == ("-", "-")
    assert link.plus == ["TP1.1 S_P TP3.1"]
    assert link.minus == ["TP2.1 S_N TP4.1"]
    assert link.missing == (
        "plus has no known part at its source; the pad TP1.1 is taken, the farthest",
        "plus has no known part at its load; the pad TP3.1 is taken, the farthest",
        "minus has no known part at its source; the pad TP2.1 is taken, the farthest",
        "minus has no known part at its load; the pad TP4.1 is taken, the farthest",
    )


def test_one_end_known_and_the_farthest_pad() -> None:
    made = board(
        {"J1": ["S_P", "S_N"], "TP1": ["S_P"], "TP2": ["S_P"], "TP3": ["S_N"]},
        at={"J1": (0, 0), "TP1": (4, 0), "TP2": (8, 0), "TP3": (8, 1)},
    )
    link = one(made)
    assert link.plus == ["J1.1 S_P TP2.1"]
    assert link.minus == ["J1.2 S_N TP3.1"]
    assert link.missing[0] == "plus has no known part at its load; the pad TP2.1 is taken, the farthest"


def test_copper_without_pads() -> None:
    link = one(board({}, tracks=["S_P", "S_N"]))
    assert link.plus == ["- S_P -"]
    assert link.missing[0] == "plus has no known part at its source; no pad of S_P is left for it"
    assert len(link.missing) == 4


def test_several_pins_of_the_end_part() -> None:
    link = one(board({"J1": ["S_P", "S_N", "S_P"], "U1": ["S_P", "S_N", "GND"]}))
    assert link.plus == ["J1.1/J1.3 S_P U1.1"]
