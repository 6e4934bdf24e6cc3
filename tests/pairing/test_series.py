import pytest

from pairrules.pairing.find_links import PairRequest
from tests.pairing.boards import board, padded
from tests.pairing.told import one, told


def test_capacitors_to_named_nets() -> None:
    made = board(
        {
            "U1": ["TX_P_SERIES", "TX_N_SERIES", "GND"],
            "C1": ["TX_P_SERIES", "TX_P"],
            "C2": ["TX_N", "TX_N_SERIES"],
            "J1": ["GND", "TX_P", "TX_N"],
        }
    )
    link = one(made)
    assert (link.name, link.nets, link.source, link.load) == ("TX", ("TX_P", "TX_N"), "U1", "J1")
    assert link.plus == ["U1.1 TX_P_SERIES C1.1", "C1.2 TX_P J1.2"]
    assert link.minus == ["U1.2 TX_N_SERIES C2.2", "C2.1 TX_N J1.3"]
    assert link.series == [("C1", "C2")]
    assert (link.hung, link.missing) == ([], ())


def test_resistors_to_nets_that_no_name_pairs() -> None:
    made = board(
        {"J1": ["S+", "S-"], "R1": ["S+", "n1"], "R2": ["S-", "n2"], "C1": ["n1", "n2"], "U1": ["n1", "n2", "GND"]}
    )
    link = one(made)
    assert link.plus == ["J1.1 S+ R1.1", "R1.2 n1 U1.1"]
    assert link.minus == ["J1.2 S- R2.1", "R2.2 n2 U1.2"]
    assert link.hung == ["C1 across both 1"]


def test_two_filters_in_a_row() -> None:
    made = board(
        {
            "J1": ["S_P", "S_N"],
            "R1": ["S_P", "a"],
            "R2": ["S_N", "b"],
            "C1": ["a", "GND"],
            "C2": ["b", "GND"],
            "L1": ["a", "c"],
            "L2": ["b", "d"],
            "U1": ["c", "d", "GND"],
        }
    )
    link = one(made)
    assert link.series == [("R1", "R2"), ("L1", "L2")]
    assert link.hung == ["C1 to reference plus 1 GND", "C2 to reference minus 1 GND"]
    assert (link.source, link.load) == ("J1", "U1")


def test_amplifiers_of_their_own_at_the_load() -> None:
    made = board(
        {
            "J1": ["S_P", "S_N"],
            "R1": ["S_P", "n1"],
            "R2": ["S_N", "n2"],
            "U1": ["n1", "o1", "GND"],
            "U2": ["n2", "o2", "GND"],
            "C1": ["n1", "n2"],
        }
    )
    link = one(made)
    assert (link.source, link.load) == ("J1", "-")
    assert link.plus[-1] == "R1.2 n1 U1.1"
    assert link.minus[-1] == "R2.2 n2 U2.1"
    assert link.missing == ("the legs end at different parts, plus at U1 and minus at U2",)


@pytest.mark.parametrize("pins", [("a", "b", "c", "d"), ("a", "c", "d", "b"), ("d", "b", "a", "c")])
@pytest.mark.parametrize("names", [("CANH", "CANL", "CANH_B", "CANL_B"), ("CANH", "CANL", "CANH1x", "CANL1x")])
def test_choke(pins: tuple[str, ...], names: tuple[str, ...]) -> None:
    net = dict(zip("abcd", names, strict=True))
    made = board({"J1": [net["a"], net["b"]], "L1": [net[pin] for pin in pins], "U1": [net["c"], net["d"], "GND"]})
    link = one(made)
    assert link.series == [("L1", "L1")]
    assert [hop.split()[1] for hop in link.plus] == [net["a"], net["c"]]
    assert [hop.split()[1] for hop in link.minus] == [net["b"], net["d"]]


