"""Values as they are written on parts; the markings with a letter for the decimal point follow IEC 60062 (recalled)."""

from __future__ import annotations

import pytest

from pairrules.board.part_values import part_value


@pytest.mark.parametrize(
    ("ref", "text", "value"),
    [
        ("R1", "100k", 1e5),
        ("R1", "10K", 1e4),
        ("R1", "4k7", 4700),
        ("R12", "120R", 120),
        ("R12", "2R2", 2.2),
        ("R1", "120", 120),
        ("R1", "1M", 1e6),
        ("R1", "49.9 ohm 1%", 49.9),
        ("R1", "350 Ω", 350),
        ("R1", "5m", 0.005),
        ("C3", "0.1uF", 1e-7),
        ("C3", "4.7UF", 4.7e-6),
        ("C3", "100n/16V", 1e-7),
        ("C3", "22pF", 22e-12),
        ("C3", "4n7", 4.7e-9),
        ("C3", "100NF", 1e-7),
        ("L2", "10uH", 1e-5),
    ],
)
def test_written_values(ref: str, text: str, value: float) -> None:
    assert part_value(ref, text).value == pytest.approx(value, rel=1e-12)


@pytest.mark.parametrize(
    ("ref", "text"),
    [("R1", ""), ("R1", "DNP"), ("R1", "100nF"), ("C1", "10k"), ("C1", "1MF"), ("FB1", "600R@100MHz"), ("U1", "100k"),
     ("R1", "RES-0603"), ("C1", "2R2"), ("R1", "1.2k5")],
)  # fmt: skip
def test_what_is_not_understood_is_unknown(ref: str, text: str) -> None:
    assert part_value(ref, text).value is None


def test_kind_and_tolerance() -> None:
    found = part_value("R7", "10k 0.1%")
    assert (found.kind, found.tolerance) == ("resistor", pytest.approx(0.001))
    assert part_value("FB3", "600R").kind == "ferrite bead"
    assert part_value("Q1", "x").kind == ""
    assert part_value("C4", "100nF ±5%").tolerance == pytest.approx(0.05)


def test_a_capacitance_written_on_another_part_is_its_own() -> None:
    found = part_value("D3", "3.5 pF")
    assert (found.kind, found.value) == ("capacitance", pytest.approx(3.5e-12))
    assert part_value("D3", "5V0").kind == ""
    assert part_value("U1", "100").kind == ""
