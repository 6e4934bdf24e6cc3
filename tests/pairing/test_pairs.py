from collections.abc import Sequence

import pytest

from pairrules.board import Board, DeclaredPair
from pairrules.pairing.listed_pairs import PairRequest
from pairrules.pairing.pairs import net_pairs
from pairrules.pairing.wiring import wiring_of
from tests.pairing.boards import board, padded


def paired(
    made: Board, *, listed: Sequence[PairRequest] = (), ignore: Sequence[str] = (), reference: Sequence[str] = ("GND",)
) -> tuple[set[tuple[str, str, str]], list[str], tuple[str, ...]]:
    """(plus, minus, found_by) of every pair, halves, missing."""
    nets = tuple(net for net, name in enumerate(made.nets) if name in reference)
    found = net_pairs(made, wiring_of(made), listed=tuple(listed), ignore=tuple(ignore), reference=nets)
    return (
        {(made.nets[pair.plus], made.nets[pair.minus], pair.found_by) for pair in found.pairs},
        [made.nets[net] for net in found.halves],
        found.missing,
    )


def together(*nets: str) -> Board:
    """All nets between the same two parts."""
    return board({"U1": padded(nets), "U2": padded(nets)})


def nets_of(made: Board) -> set[tuple[str, str]]:
    return {(plus, minus) for plus, minus, _ in paired(made)[0]}


@pytest.mark.parametrize(
    ("plus", "minus"),
    [
        ("CLK_P", "CLK_N"),
        ("USB_DP", "USB_DM"),
        ("USB_D+", "USB_D-"),
        ("CANH", "CANL"),
        ("BRIDGE_H", "BRIDGE_L"),
        ("A1P", "A1N"),
        ("TXP", "TXN"),
        ("VDD_SENSE_P", "VDD_SENSE_N"),
        ("CLK_1V8_P", "CLK_1V8_N"),
        ("VIN_P", "VIN_N"),
        ("CS_P", "CS_N"),
        ("TX_P_SERIES", "TX_N_SERIES"),
    ],
)
def test_pairs_by_name(plus: str, minus: str) -> None:
    assert paired(together(plus, minus)) == ({(plus, minus, "net name")}, [], ())


@pytest.mark.parametrize(
    ("one", "other"),
    [
        ("VDD_P", "VDD_N"),
        ("VDD_IO_P", "VDD_IO_N"),
        ("+5V", "-5V"),
        ("+12V_F", "-12V_F"),
        ("V+", "V-"),
        ("VS_P", "VS_N"),
        ("BAT+", "BAT-"),
        ("HV_POS", "HV_NEG"),
        ("3V3P", "3V3N"),
        ("LED_P", "LED_N"),
        ("LED1+", "LED1-"),
        ("ADDR_H", "ADDR_L"),
        ("LED_H", "LED_L"),
        ("BYTE_H", "BYTE_L"),
        ("GATE_H", "GATE_L"),
        ("CS_H", "CS_L"),
        ("RESET_N", "RESET"),
        ("BUS_A", "BUS_B"),
        ("GND_P", "GND_N"),
    ],
)
def test_traps(one: str, other: str) -> None:
    assert paired(together(one, other)) == (set(), [], ())


def test_a_sure_name_needs_no_common_part() -> None:
    made = board({"U1": padded(["CLK_P"]), "U2": padded(["CLK_N"])})
    assert nets_of(made) == {("CLK_P", "CLK_N")}
    assert nets_of(board({}, tracks=["CLK_P", "CLK_N"])) == {("CLK_P", "CLK_N")}


@pytest.mark.parametrize(("plus", "minus"), [("BR_H", "BR_L"), ("A1P", "A1N"), ("TXP", "TXN")])
def test_a_weak_name_needs_a_common_part(plus: str, minus: str) -> None:
    assert nets_of(board({"U1": padded([plus]), "U2": padded([minus])})) == set()
    assert nets_of(board({"R1": [plus, minus], "U1": padded([plus]), "U2": padded([minus])})) == set()
    assert nets_of(board({"U1": padded([plus, minus])})) == {(plus, minus)}
    through = {"R1": [plus, "a"], "R2": [minus, "b"], "U1": padded(["a", "b"])}
    assert nets_of(board(through)) == {(plus, minus)}


