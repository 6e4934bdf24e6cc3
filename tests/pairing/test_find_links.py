import random
from collections.abc import Mapping

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pairrules.board import DeclaredPair
from tests.pairing.boards import board, padded
from tests.pairing.told import Told, pairing, told

LOGGER = {
    "U1": ["LN0_TX_P_SERIES", "LN0_TX_N_SERIES", "LN1_TX_P", "LN1_TX_N", "GND", "RESET_N", "CLK_P"],
    "C1": ["LN0_TX_P_SERIES", "LN0_TX_P"],
    "C2": ["LN0_TX_N_SERIES", "LN0_TX_N"],
    "J1": ["LN0_TX_P", "LN0_TX_N", "LN1_TX_P", "LN1_TX_N", "GND", "CANH", "CANL", "BR_H", "BR_L"],
    "L1": ["CANH", "CANL", "CH", "CL"],
    "U2": ["CH", "CL", "GND"],
    "R1": ["CANH", "CANL"],
    "R2": ["BR_H", "n1"],
    "R3": ["BR_L", "n2"],
    "C3": ["n1", "GND"],
    "U3": ["n1", "n2", "GND", "VCC"],
}


def test_whole_board() -> None:
    found = pairing(board(LOGGER))
    assert [link.name for link in found.links] == ["BR", "CAN", "LN0_TX", "LN1_TX"]
    assert found.unpaired == ("CLK_P",)
    assert found.missing == ()


def test_names_are_distinct() -> None:
    nets = ["A_P", "A_N", "A+", "A-", "B_P", "B_N", "C_P", "C_N"]
    made = board(
        {"U1": padded(nets)},
        pairs=(
            DeclaredPair(plus="B_P", minus="B_N", name="C"),
            DeclaredPair(plus="C_P", minus="C_N", klass="slow"),
        ),
    )
    links = {link.name: link for link in told(made)}
    assert sorted(links) == ["A (A+/A-)", "A (A_P/A_N)", "C", "C (C_P/C_N)"]
    assert links["C"].nets == ("B_P", "B_N")
    assert links["C (C_P/C_N)"].klass == "slow"


def test_declared_name_class_and_finding() -> None:
    made = board({"U1": padded(["X", "Y"])}, pairs=(DeclaredPair(plus="X", minus="Y", name="GAUGE", klass="sensor"),))
    (link,) = told(made)
    assert (link.name, link.klass, link.found_by, link.nets) == ("GAUGE", "sensor", "declared in the file", ("X", "Y"))


def test_empty_board() -> None:
    found = pairing(board({}))
    assert (found.links, found.unpaired, found.missing) == ((), (), ())


def test_no_net_is_in_two_links() -> None:
    links = pairing(board(LOGGER)).links
    nets = [hop.net for link in links for hop in (*link.hops_plus, *link.hops_minus)]
    assert len(nets) == len(set(nets))


@settings(max_examples=20, deadline=None)
@given(st.randoms(use_true_random=False))
def test_order_of_parts_changes_nothing(source: random.Random) -> None:
    refs = list(LOGGER)
    source.shuffle(refs)
    assert told(board({ref: LOGGER[ref] for ref in refs})) == told(board(LOGGER))


@settings(max_examples=20, deadline=None)
@given(st.text(alphabet="ABXYZ019", max_size=4))
def test_a_prefix_to_every_net_changes_names_only(prefix: str) -> None:
    def renamed(net: str) -> str:
        return net if net in {"GND", "VCC"} else f"Q{prefix}_{net}"

    before, after = (
        told(board(LOGGER)),
        told(board({ref: [renamed(net) for net in nets] for ref, nets in LOGGER.items()})),
    )
    shape = [(link.source, link.load, link.series, len(link.hung), link.missing) for link in before]
    assert [(link.source, link.load, link.series, len(link.hung), link.missing) for link in after] == shape
    assert [link.name for link in after] == [renamed(link.name) for link in before]


def _swapped(net: str) -> str:
    for token, other in (("_P_", "_N_"), ("_N_", "_P_")):
        if token in net:
            return net.replace(token, other)
    for token, other in (("_P", "_N"), ("_N", "_P"), ("_H", "_L"), ("_L", "_H"), ("CANH", "CANL"), ("CANL", "CANH")):
        if net.endswith(token) and net not in {"RESET_N", "CLK_P"}:
            return net.removesuffix(token) + other
    return net


@pytest.mark.parametrize("parts", [LOGGER])
def test_swapping_the_names_swaps_the_legs(parts: Mapping[str, list[str]]) -> None:
    before = told(board(parts))
    after = told(board({ref: [_swapped(net) for net in nets] for ref, nets in parts.items()}))

    def pads(hops: list[str]) -> list[tuple[str, str]]:
        return [(hop.split()[0], hop.split()[2]) for hop in hops]

    def legs(link: Told) -> tuple[object, ...]:
        return link.name, link.nets, pads(link.plus), pads(link.minus), link.series

    for one, other in zip(before, after, strict=True):
        name, nets, plus, minus, series = legs(one)
        assert legs(other) == (name, nets, minus, plus, [(b, a) for a, b in one.series])
        assert plus != minus
        assert series == one.series
