from tests.pairing.boards import board
from tests.pairing.told import one


def test_every_kind() -> None:
    made = board(
        {
            "U1": ["S_P", "S_N", "GND"],
            "J1": ["S_P", "S_N", "GND"],
            "R1": ["S_P", "S_N"],
            "R2": ["S_P", "MID"],
            "R3": ["S_N", "MID"],
            "C1": ["MID", "GND"],
            "C2": ["S_P", "GND"],
            "R4": ["S_N", ""],
            "D1": ["S_P", "GND", "S_N"],
            "D2": ["S_P", "GND", "VCC"],
            "D3": ["S_N", "VCC"],
            "U2": ["S_N", "GND", "VCC"],
            "TP1": ["S_P"],
        }
    )
    assert one(made).hung == [
        "C2 to reference plus 0 GND",
        "D1 tap both 0 GND",
        "D2 to reference plus 0 GND",
        "D3 to net minus 0 VCC",
        "R1 across both 0",
        "R2 to net plus 0 MID",
        "R3 to net minus 0 MID",
        "R4 to net minus 0",
        "TP1 tap plus 0",
        "U2 tap minus 0",
    ]


def test_part_across_at_another_step() -> None:
    made = board(
        {
            "J1": ["S_P", "S_N"],
            "R1": ["S_P", "x"],
            "R2": ["S_N", "y"],
            "C1": ["x", "y"],
            "C2": ["S_P", "y"],
            "U1": ["x", "y", "GND"],
        }
    )
    assert one(made).hung == ["C2 across both 0", "C1 across both 1"]


def test_steps_count_from_the_source() -> None:
    parts = {
        "R1": ["TX_P", "x"],
        "R2": ["TX_N", "y"],
        "C1": ["x", "y"],
        "J1": ["TX_P", "TX_N"],
        "U1": ["x", "y", "GND"],
    }
    link = one(board(parts))
    assert link.source == "U1"
    assert link.hung == ["C1 across both 0"]
