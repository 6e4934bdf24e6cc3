import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pairrules.pairing.net_names import common_reading, readings, shared_name

HALVES = [
    ("CLK_P", "CLK_N", "CLK", True),
    ("LN0_PAD_TX_P", "LN0_PAD_TX_N", "LN0_PAD_TX", True),
    ("LN0_PAD_TX_P_SERIES", "LN0_PAD_TX_N_SERIES", "LN0_PAD_TX_SERIES", True),
    ("clk_p", "clk_n", "clk", True),
    ("P_IN", "N_IN", "IN", True),
    ("TX.P", "TX.N", "TX", True),
    ("TX-P", "TX-N", "TX", True),
    ("TX<P>", "TX<N>", "TX<>", True),
    ("USB_DP", "USB_DM", "USB_D", True),
    ("USB_DP", "USB_DN", "USB_D", True),
    ("DP", "DM", "D", True),
    ("USB1_Dp", "USB1_Dm", "USB1_D", True),
    ("D+", "D-", "D", True),
    ("IN_+", "IN_-", "IN", True),
    ("IN+_F", "IN-_F", "IN_F", True),
    ("CANH", "CANL", "CAN", True),
    ("CAN1_H", "CAN1_L", "CAN1", True),
    ("CAN_H_BUS", "CAN_L_BUS", "CAN_BUS", True),
    ("SIG_PLUS", "SIG_MINUS", "SIG", True),
    ("sig_Plus", "sig_Minus", "sig", True),
    ("SIG_POS", "SIG_NEG", "SIG", True),
    ("DQS0_T", "DQS0_C", "DQS0", True),
    ("CK_t", "CK_c", "CK", True),
    ("BRIDGE_H", "BRIDGE_L", "BRIDGE", False),
    ("A1P", "A1N", "A1", False),
    ("TX0P_C", "TX0N_C", "TX0_C", False),
    ("TXP", "TXN", "TX", False),
    ("RXP0", "RXN0", "RX0", False),
    ("OUT_P1", "OUT_N1", "OUT1", False),
    ("USBDP", "USBDM", "USBD", False),
    ("TX+0", "TX-0", "TX0", False),
    ("+IN", "-IN", "IN", False),
    ("MICPOS", "MICNEG", "MIC", False),
]


@pytest.mark.parametrize(("plus", "minus", "shared", "sure"), HALVES)
def test_halves(plus: str, minus: str, shared: str, sure: bool) -> None:
    reading = common_reading(plus, minus)
    assert reading is not None
    assert reading.sure is sure
    assert shared_name(plus, minus) == shared
    assert common_reading(minus, plus) is None


@pytest.mark.parametrize(
    ("plus", "minus"),
    [
        ("CLK_P", "CLK_n"),
        ("CLK_P", "clk_N"),
        ("CLK_P", "CLK2_N"),
        ("CLK_P", "CLK_N_F"),
        ("STEP", "STEN"),
        ("MAP", "MAN"),
        ("BRIDGE_A", "BRIDGE_B"),
        ("STATE_T", "STATE_C"),
        ("CLK_P", "CLK_M"),
        ("+5", "-5"),
        ("A+B", "A-B"),
        ("SCANH", "SCANL"),
        ("GATE_HI", "GATE_LO"),
        ("PLUS", "MINU"),
    ],
)
def test_no_halves(plus: str, minus: str) -> None:
    assert common_reading(plus, minus) is None


def test_rightmost_place_first() -> None:
    first = readings("LN0_P_TX_P")[0]
    assert (first.head, first.tail, first.sign) == ("LN0_P_TX_", "", 1)


@pytest.mark.parametrize(
    ("plus", "minus", "shared"),
    [
        ("RS485_A", "RS485_B", "RS485"),
        ("A", "B", "A/B"),
        ("P", "N", "P/N"),
        ("NETA1", "NETB1", "NET1"),
        ("X", "X2", "X"),
        ("", "", "/"),
    ],
)
def test_shared_name_without_polarity(plus: str, minus: str, shared: str) -> None:
    assert shared_name(plus, minus) == shared


@settings(deadline=None)
@given(st.text(max_size=40), st.text(max_size=20))
def test_any_text_is_read(head: str, tail: str) -> None:
    for name in (head + tail, f"{head}_P_{tail}", f"{head}+{tail}"):
        for reading in readings(name):
            assert name.startswith(reading.head)
            assert name.endswith(reading.tail)
            assert len(reading.head) + len(reading.tail) < len(name)


def test_long_names_cost_little() -> None:
    assert 0 < len(readings("P_" * 50_000)) <= 64