def test_choke_by_place_where_names_say_nothing() -> None:
    for order in (["S_P", "x", "y", "S_N"], ["S_P", "y", "x", "S_N"]):
        made = board({"J1": ["S_P", "S_N"], "L1": order, "U1": ["x", "y", "GND"]})
        assert [hop.split()[1] for hop in one(made).plus] == ["S_P", order[1]]


def test_array_of_four_resistors() -> None:
    made = board(
        {
            "U1": padded(["A_P", "A_N", "B_P", "B_N"]),
            "RN1": ["A_P", "A_N", "B_P", "B_N", "B_N_R", "B_P_R", "A_N_R", "A_P_R"],
            "J1": padded(["A_P_R", "A_N_R", "B_P_R", "B_N_R"]),
        }
    )
    links = told(made)
    assert [link.name for link in links] == ["A", "B"]
    assert [link.series for link in links] == [[("RN1", "RN1")]] * 2
    assert links[0].plus == ["J1.1 A_P_R RN1.8", "RN1.1 A_P U1.1"]


def test_part_in_one_leg_only() -> None:
    made = board({"J1": ["S_P", "S_N"], "R1": ["S_P", "n1"], "U1": ["n1", "S_N", "GND"]})
    link = one(made)
    assert link.series == [("R1", "-")]
    assert link.plus == ["J1.1 S_P R1.1", "R1.2 n1 U1.1"]
    assert link.minus == ["J1.2 S_N U1.2"]
    assert link.missing == ("plus has R1 in series, minus has no part there",)


def test_other_kinds_of_part_in_the_two_legs() -> None:
    made = board(
        {"J1": ["S_P", "S_N"], "R1": ["S_P", "S_P_F"], "C1": ["S_N", "S_N_F"], "U1": ["S_P_F", "S_N_F", "GND"]}
    )
    link = one(made)
    assert link.series == [("R1", "C1")]
    assert link.missing == ("plus has R1 in series, minus has C1, another kind of part",)


def test_names_that_change_polarity_on_the_way() -> None:
    made = board(
        {"U1": ["TX_P", "TX_N", "GND"], "C1": ["TX_P", "RX_N"], "C2": ["TX_N", "RX_P"], "U2": ["RX_P", "RX_N", "GND"]}
    )
    link = one(made)
    assert link.name == "RX"
    assert link.plus == ["U1.2 TX_N C2.1", "C2.2 RX_P U2.1"]
    assert link.missing == ("TX_N and RX_P are one leg, though their names differ in polarity",)


def test_the_net_that_gives_the_name_says_which_leg_is_plus() -> None:
    made = board(
        {
            "U1": ["A_LONG_P", "A_LONG_N", "GND"],
            "C1": ["A_LONG_P", "RX_N"],
            "C2": ["A_LONG_N", "RX_P"],
            "U2": ["RX_P", "RX_N", "GND"],
        }
    )
    link = one(made)
    assert link.nets == ("RX_P", "RX_N")
    assert [hop.split()[1] for hop in link.plus] == ["A_LONG_N", "RX_P"]
    assert [hop.split()[1] for hop in link.minus] == ["A_LONG_P", "RX_N"]
    assert link.series == [("C2", "C1")]


def test_feedback_is_not_followed() -> None:
    made = board(
        {
            "J1": ["IN_P", "IN_N"],
            "R1": ["IN_P", "SUM_P"],
            "R2": ["IN_N", "SUM_N"],
            "R3": ["SUM_P", "OUT_N"],
            "R4": ["SUM_N", "OUT_P"],
            "U1": ["SUM_P", "SUM_N", "OUT_P", "OUT_N", "GND"],
            "U2": ["OUT_P", "OUT_N", "GND"],
        }
    )
    links = {link.name: link for link in told(made)}
    assert set(links) == {"IN", "OUT"}
    assert links["IN"].load == "U1"
    assert links["IN"].hung == ["R3 to net plus 1 OUT_N", "R4 to net minus 1 OUT_P"]
    assert (links["OUT"].source, links["OUT"].load) == ("U1", "U2")