def test_a_control_line_in_both_polarities_needs_both_ends_common() -> None:
    supervisor = {"U1": padded(["RESET_P", "RESET_N"]), "U2": padded(["RESET_P"]), "U3": padded(["RESET_N"])}
    assert paired(board(supervisor))[:2] == (set(), [])


def test_both_halves_need_copper_or_pins() -> None:
    assert paired(board({"U1": padded(["CLK_P"])}, extra=["CLK_N"]))[:2] == (set(), ["CLK_P"])


@pytest.mark.parametrize("kind", ["power", "ground"])
def test_nets_the_file_calls_supplies_are_no_legs(kind: str) -> None:
    made = board({"U1": padded(["SW_P", "SW_N"])}, kinds={"SW_P": kind})
    assert nets_of(made) == set()


def test_a_voltage_poured_as_an_area_is_a_supply() -> None:
    parts = {"U1": padded(["VIN+", "VIN-"])}
    assert nets_of(board(parts)) == {("VIN+", "VIN-")}
    assert nets_of(board(parts, areas={"VIN-": 5.0})) == set()


def test_reference_and_ignored_nets_are_not_paired_by_name() -> None:
    made = together("CLK_P", "CLK_N")
    assert paired(made, reference=["CLK_N"])[0] == set()
    assert paired(made, ignore=["CLK*"]) == (set(), [], ())
    assert paired(made, ignore=["CS*_N"])[0] != set()


@pytest.mark.parametrize(
    ("nets", "halves"),
    [
        (["CLK_P"], ["CLK_P"]),
        (["USB_DP", "CANH", "IN+", "SIG_PLUS"], ["CANH", "IN+", "SIG_PLUS", "USB_DP"]),
        (["RESET_N", "CS_N", "EN_P", "VDD_P", "RESET-", "LED_P", "V+", "DDR_DM", "MOTOR_POS", "SIG_N"], []),
        (["TX1_P", "TX1_N", "TX3_N"], ["TX3_N"]),
        (["TX1_P", "TX1_N", "RX3_N"], []),
        (["IN1P", "IN1N", "IN2P", "OUT2P"], ["IN2P"]),
        (["DP_HPD", "P", "CLK_P_GATE"], []),
    ],
)
def test_halves_left_over(nets: list[str], halves: list[str]) -> None:
    assert paired(together(*nets))[1] == halves


def test_settings_go_before_the_file_and_the_file_before_names() -> None:
    made = board(
        {"U1": padded(["A_P", "A_N", "B_P", "B_N", "C_P", "C_N"])},
        pairs=(DeclaredPair(plus="A_P", minus="B_N"), DeclaredPair(plus="C_P", minus="C_N", klass="sensor")),
    )
    found, halves, missing = paired(made, listed=[PairRequest(plus="A_P", minus="C_N")])
    assert found == {("A_P", "C_N", "listed in the settings"), ("B_P", "B_N", "net name")}
    assert halves == ["C_P"]
    assert missing == (
        "the file declares the pair A_P / B_N, but one of its nets is in another pair",
        "the file declares the pair C_P / C_N, but one of its nets is in another pair",
    )
    assert paired(made)[0] == {
        ("A_P", "B_N", "declared in the file"),
        ("C_P", "C_N", "declared in the file"),
    }


def test_declared_pairs_the_board_lacks() -> None:
    made = board(
        {"U1": padded(["A_P"])},
        pairs=(DeclaredPair(plus="A_P", minus="X", name="ONE"), DeclaredPair(plus="A_P", minus="A_P", name="TWO")),
    )
    assert paired(made)[2] == (
        "the file declares the pair ONE, but has no net X",
        "the file declares the pair TWO, but with one net only",
    )


def test_names_in_two_places() -> None:
    assert nets_of(together("A_P_P", "A_P_N", "A_N_P", "A_N_N")) == {("A_P_P", "A_P_N"), ("A_N_P", "A_N_N")}


@pytest.mark.parametrize("supply", ["VCC", "+3V3", "PULLUP"])
def test_a_common_supply_is_no_common_part(supply: str) -> None:
    parts = {"U1": ["A1P", supply, "GND"], "U2": ["A1N", supply, "GND"], "R1": ["A1P", supply], "R2": ["A1N", supply]}
    others = {f"U{place}": [supply, "GND", ""] for place in range(10, 30)}
    assert nets_of(board({**parts, **others})) == set()
