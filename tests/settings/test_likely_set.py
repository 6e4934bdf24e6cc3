"""Which shipped set a pair is taken for."""

import pytest

from pairrules.settings.likely_set import DraftPair, likely_set


def pair(*nets: str, name: str = "", **more: object) -> DraftPair:
    return DraftPair(name=name or nets[0].rstrip("PN+-_"), nets=nets, **more)  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("nets", "expected"),
    [
        (("CANH", "CANL"), "can"),
        (("CAN1_H", "CAN1_L"), "can"),
        (("SCAN_P", "SCAN_N"), ""),
        (("RS-485_A", "RS-485_B"), "rs485"),
        (("BUS_A", "BUS_B"), "rs485"),
        (("USB_DP", "USB_DM"), "usb2-high-speed"),
        (("D+", "D-"), "usb2-high-speed"),
        (("USB_SSTX_P", "USB_SSTX_N"), "serial-lane"),
        (("PCIE_TX0_P", "PCIE_TX0_N"), "serial-lane"),
        (("LN0_PAD_RX_P", "LN0_PAD_RX_N"), "serial-lane"),
        (("ETH_TX_P", "ETH_TX_N"), "ethernet-100base-tx"),
        (("GE_MDI0_P", "GE_MDI0_N"), "ethernet-1000base-t"),
        (("T1_P", "T1_N"), "single-pair-ethernet"),
        (("LVDS_CLK_P", "LVDS_CLK_N"), "lvds"),
        (("BR_P", "BR_N"), "bridge-sensor"),
        (("STRAIN1+", "STRAIN1-"), "bridge-sensor"),
        (("TC3_P", "TC3_N"), "thermocouple"),
        (("MIC_P", "MIC_N"), "audio-line"),
        (("AIN2_P", "AIN2_N"), "converter-input"),
        (("BUOY_P", "BUOY_N"), ""),
    ],
)
def test_by_name(nets: tuple[str, ...], expected: str) -> None:
    assert likely_set(pair(*nets)).set == expected


def test_a_direction_counts_with_the_parts_and_the_impedance() -> None:
    nets = ("TX_P", "TX_N")
    assert likely_set(pair(*nets)).set == ""
    assert likely_set(pair(*nets, ends=("U1 PHY", "J6 RJ45"))).set == "ethernet-100base-tx"
    assert likely_set(pair(*nets, ends=("U1", "T1 1:1"))).set == "ethernet-100base-tx"
    assert likely_set(pair(*nets, series=("C1", "C2"))).set == "serial-lane"
    assert likely_set(pair(*nets, series=("C1",))).set == ""
    assert likely_set(pair(*nets, impedance_ohm=97.0)).set == "lvds"
    assert likely_set(pair(*nets, impedance_ohm=60.0)).set == ""
    assert likely_set(pair("BUOY_P", "BUOY_N", impedance_ohm=97.0)).set == ""


def test_a_guess_says_what_it_rests_on() -> None:
    assert likely_set(pair("CANH", "CANL")).why == "by name (CANH)"
    why = likely_set(pair("CLK_P", "CLK_N", impedance_ohm=98.44)).why
    assert why == "by its direction and 98.4 ohm; it may as well be ethernet-100base-tx or serial-lane"