def test_loop_through_capacitors_to_the_same_part() -> None:
    made = board({"U1": ["TX_P", "TX_N", "RX_P", "RX_N"], "C1": ["TX_P", "RX_P"], "C2": ["TX_N", "RX_N"]})
    link = one(made)
    assert (link.source, link.load, link.series) == ("U1", "U1", [("C1", "C2")])


@pytest.mark.parametrize("supply", ["VCC", "GND", "VTT"])
def test_resistors_to_supplies_hang(supply: str) -> None:
    made = board({"J1": ["S_P", "S_N"], "R1": ["S_P", supply], "R2": ["S_N", supply], "U1": ["S_P", "S_N", supply]})
    kind = "to reference" if supply == "GND" else "to net"
    assert one(made).hung == [f"R1 {kind} plus 0 {supply}", f"R2 {kind} minus 0 {supply}"]
    assert one(made).series == []


def test_bias_from_two_nets_is_not_followed_where_both_ends_are_known() -> None:
    made = board(
        {
            "J1": ["S_P", "S_N"],
            "U1": ["S_P", "S_N", "GND"],
            "R1": ["S_P", "x"],
            "R2": ["S_N", "y"],
            "U2": ["x", "y", "GND"],
        }
    )
    assert one(made).series == []
    assert one(made).hung == ["R1 to net plus 0 x", "R2 to net minus 0 y"]


def test_diodes_are_not_in_series() -> None:
    made = board({"J1": ["S_P", "S_N"], "D1": ["S_P", "x"], "D2": ["S_N", "y"], "U1": ["x", "y", "GND"]})
    assert one(made).series == []


def test_parallel_part_hangs() -> None:
    parts = {"J1": ["S_P", "S_N"], "R1": ["S_P", "x"], "R2": ["S_N", "y"], "U1": ["x", "y", "GND"]}
    link = one(board({**parts, "R3": ["S_P", "x"]}))
    assert link.series == [("R1", "R2")]
    assert link.hung == ["R3 to net plus 0 x"]


def test_two_connectors_fed_from_one_part_are_two_links() -> None:
    made = board(
        {
            "U1": padded(["TX_P", "TX_N"], 8),
            "C1": ["TX_P", "TX_A_P"],
            "C2": ["TX_N", "TX_A_N"],
            "J1": ["TX_A_P", "TX_A_N"],
            "C3": ["TX_P", "TX_B_P"],
            "C4": ["TX_N", "TX_B_N"],
            "J2": ["TX_B_P", "TX_B_N"],
        }
    )
    first, second = told(made)
    assert (first.name, first.source, first.load, first.series) == ("TX", "U1", "J1", [("C1", "C2")])
    assert first.missing == (
        "another way on, through C3 and C4 to TX_B_P and TX_B_N, is reported as a pair of its own",
    )
    assert first.hung == ["C3 to net plus 0 TX_B_P", "C4 to net minus 0 TX_B_N"]
    assert (second.name, second.load, second.series) == ("TX_B", "J2", [])


def test_option_that_leads_nowhere_is_left() -> None:
    made = board(
        {
            "U1": ["S_P", "S_N", "GND"],
            "J1": ["S_P", "S_N"],
            "C1": ["S_P", "S_P_OPT"],
            "C2": ["S_N", "S_N_OPT"],
        }
    )
    links = {link.name: link for link in told(made)}
    assert links["S"].series == []
    assert (links["S"].source, links["S"].load) == ("J1", "U1")


def test_listed_pairs_of_one_link_are_one() -> None:
    made = board(
        {"J1": ["A", "B"], "R1": ["A", "C"], "R2": ["B", "D"], "U1": ["C", "D", "GND"]},
    )
    listed = [PairRequest(plus="A", minus="B", name="NEAR"), PairRequest(plus="C", minus="D", name="FAR")]
    assert one(made, listed=listed).name == "NEAR"
